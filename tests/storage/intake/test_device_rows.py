"""The quick way through device rows equals the slow one, row by row, error by error."""

from __future__ import annotations

import tempfile
from pathlib import Path

import numpy as np
import pytest
from hypothesis import example, given, settings
from hypothesis import strategies as st

from core.record import instant
from core.record.message import RecordError
from storage.intake import sample_spool, watched_file
from storage.intake.device_rows import DeviceRows
from storage.intake.findings import Intake
from storage.intake.iso_columns import read_instants
from storage.intake.log_csv import read_log_csv
from tests.storage.conftest import NOW

HEADER = "episode,at,channel,value,unit,by,note,leak_definition"
_VALUES = [
    "24",
    "24.5",
    "0",
    "-1",
    "9999",
    "",
    "x",
    "1e3",
    "24,5",
    " 7 ",
    "00012",
    "123456789",
    "+5",
    ".5",
    "=1",
]
_TIMES = [
    "2026-03-28T01:00:00+00:00", "2026-03-28T01:00:00Z", "2026-03-28T03:00:00+02:00", "2026-03-28T01:00+00:00",
    "2026-03-28T01:00:00.5+00:00", "2026-02-29T01:00:00+00:00", "2024-02-29T01:00:00+00:00", "2026-03-28 01:00:00Z",
    "2026-03-28T24:00:00+00:00", "2026-03-28T01:00:00", "2031-01-01T00:00:00Z", "1989-01-01T00:00:00Z", "soon", "",
]  # fmt: skip


@st.composite
def rows(draw: st.DrawFn) -> str:
    """A device row, mostly right, sometimes wrong in one of its columns."""

    def mostly(right: list[str], wrong: list[str]) -> str:
        return draw(st.sampled_from(right * 4 + wrong))

    minute = draw(st.integers(0, 59))
    at = mostly([f"2026-03-28T00:{minute:02d}:{draw(st.integers(0, 59)):02d}+00:00"], _TIMES)
    value = mostly(["24", "7", "31"], [f'"{v}"' if "," in v else v for v in _VALUES])
    return ",".join([
        mostly(["E1", "E2"], ["", " E1", "x" * 50, "é", '"E,1"']), at,
        mostly(["leak", "mv", "spo2"], ["ph", "nothing", "note", "LEAK", ""]), value,
        mostly(["", "L/min"], ["mL/min", "%", "psi", "l/min"]), mostly(["device"], ["AB", "devices", ""]),
        mostly([""], ["seen"]), mostly(["", "total"], ["mostly", "unintentional"]),
    ])  # fmt: skip


def outcome(intake: Intake) -> tuple[object, ...]:
    samples = {(s.episode, s.channel): (s.t.tolist(), [str(x) for x in s.v], s.decimals) for s in intake.samples}
    entries = [(d.entry, d.id) for d in intake.entries]
    refusals = [(r.line, r.column, r.value, r.message.key) for r in intake.refusals]
    return (
        samples,
        entries,
        refusals,
        intake.refused_rows,
        [(d.line, d.message.key) for d in intake.doubts],
        intake.whole,
    )


def read(path: Path, *, slow: bool) -> Intake:
    if not slow:
        return read_log_csv(path, now=NOW)
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr(DeviceRows, "take", lambda _self, _block: None)
        return read_log_csv(path, now=NOW)


@settings(max_examples=200, deadline=None)
@given(st.lists(rows(), max_size=30), st.sampled_from(["\n", "\r\n"]))
@example([f"E1,{at},leak,{v},L/min,device,," for at, v in zip(_TIMES, _VALUES, strict=False) if "," not in v], "\n")
def test_the_quick_way_equals_the_slow_way(lines: list[str], end: str) -> None:
    with tempfile.TemporaryDirectory() as place:
        path = Path(place) / "log.csv"
        path.write_bytes((end.join([HEADER, *lines]) + end).encode())
        assert outcome(read(path, slow=False)) == outcome(read(path, slow=True))


