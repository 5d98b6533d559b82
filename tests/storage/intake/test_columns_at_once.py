"""Columns read at once give just what reading one by one gives; cutting, grouping and putting aside lose nothing."""

from __future__ import annotations

import csv
from math import isnan, nan

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from core.record.channels import channel
from core.record.instant import HOUR, MINUTE
from storage.chunks import decode
from storage.intake import sample_spool, sealed_file
from storage.intake.byte_fields import cut_fields, fields_of
from storage.intake.distinct import groups, kinds
from storage.intake.fresh_chunks import FreshChunks
from storage.intake.number_columns import NumberColumn, plain_digits
from storage.intake.sample_spool import SampleSpool
from storage.intake.sealed_file import SealedFile
from storage.intake.table_cells import device_cell

NUMBERS = st.from_regex(r"-?[0-9]{0,9}([.,][0-9]{0,7})?", fullmatch=True)
CELLS = st.one_of(NUMBERS, st.text("0123456789.,-+ex n/a\u00e9", max_size=20))


@given(st.lists(st.lists(st.text(st.characters(exclude_characters='";', exclude_categories=["Cs", "Z", "Cc"])),
                         min_size=3, max_size=3), min_size=1, max_size=8))  # fmt: skip
def test_fields_are_those_of_the_csv_module(rows: list[list[str]]) -> None:
    text = "".join(";".join(row) + "\n" for row in rows)
    fields = cut_fields(text.encode(), ";", 3, len(rows))
    assert fields is not None
    expected = list(csv.reader(text.splitlines(), delimiter=";"))
    assert [list(r) for r in zip(*(fields.texts(c) for c in range(3)), strict=True)] == expected
    again = fields_of(rows)
    assert [again.text(r, c) for r in range(len(rows)) for c in range(3)] == [c for row in rows for c in row]


def test_spaces_around_fields_are_left_out_and_other_shapes_left_alone() -> None:
    fields = cut_fields(b" a , 1 ,\n b,2 , x\n", ",", 3, 2)
    assert fields is not None
    assert (fields.texts(0), fields.texts(1), fields.texts(2)) == (["a", "b"], ["1", "2"], ["", "x"])
    for text in (b'a,"b"\n', b"a,b\r\n", b"a,b\nc\n", b"a,b,c\nd\n", b""):
        assert cut_fields(text, ",", 2, text.count(b"\n")) is None


@given(st.lists(CELLS, min_size=1, max_size=40), st.sampled_from(".,"), st.sampled_from(["leak", "vte", "temp"]),
       st.integers(1, 30))  # fmt: skip
@example(["12.50"] * 3, ".", "leak", 200)
def test_numbers_at_once_are_numbers_one_by_one(cells: list[str], mark: str, key: str, times: int) -> None:
    known = channel(key)

    def one(text: str) -> tuple[float, int] | None:
        return device_cell(known, text, known.unit, mark)

    column = NumberColumn(known, known.unit, one, mark)
    fields = fields_of([[c] for c in cells * times])
    for _ in range(2):  # the second time from what is at hand
        found = column.read(fields, 0)
        for text, value, decimals in zip(cells, found.values.tolist(), found.decimals.tolist(), strict=False):
            expected = one(text)
            assert decimals == (-1 if expected is None else expected[1])
            assert isnan(value) if expected is None or isnan(expected[0]) else value == expected[0]


def test_a_block_of_ever_new_numbers_is_read_by_its_digits() -> None:
    texts = [f"{n / 1000:.3f}" for n in range(20_000)] + ["12345.678901234", "999", "1e1", "-", "", "x"]
    read: list[str] = []

    def one(text: str) -> tuple[float, int] | None:
        read.append(text)
        return device_cell(channel("leak"), text, "L/min", ".")

    found = NumberColumn(channel("leak"), "L/min", one).read(fields_of([[x] for x in texts]), 0)
    assert found.values[:20_000].tolist() == [float(x) for x in texts[:20_000]]
    assert found.decimals[20_000:].tolist() == [-1, -1, -1, 0, 0, -1]
    assert len(read) < 10, "only what is no plain number within the limits is read one by one"


def test_digits_of_two_words() -> None:
    texts = ["123456789.012345", "12345678901234567", "1.", ".5", "1.2.3", "00012345678"]
    fields = fields_of([[x] for x in texts])
    total, behind = plain_digits(fields.table(0, 2), fields.length[0], ord("."))
    assert behind.tolist() == [6, -1, -1, -1, -1, 0]
    assert (total[0], total[5]) == (123456789012345, 12345678)


