"""Rotating backups: what is kept of weeks of them, and that nothing else in the folder is touched."""

from __future__ import annotations

from collections.abc import Callable
from itertools import pairwise
from pathlib import Path

from hypothesis import given
from hypothesis import strategies as st

from core.record.instant import DAY, HOUR, parse
from storage.backup_rotation import backups_in, is_due, kept, rotate
from storage.keys import envelope_path
from storage.store import Store
from tests.storage.conftest import NOW, PASSPHRASE

NOON = parse("2026-03-28T12:00:00Z")


def test_hourly_for_a_shift_daily_for_two_weeks_monthly_for_a_year() -> None:
    present: set[int] = set()
    start = NOON - 400 * DAY
    for hour in range(400 * 24 + 1):
        now = start + hour * HOUR
        present = kept({*present, now}, now)
    ages = sorted((NOON - at) // HOUR for at in present)
    assert ages[:13] == list(range(13))
    days = [a for a in ages if 12 < a <= 14 * 24]
    assert len(days) == 14
    assert all(b - a == 24 for a, b in pairwise(days[1:]))
    months = [a for a in ages if a > 14 * 24]
    assert 11 <= len(months) <= 13
    assert len(present) < 45


@given(st.lists(st.integers(-2 * DAY, 500 * DAY).map(lambda age: NOON - age), max_size=60))
def test_the_newest_is_always_kept_and_nothing_is_made_up(taken: list[int]) -> None:
    left = kept(taken, NOON)
    assert left <= set(taken)
    if taken:
        assert max(taken) in left
    assert kept(left, NOON) == left
    assert all(at in left for at in taken if at > NOON)


def test_a_new_backup_comes_before_an_old_one_goes(make_store: Callable[..., Store], tmp_path: Path) -> None:
    store = make_store(encrypted=True)
    folder = tmp_path / "backups"
    folder.mkdir()
    (folder / "ward.notes.luff").write_text("mine")
    (folder / "other.20240101T000000Z.luff").write_text("of another store")
    assert is_due(folder, store.path, NOW)
    old = rotate(store, folder, NOW - 400 * DAY)
    new = rotate(store, folder, NOW)
    assert not old.exists()
    assert not envelope_path(old).exists()
    assert list(backups_in(folder, store.path)) == [NOW]
    assert {p.name for p in folder.iterdir()} == {
        "ward.notes.luff", "other.20240101T000000Z.luff", new.name, envelope_path(new).name,
    }  # fmt: skip
    assert not is_due(folder, store.path, NOW + HOUR - 1)
    assert is_due(folder, store.path, NOW + HOUR)
    assert is_due(folder, store.path, NOW - 1)
    with Store.open(new, passphrase=PASSPHRASE) as copy:
        assert copy.verify() == ()
