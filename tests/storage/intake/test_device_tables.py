"""Trend tables of devices: gaps and overlaps, a clock that is off, what leak means, settings that repeat."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest

from core.record.instant import MINUTE, SECOND, iso, parse
from core.record.message import RecordError
from storage.intake.batch import take_in
from storage.intake.findings import Intake
from storage.intake.log_csv import read_log_csv
from storage.intake.mapping import Mapping
from storage.intake.proposals import propose
from storage.intake.table import open_table
from storage.intake.table_reading import read_table
from storage.intake.table_rows import Answers
from storage.store import Store
from tests.storage.conftest import NOW

START = parse("2026-03-27T02:00:00+00:00")


def trend(path: Path, first: int, last: int, *, step: int = 1, leak: int = 20, ipap: int = 16) -> Path:
    """Rows from minute `first` to `last` after the start."""
    rows = ["Timestamp,Leak (L/min),Tidal volume (mL),Breath rate,IPAP (cmH2O)"]
    for m in range(first, last, step):
        rows.append(f"{iso(START + m * MINUTE)},{leak},{400 + m % 50},{18 + m % 4},{ipap if m < 90 else 20}")
    path.write_text("\n".join(rows) + "\n")
    return path


def mapping_of(path: Path) -> Mapping:
    made = propose(open_table(path)).mapping
    return replace(made, written_by="device", leak_definition="unintentional")


def read(path: Path, store: Store | None = None, shift: float = 0.0) -> Intake:
    return read_table(path, mapping_of(path), now=NOW, answers=Answers("E1", shift), existing=store)


def test_a_trend_becomes_samples_and_its_settings_become_changes(tmp_path: Path, store: Store) -> None:
    intake = read(trend(tmp_path / "a.csv", 0, 120))
    assert not intake.refusals
    assert {(b.channel, b.t.size) for b in intake.samples} == {("leak", 120), ("vte", 120), ("rr_total", 120)}
    changes = [(d.entry.channel, d.entry.raw, (d.entry.at - START) // MINUTE) for d in intake.entries]
    assert changes == [("ipap", "16", 0), ("ipap", "20", 90), ("leak_definition", "unintentional", 0)]
    take_in(store, intake, by="AB", now=NOW)
    assert store.episode("E1").number("leak").v.size == 120
    assert store.sources()[0].facts["leak_definition"] == "unintentional"


def test_the_table_and_the_log_file_of_the_same_night_give_the_same_samples(tmp_path: Path) -> None:
    table = read(trend(tmp_path / "a.csv", 0, 60))
    rows = ["episode,at,channel,value,unit,by,note"]
    for m in range(60):
        rows.append(f"E1,{iso(START + m * MINUTE)},vte,{400 + m % 50},mL,device,")
    log = tmp_path / "log.csv"
    log.write_text("\n".join(rows) + "\n")
    (by_log,) = read_log_csv(log, now=NOW).samples
    by_table = next(b for b in table.samples if b.channel == "vte")
    assert np.array_equal(by_log.t, by_table.t)
    assert np.array_equal(by_log.v, by_table.v)


def test_gaps_stay_a_later_file_wins_and_nothing_is_taken_twice(tmp_path: Path, store: Store) -> None:
    first, second = trend(tmp_path / "a.csv", 0, 60), trend(tmp_path / "b.csv", 50, 120, leak=30)
    late = trend(tmp_path / "c.csv", 200, 230)
    for path in (first, second, late):
        take_in(store, read(path, store), by="AB", now=NOW)
    leak = store.episode("E1").number("leak")
    assert ((leak.t[1:] - leak.t[:-1]) // MINUTE).max() == 81, "the gap between the files stays a gap"
    assert leak.v.tolist() == [20.0] * 50 + [30.0] * 70 + [20.0] * 30
    settings = [e for e in store.entries("E1") if e.channel == "ipap"]
    assert [(e.number, (e.at - START) // MINUTE) for e in settings] == [(16.0, 0), (20.0, 90)], "no change repeated"
    head = store.head()
    for path in (second, late):
        again = read(path, store)
        assert (again.entries, again.chunks) == ((), ())
        assert take_in(store, again, by="AB", now=NOW) is None
    assert store.head() == head


def test_a_clock_that_is_off_is_shifted_and_the_shift_is_kept(tmp_path: Path, store: Store) -> None:
    path = trend(tmp_path / "a.csv", 0, 10)
    take_in(store, read(path, shift=-3600.0), by="AB", now=NOW)
    assert store.episode("E1").number("vte").t[0] == START - 3600 * SECOND
    assert store.sources()[0].facts["clock_shift_s"] == -3600.0


def test_what_leak_means_is_asked(tmp_path: Path) -> None:
    path = trend(tmp_path / "a.csv", 0, 10)
    with pytest.raises(RecordError) as refused:
        read_table(path, replace(mapping_of(path), leak_definition=""), now=NOW, answers=Answers("E1"))
    assert refused.value.message.key == "mapping.leak"


def test_a_device_row_that_cannot_be_read_is_named_and_an_empty_one_is_a_gap(tmp_path: Path) -> None:
    path = trend(tmp_path / "a.csv", 0, 300)
    lines = path.read_text().split("\n")
    lines[270] = lines[270].replace(",4", ",94", 1)  # a tidal volume past its limit, beyond the first block
    lines[271] = ",".join([lines[271].split(",")[0], "", "--", "18", "20"])
    lines[272] = lines[272].replace("2026-03-27T", "2026-03-27 x")
    path.write_text("\n".join(lines))
    intake = read(path)
    assert [(r.line, r.column, r.message.key) for r in intake.refusals] == [
        (271, "Tidal volume (mL)", "value.past_hard_limit"), (273, "Timestamp", "time.unlike"),
    ]  # fmt: skip
    leak = next(b for b in intake.samples if b.channel == "leak")
    assert np.isnan(leak.v[(leak.t - START) // MINUTE == 270]).all()
    assert leak.t.size == 299


def test_the_way_by_columns_and_the_way_by_rows_agree(tmp_path: Path) -> None:
    plain = trend(tmp_path / "a.csv", 0, 1000, step=2)
    quoted = tmp_path / "b.csv"
    lines = plain.read_text().split("\n")
    lines_quoted = [f'"{x.split(",")[0]}",' + ",".join(x.split(",")[1:]) if i % 7 == 0 and x else x
                    for i, x in enumerate(lines[1:])]  # fmt: skip
    quoted.write_text("\n".join([lines[0], *lines_quoted]))
    one, other = read(plain), read(quoted)
    assert not other.refusals
    for a, b in zip(one.samples, other.samples, strict=True):
        assert np.array_equal(a.t, b.t)
        assert np.array_equal(a.v, b.v)


def test_times_of_a_night_with_a_change_of_the_clock_are_refused_where_they_came_twice(
    tmp_path: Path,
) -> None:
    rows = ["time,vte (mL)"] + [f"2025-10-26 0{h}:{m:02d},{400 + m}" for h in (1, 2, 3) for m in range(0, 60, 10)]
    path = tmp_path / "a.csv"
    path.write_text("\n".join(rows) + "\n")
    mapping = replace(propose(open_table(path), "Europe/Oslo").mapping, written_by="device")
    intake = read_table(path, mapping, now=NOW, answers=Answers("E1"))
    assert {r.message.key for r in intake.refusals} == {"time.repeated"}
    assert (len(intake.refusals), intake.sample_count) == (6, 12)
    time = replace(mapping.time, repeated="second")
    second = read_table(path, replace(mapping, time=time), now=NOW, answers=Answers("E1"))
    assert second.sample_count == 18
