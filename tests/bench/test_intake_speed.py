"""Intake of a million device samples, beside pandas reading the same file; and the memory it takes."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path
from statistics import median
from time import perf_counter

import numpy as np
import pandas as pd
import pytest

from core.record.instant import MINUTE, iso, parse
from storage.intake.batch import take_in
from storage.intake.log_csv import read_log_csv
from storage.store import Store

pytestmark = pytest.mark.bench
START, NOW = parse("2023-03-01T00:00:00+00:00"), parse("2026-12-01T00:00:00+00:00")
CHANNELS = (("leak", "L/min", 24, 0), ("vte", "mL", 480, 0), ("mv", "L/min", 8, 1), ("rr_total", "/min", 18, 0),
            ("spo2", "%", 91, 0), ("hr", "/min", 88, 0))  # fmt: skip
PART = 20_000
MEMORY = """
import sys
from pathlib import Path
from core.record.instant import parse
from storage.intake.batch import take_in
from storage.intake.log_csv import read_log_csv
from storage.store import Store
now = parse("2026-12-01T00:00:00+00:00")
def peak():
    status = Path("/proc/self/status").read_text()
    return int(status.split("VmHWM:")[1].split()[0])
with Store.create(Path(sys.argv[2]), now=now) as store:
    store.head()
    Path("/proc/self/clear_refs").write_text("5")  # the peak starts from here, not from the program before
    idle = peak()
    intake = read_log_csv(sys.argv[1], now=now, existing=store)
    assert not intake.refusals, intake.refusals[:3]
    take_in(store, intake, by="AB", now=now)
    print(intake.sample_count, (peak() - idle) / 1024)
"""


def write_log(path: Path, samples: int) -> Path:
    """A log of device samples by the minute."""
    rng = np.random.default_rng(1)
    minutes = samples // len(CHANNELS) + 1
    start = START - max(0, minutes - 1_000_000) * MINUTE
    left = samples
    with path.open("w", encoding="utf-8") as file:
        file.write("episode,at,channel,value,unit,by,note\n")
        for begin in range(0, minutes, PART):
            count = min(PART, minutes - begin)
            columns = [_values(rng, c, mean, d, count) for c, _u, mean, d in CHANNELS]
            lines: list[str] = []
            for i in range(count):
                at = iso(start + (begin + i) * MINUTE)
                for (c, u, _mean, _d), values in zip(CHANNELS, columns, strict=True):
                    lines.append(f"E1,{at},{c},{values[i]:g},{u},device,\n")
            file.writelines(lines[:left])
            left -= len(lines[:left])
    return path


def _values(rng: np.random.Generator, channel: str, mean: float, decimals: int, count: int) -> list[float]:
    values = np.round(rng.normal(mean, mean / 20, count), decimals)
    return [float(x) for x in np.clip(values, 0, 99 if channel == "spo2" else 3000)]


def test_a_million_device_samples(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = write_log(tmp_path / "log.csv", 1_000_000)
    pandas, ours = [], []
    for n in range(5):
        begun = perf_counter()
        pd.read_csv(path)
        pandas.append(perf_counter() - begun)
        with Store.create(tmp_path / f"{n}.luff", now=NOW) as store:
            begun = perf_counter()
            intake = read_log_csv(path, now=NOW, existing=store)
            take_in(store, intake, by="AB", now=NOW)
            ours.append(perf_counter() - begun)
            assert intake.sample_count == 1_000_000
    ratio = median(ours) / median(pandas)
    with capsys.disabled():
        print(f"\n1,000,000 samples: pandas {median(pandas):.2f} s, taken in {median(ours):.2f} s, ratio {ratio:.2f}")
    assert ratio <= 4


@pytest.mark.skipif(not Path("/proc/self/clear_refs").exists(), reason="asks Linux for the peak of memory")
@pytest.mark.parametrize("samples", [1_000_000, 6_000_000, 20_000_000])
@pytest.mark.timeout(0)
def test_memory_stays_bounded(tmp_path: Path, capsys: pytest.CaptureFixture[str], samples: int) -> None:
    path = write_log(tmp_path / "log.csv", samples)
    command = [sys.executable, "-c", MEMORY, str(path), str(tmp_path / "ward.luff")]
    done = subprocess.run(command, check=True, capture_output=True, text=True, cwd=Path(__file__).parents[2])
    count, megabytes = done.stdout.split()
    with capsys.disabled():
        print(f"\n{int(count):,} samples: peak memory {float(megabytes):.0f} MB above idle")
    assert int(count) == samples
    assert float(megabytes) <= 300
