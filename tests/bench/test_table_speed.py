"""A million device samples in tables by mapping, taken into a store, against pandas.read_csv of the file; memory.

Wide and long tables by the second, a date and a clock in two columns, values with many decimals. The wide tables by
the minute are 115 days of one patient, whole and with every fiftieth minute missing.
"""

from __future__ import annotations

import subprocess
import sys
import time
from dataclasses import replace
from pathlib import Path
from statistics import median

import numpy as np
import pandas as pd
import pytest

from core.record.instant import parse
from storage.intake.batch import take_in
from storage.intake.mapping import Mapping
from storage.intake.proposals import propose
from storage.intake.table import open_table
from storage.intake.table_reading import read_table
from storage.intake.table_rows import Answers
from storage.store import Store

pytestmark = pytest.mark.bench
SAMPLES, ROUNDS, LIMIT, MEMORY_MB = 1_000_000, 9, 4.0, 300
NOW = parse("2026-03-28T02:00:00Z")
COLUMNS = {"Leak (L/min)": ("leak", 24, 0), "Tidal volume (mL)": ("vte", 480, 0),
           "Minute volume (L/min)": ("mv", 8, 1), "Breath rate": ("rr_total", 18, 0),
           "Peak pressure (cmH2O)": ("pip", 18, 1), "Triggered": ("spont_percent", 60, 0)}  # fmt: skip
SHAPES = {"wide, by the second": 1, "long, by the second": 1, "date and clock": 1, "many decimals": 1,
          "wide, by the minute": 60, "minutes missing": 60}  # fmt: skip
CHILD = """
import sys
from pathlib import Path
from core.record.instant import parse
from storage.intake.batch import take_in
from storage.intake.mapping import from_text
from storage.intake.table_reading import read_table
from storage.intake.table_rows import Answers
from storage.store import Store
now = parse("2026-03-28T02:00:00Z")
def peak():
    return int(Path("/proc/self/status").read_text().split("VmHWM:")[1].split()[0])
with Store.create(Path(sys.argv[2]), now=now) as store:
    store.head()
    Path("/proc/self/clear_refs").write_text("5")
    idle = peak()
    mapping = from_text(Path(sys.argv[3]).read_text())
    intake = read_table(Path(sys.argv[1]), mapping, now=now, answers=Answers("E1"), existing=store)
    take_in(store, intake, by="AB", now=now)
    print(intake.sample_count, (peak() - idle) / 1024)
"""


def write(path: Path, shape: str, samples: int = SAMPLES) -> Path:
    """A table of that shape; values scatter as a device's do."""
    rng = np.random.default_rng(3)
    rows = samples // len(COLUMNS) + 1
    steps = np.arange(rows)
    if shape == "minutes missing":
        steps = np.sort(rng.choice(rows * 50 // 49, rows, replace=False))
    times = pd.Timestamp("2021-03-01") + pd.to_timedelta(steps * SHAPES[shape], unit="s")
    made: dict[str, object] = {"Timestamp": times.strftime("%Y-%m-%d %H:%M:%S")}
    if shape == "date and clock":
        made = {"Date": times.strftime("%d.%m.%Y"), "Clock": times.strftime("%H:%M:%S")}
    for name, (key, mean, decimals) in COLUMNS.items():
        places = 4 if shape == "many decimals" and key in ("leak", "vte", "mv") else decimals
        values = np.clip(rng.normal(mean, mean / 8, rows), 0, 99 if key == "spont_percent" else 3000)
        made[name] = [f"{x:.{places}f}" for x in values]
    frame = pd.DataFrame(made)
    if shape.startswith("long"):
        frame = frame.melt(id_vars="Timestamp", var_name="Parameter", value_name="Value")
        frame["Unit"] = frame["Parameter"].str.extract(r"\((.*)\)")[0].fillna("")
        frame["Parameter"] = frame["Parameter"].str.replace(r" \(.*", "", regex=True)
        frame = frame.sort_values("Timestamp", kind="stable")[["Timestamp", "Parameter", "Value", "Unit"]]
    frame.to_csv(path, index=False)
    return path


def mapping_of(path: Path) -> Mapping:
    """The mapping as a person completes it."""
    mapping = replace(propose(open_table(path), "UTC").mapping, leak_definition="total", written_by="device")
    mapping = replace(mapping, time=replace(mapping.time, order=mapping.time.order or "dmy"))
    if mapping.long is None:
        return mapping
    names = {name.partition(" (")[0]: key for name, (key, _m, _d) in COLUMNS.items()}
    return replace(mapping, long=replace(mapping.long, names=names))


@pytest.mark.parametrize("shape", SHAPES)
def test_a_million_samples(tmp_path: Path, capsys: pytest.CaptureFixture[str], shape: str) -> None:
    path = write(tmp_path / "trend.csv", shape)
    mapping = mapping_of(path)
    alone, ours = [], []
    for n in range(ROUNDS):
        begun = time.perf_counter()
        pd.read_csv(path)
        alone.append(time.perf_counter() - begun)
        with Store.create(tmp_path / f"{n}.luff", now=NOW) as store:
            begun = time.perf_counter()
            intake = read_table(path, mapping, now=NOW, answers=Answers("E1"), existing=store)
            take_in(store, intake, by="AB", now=NOW)
            ours.append(time.perf_counter() - begun)
        assert SAMPLES <= intake.sample_count < SAMPLES + 6
    ratio = median(ours) / median(alone)
    with capsys.disabled():
        print(f"\n{shape}, {SAMPLES:,} samples: pandas {median(alone):.2f} s, taken in {median(ours):.2f} s, "
              f"ratio {ratio:.2f}")  # fmt: skip
    assert ratio <= LIMIT


@pytest.mark.skipif(not Path("/proc/self/clear_refs").exists(), reason="asks Linux for the peak of memory")
@pytest.mark.parametrize("samples", [1_000_000, 6_000_000])
def test_memory_stays_bounded(tmp_path: Path, capsys: pytest.CaptureFixture[str], samples: int) -> None:
    path = write(tmp_path / "trend.csv", "wide, by the second", samples)
    kept = tmp_path / "mapping.json"
    from storage.intake.mapping import to_text

    kept.write_text(to_text(mapping_of(path)))
    command = [sys.executable, "-c", CHILD, str(path), str(tmp_path / "ward.luff"), str(kept)]
    done = subprocess.run(command, check=True, capture_output=True, text=True, cwd=Path(__file__).parents[2])
    count, megabytes = done.stdout.split()
    with capsys.disabled():
        print(f"\n{int(count):,} samples by mapping: peak memory {float(megabytes):.0f} MB above idle")
    assert int(count) >= samples
    assert float(megabytes) <= MEMORY_MB