@given(st.lists(st.integers(0, 5), min_size=1, max_size=50), st.integers(1, 100))
def test_kinds_and_groups_hold_every_row_once(numbers: list[int], times: int) -> None:
    words = np.array(numbers * times, np.uint64)
    first, which = kinds(words)
    assert (words[first][which] == words).all()
    assert first.size == len(set(numbers))
    fields = fields_of([[str(n), "x" * n] for n in numbers])
    rows = np.arange(len(numbers))
    found = groups(fields, (0, 1), rows)
    assert sorted(int(p) for places in found for p in places) == rows.tolist()
    assert all(len({numbers[p] for p in places.tolist()}) == 1 for places in found)


def test_kinds_that_share_a_slot_are_told_apart() -> None:
    words = np.arange(100_000, dtype=np.uint64)  # six to a slot
    first, which = kinds(words)
    assert (words[first][which] == words).all()
    assert first.size == words.size


# putting aside


def test_what_is_put_aside_comes_back_and_lies_on_the_disk_unreadable(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sealed_file, "_IN_MEMORY", sealed_file._SEGMENT)
    sealed = SealedFile()
    parts = [bytes([n % 251]) * (n % 700 + 1) for n in range(4_000)]
    places = [sealed.put(part) for part in parts]
    assert all(sealed.get(place) == part for place, part in zip(places, parts, strict=True))
    assert [sealed.get(places[n]) == parts[n] for n in (3999, 0, 2000, 1)] == [True] * 4
    file = sealed._file
    assert file is not None
    file.seek(0)
    assert bytes([7]) * 300 not in file.read()
    del sealed
    assert file.closed


def test_hours_in_pieces_are_put_together_in_bounded_memory(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sample_spool, "_PENDING", 100)
    spool, leak = SampleSpool(), channel("leak")
    t = np.arange(600, dtype=np.int64) * MINUTE
    for start in (3, 0, 1, 2):  # every fourth minute, one pass after the other
        some = t[start::4]
        lines = np.arange(some.size, dtype=np.int32) + 1000 * start
        spool.add("E1", leak, "L/min", "", some, (some // MINUTE % 97).astype(float), lines, 0)
    packed_hours = max(len(series.packed) for series in spool._series.values()) // 2
    assert packed_hours > 20
    found = list(spool.blocks(("E1", "leak")))
    assert [(b.t0, b.t1, b.n) for b in found] == [(0, 599 * MINUTE, 600)]
    read = [decode(b.blob, b.t0) for b in found]
    assert np.array_equal(np.concatenate([r[0] for r in read]), t)
    assert np.array_equal(np.concatenate([r[1] for r in read]), t // MINUTE % 97)
    assert not spool.repeated


def test_repeats_are_told_by_line_and_counted_beyond_the_list(monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(sample_spool, "_PENDING", 50)
    monkeypatch.setattr(sample_spool, "MAX_LISTED", 5)
    spool, leak = SampleSpool(), channel("leak")
    t = np.arange(60, dtype=np.int64) * MINUTE
    for first_line in (2, 200):
        lines = np.arange(60, dtype=np.int32) * 3 + first_line
        spool.add("E1", leak, "L/min", "", t, np.full(60, nan), lines, 0)
    assert sum(b.n for b in spool.blocks(("E1", "leak"))) == 60
    assert spool.repeated_count == 60
    assert [(r.line, r.first_line) for r in spool.repeated][:2] == [(200, 2), (203, 5)]
    assert len(spool.repeated) == 5


def test_fresh_chunks_are_a_sequence_and_know_their_spans() -> None:
    spool, chunks = SampleSpool(), FreshChunks("source")
    t = np.arange(180, dtype=np.int64) * MINUTE
    t += t // HOUR * 2 * HOUR
    for key in ("leak", "vte"):
        spool.add("E1", channel(key), "", "", t, t / MINUTE, np.arange(180, dtype=np.int32), 0)
        for block in spool.blocks(("E1", key)):
            chunks.add(("E1", key), block)
    assert len(chunks) == 6
    assert [c.channel for c in chunks] == ["leak"] * 3 + ["vte"] * 3
    assert chunks[-1] == list(chunks)[-1]
    assert chunks[1:3] == tuple(chunks)[1:3]
    assert {k: (s.first, s.last, s.count) for k, s in chunks.spans.items()} == {
        ("E1", "leak"): (0, 419 * MINUTE, 180), ("E1", "vte"): (0, 419 * MINUTE, 180)}  # fmt: skip
    with pytest.raises(IndexError):
        chunks[6]