@settings(max_examples=300)
@given(st.one_of(
    st.sampled_from(_TIMES),
    st.datetimes().map(lambda d: d.isoformat()[:19] + "Z"),
    st.tuples(st.datetimes(), st.integers(-23, 23), st.integers(0, 59)).map(
        lambda x: f"{x[0].isoformat()[:19]}{x[1]:+03d}:{x[2]:02d}"
    ),
    st.from_regex(r"\A[0-9]{4}-[0-9]{2}-[0-9]{2}T[0-9]{2}:[0-9]{2}:[0-9]{2}(Z|[+-][0-9]{2}:[0-9]{2})\Z"),
))  # fmt: skip
def test_instants_of_a_column_are_those_of_the_parser(text: str) -> None:
    data = np.frombuffer(text.encode() + bytes(64), np.uint8)
    t, good = read_instants(data, np.zeros(1, np.int64), np.array([len(text.encode())]))
    try:
        expected = instant.parse(text)
    except RecordError:
        assert not good[0]
        return
    if good[0]:
        assert t[0] == expected


def test_samples_packed_early_are_the_same(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    """Memory stays bounded in a long file by packing; order, repeats and lines come out as they would."""
    order = np.random.default_rng(3).permutation(3000)
    lines = [f"E1,{instant.iso(NOW - int(i) * 60_000_000)},leak,{i % 90},L/min,device,," for i in order]
    lines[2500] = lines[100]
    path = tmp_path / "log.csv"
    path.write_text("\n".join([HEADER, *lines]) + "\n")
    plain = outcome(read(path, slow=False))
    monkeypatch.setattr(sample_spool, "_PENDING", 50)
    for slow in (False, True):
        assert outcome(read(path, slow=slow)) == plain
    assert [(r[0], r[3]) for r in plain[2]] == [(2502, "row.repeated")]  # type: ignore[index,attr-defined]


def test_blocks_give_the_same_rows_wherever_they_are_cut(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:

    lines = [f'E{i},2026-03-28T01:00:00Z,note,"one, ""two""\nthree {"x" * i}",,AB,,' for i in range(60)]
    lines += [f"E{i},2026-03-28T01:00:00Z,leak,{i},L/min,device,," for i in range(60)]
    lines.append("E1,2026-03-28T01:00:00Z,rr,500,,AB,,")
    path = tmp_path / "log.csv"
    path.write_text("\n".join([HEADER, *lines]))
    whole = outcome(read(path, slow=False))
    assert [r[0] for r in whole[2]] == [182]  # type: ignore[index,attr-defined]
    for size in (64, 101, 1000):
        monkeypatch.setattr(watched_file, "BLOCK", size)
        assert outcome(read(path, slow=False)) == whole


def test_a_lone_quotation_mark_does_not_swallow_the_file(tmp_path: Path) -> None:
    lines = [f'E1,2026-03-28T01:00:{i:02d}Z,note,tube 7" {i},,AB,,' for i in range(3)]
    path = tmp_path / "log.csv"
    path.write_text("\n".join([HEADER, *lines, "E1,2026-03-28T01:00:00Z,rr,20,,AB,,"]))
    intake = read_log_csv(path, now=NOW)
    assert [d.entry.words for d in intake.entries] == ['tube 7" 0', 'tube 7" 1', 'tube 7" 2', None]


def test_a_line_of_any_length_is_refused_in_bounded_memory(tmp_path: Path) -> None:
    import tracemalloc

    path = tmp_path / "log.csv"
    with path.open("wb") as file:
        file.write(HEADER.encode() + b"\n")
        for _ in range(40):
            file.write(b"x" * 1_000_000)
    tracemalloc.start()
    intake = read_log_csv(path, now=NOW)
    _now, peak = tracemalloc.get_traced_memory()
    tracemalloc.stop()
    assert [(r.line, r.message.key) for r in intake.refusals] == [(2, "line.too_long")]
    assert peak < 20_000_000
