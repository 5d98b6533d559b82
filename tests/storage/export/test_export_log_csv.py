"""Export and intake of it give the same current values; formulas stay text."""

from __future__ import annotations

import csv
import tempfile
from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.record.channels import CHANNELS, Kind
from core.record.entries import Action, NewEntry, from_reading
from core.record.instant import DAY, MINUTE, iso
from core.record.knowledge import standing
from core.record.reading import read_value
from core.record.samples import DeviceSamples
from storage.apostrophe import guarded, unguarded
from storage.export.log_csv import write_log_csv
from storage.intake.batch import take_in
from storage.intake.log_csv import read_log_csv
from storage.rules import is_device_channel
from storage.store import Store, StoreError
from tests.storage.conftest import NOW
from tests.support.ledger_histories import fill, histories, new_store
from tests.support.ledger_model import LedgerModel

TEXT = st.text(st.characters(codec="utf-8", exclude_characters="\x00"), min_size=1, max_size=12)
EVIL = st.sampled_from(["=1+1", "'=x", "''", "-5", "@SUM(A1)", '"', '",', "a\nb", "a\r\nb", "a\rb", "+49", "é\u2028"])
DEVICE = [k for k in CHANNELS if is_device_channel(k)]


def current(store: Store) -> dict[str, list[tuple[object, ...]]]:
    """Every current value of a store, by episode."""
    found: dict[str, list[tuple[object, ...]]] = {}
    for key in store.episode_keys():
        rows = [s.entry for s in standing(store.entries(key)) if s.entry.episode == key]
        values = [
            (e.at, e.channel, e.number, e.words, e.by, e.note, e.zone)
            for e in rows
            if e.action in (Action.ASSERT, Action.CORRECT, Action.MOVE)
        ]
        samples = [(b.channel, int(t), str(v)) for b in store.samples(key) for t, v in zip(b.t, b.v, strict=True)]
        if values or samples:
            found[key] = [*values, *sorted(samples)]
    return found


def round_trip(store: Store, place: Path) -> Store:
    path = place / "out.csv"
    write_log_csv(store, path)
    intake = read_log_csv(path, now=NOW + DAY)
    assert intake.refusals == ()
    again = Store.create(place / "again.luff", now=NOW)
    take_in(again, intake, by="AB", now=NOW)
    return again


@settings(max_examples=40, deadline=None)
@given(histories())
def test_any_history_round_trips(model: LedgerModel) -> None:
    with tempfile.TemporaryDirectory(ignore_cleanup_errors=True) as place, new_store(place, "a") as store:
        fill(store, model.batches)
        with round_trip(store, Path(place)) as again:
            assert current(again) == current(store)


@st.composite
def values(draw: st.DrawFn) -> NewEntry:
    """A value of any channel, with any text beside it."""
    channel = CHANNELS[draw(st.sampled_from(sorted(CHANNELS)))]
    text: st.SearchStrategy[str] = st.one_of(TEXT, EVIL).map(str.strip)
    if channel.kind is Kind.NUMBER:
        low, high = channel.hard or (0, 100)
        number = draw(st.floats(low, high).map(lambda x: round(x, draw(st.integers(0, 6))))) + 0.0
        new = NewEntry("E", channel.key, NOW, min(max(number, low), high))
        if draw(st.booleans()):
            new = from_reading("E", NOW, read_value(channel, f"{new.number:.3f}", channel.unit), confirmed=True)
    elif channel.kind is Kind.INSTANT:
        new = NewEntry("E", channel.key, NOW, float(NOW + draw(st.integers(0, 10**7))))
    elif channel.kind is Kind.CHOICE:
        new = NewEntry("E", channel.key, NOW, words=draw(st.sampled_from(channel.choices)))
    else:
        words = draw(text.filter(lambda x: bool(x) or channel.kind is Kind.MARK))
        new = NewEntry("E", channel.key, NOW, words=words or None)
    by = draw(text.filter(lambda x: x != "device"))
    return replace(new, episode=draw(text.filter(bool)), at=NOW - draw(st.integers(0, 10**9)), by=by, note=draw(text))


