"""A million device samples in a wide table by mapping: time against pandas.read_csv of the same file, and memory.

The design's limit of 4 is for the log file, one value a row. A wide table of six channels is a sixth of its size for
pandas and no less work for the record (samples are judged, packed and hashed), so its limit here is its own.
"""

from __future__ import annotations

import time
import tracemalloc
from dataclasses import replace
from pathlib import Path
from statistics import median

import pytest

from core.record.instant import SECOND, parse, to_datetime
from storage.intake.proposals import propose
from storage.intake.table import open_table
from storage.intake.table_reading import read_table
from storage.intake.table_rows import Answers

pytestmark = pytest.mark.bench
ROWS, ROUNDS, LIMIT, MEMORY = 166_667, 3, 12.0, 300 << 20
NOW = parse("2026-03-28T02:00:00Z")
HEADER = "Timestamp,Leak (L/min),Tidal volume (mL),Minute volume (L/min),Breath rate,Peak pressure (cmH2O),Triggered"


def write(path: Path) -> Path:
    start = parse("2026-03-20T00:00:00Z")
    with path.open("w") as file:
        file.write(HEADER + "\n")
        for n in range(ROWS):
            at = to_datetime(start + n * SECOND).strftime("%Y-%m-%d %H:%M:%S")
            file.write(f"{at},{10 + n * 7 % 31},{300 + n * 11 % 300},{5 + n % 50 / 10:.1f},{12 + n % 18},")
            file.write(f"{15 + n % 50 / 10:.1f},{n % 101}\n")
    return path


def test_a_million_samples(tmp_path: Path) -> None:
    import pandas as pd

    path = write(tmp_path / "trend.csv")
    table = open_table(path)
    mapping = replace(propose(table, "Europe/Oslo").mapping, leak_definition="total", written_by="device")
    alone, ours = [], []
    for _ in range(ROUNDS):
        begun = time.perf_counter()
        pd.read_csv(path)
        alone.append(time.perf_counter() - begun)
        begun = time.perf_counter()
        intake = read_table(path, mapping, now=NOW, answers=Answers("E1"))
        ours.append(time.perf_counter() - begun)
    assert intake.sample_count == ROWS * 6
    tracemalloc.start()
    read_table(path, mapping, now=NOW, answers=Answers("E1"))
    peak = tracemalloc.get_traced_memory()[1]
    tracemalloc.stop()
    ratio = median(ours) / median(alone)
    print(f"\n{ROWS * 6:,} samples: pandas {median(alone):.2f} s, intake {median(ours):.2f} s, ratio {ratio:.1f}, "
          f"{peak >> 20} MB")  # fmt: skip
    assert ratio <= LIMIT
    assert peak <= MEMORY