@settings(max_examples=60, deadline=None)
@given(st.lists(values(), min_size=1, max_size=6))
def test_any_value_and_text_round_trips(entries: list[NewEntry]) -> None:
    entries = [e for e in entries if e.channel not in ("ipap", "epap")]  # pressures are judged together
    if not entries:
        return
    with tempfile.TemporaryDirectory(ignore_cleanup_errors=True) as place, new_store(place, "a") as store:
        store.append(entries, by="AB", operation="log", now=NOW)
        with round_trip(store, Path(place)) as again:
            assert current(again) == current(store)


@settings(max_examples=30, deadline=None)
@given(st.sampled_from(DEVICE), st.lists(st.floats(0, 1), min_size=1, max_size=90), st.integers(0, 5))
def test_device_samples_round_trip(channel: str, fractions: list[float], decimals: int) -> None:
    low, high = CHANNELS[channel].hard or (0, 100)
    v = np.clip(np.round(low + np.array(fractions) * (high - low), decimals), low, high)
    v[::7] = np.nan
    t = NOW - np.arange(v.size, 0, -1, dtype=np.int64) * MINUTE
    with tempfile.TemporaryDirectory(ignore_cleanup_errors=True) as place, new_store(place, "a") as store:
        store.append(
            [], by="AB", operation="log", now=NOW, samples=[DeviceSamples("E", channel, "d", t, v, decimals)]
        )
        with round_trip(store, Path(place)) as again:
            (mine,), (back,) = store.samples("E"), again.samples("E")
            assert np.array_equal(mine.t, back.t)
            assert np.array_equal(mine.v, back.v, equal_nan=True)


@given(st.one_of(TEXT, EVIL))
def test_the_apostrophe_comes_off_again(text: str) -> None:
    assert unguarded(guarded(text)) == text


def test_no_text_cell_begins_as_a_formula(make_store: Callable[..., Store], tmp_path: Path) -> None:
    store = make_store()
    evil = ["=cmd|' /C calc'!A0", "+1", "-2+3", "@SUM(1)", "\tx"]
    entries = [NewEntry(e.strip(), "label", NOW, words=e.strip(), by=e, note=e) for e in evil]
    store.append(
        [*entries, NewEntry("E", "be", NOW, -4.5, None, "-4.5", "mmol/L", 1)],
        by="AB",
        operation="log",
        now=NOW,
    )
    write_log_csv(store, tmp_path / "out.csv")
    with (tmp_path / "out.csv").open(newline="", encoding="utf-8") as file:
        cells = [cell for row in csv.reader(file) for cell in row]
    starts = [c for c in cells if c.startswith(("=", "+", "-", "@", "\t"))]
    assert starts == ["-4.5"]  # a number is a number


def test_a_file_taken_in_again_adds_nothing(store: Store, tmp_path: Path) -> None:
    store.append([NewEntry("E", "rr", NOW, 20.0, None, "20", "/min", 0)], by="AB", operation="log", now=NOW)
    write_log_csv(store, tmp_path / "out.csv")
    intake = read_log_csv(tmp_path / "out.csv", now=NOW, existing=store)
    assert (intake.entries, intake.repeated_in_store) == ((), 1)


def test_pressures_that_a_late_entry_contradicts_round_trip(store: Store, tmp_path: Path) -> None:
    for minute, channel, number in (
        (0, "ipap", 16.0),
        (0, "epap", 6.0),
        (50, "ipap", 10.0),
        (20, "epap", 12.0),
    ):
        new = NewEntry("E", channel, NOW - 3600 * 10**6 + minute * MINUTE, number, None, f"{number:g}", "cmH2O", 0)
        store.append([new], by="AB", operation="log", now=NOW + store.head())
    with round_trip(store, tmp_path) as again:
        assert current(again) == current(store)


def test_only_what_was_known_then_and_only_the_episodes_asked_for(store: Store, tmp_path: Path) -> None:
    for key in ("A", "B"):
        store.append([NewEntry(key, "rr", NOW, 20.0)], by="AB", operation="log", now=NOW)
    assert write_log_csv(store, tmp_path / "one.csv", head=1) == 1
    assert write_log_csv(store, tmp_path / "b.csv", episodes=["B"]) == 1
    assert iso(NOW) in (tmp_path / "b.csv").read_text()
    with pytest.raises(StoreError, match=r"store.exists"):
        write_log_csv(store, tmp_path / "b.csv")
