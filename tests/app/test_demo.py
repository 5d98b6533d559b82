"""The sample shift in a throw-away store: whole, sound, and nothing in it later than its pretended clock."""

from pathlib import Path

import pytest

import sample_data
from app import demo
from app.session.local_zone import is_zone
from core.record.instant import HOUR
from storage.errors import StoreError
from storage.store import Store


def test_the_sample_shift_is_taken_in_whole(tmp_path: Path) -> None:
    path = demo.make_demo_store(tmp_path)
    now = demo.demo_now()
    with Store.open(path) as store:
        assert store.verify() == ()
        keys = store.episode_keys()
        assert len(keys) >= 9
        for key in keys:
            record = store.episode(key)
            assert record.first_at is not None
            assert record.first_at < now
            assert max(int(s.t[-1]) for k, s in record.series.items() if len(s)) <= now
            assert record.label != key, "a bed label, not the key"
    assert is_zone(demo.ZONE)


def test_nothing_is_doubled_by_a_second_intake(tmp_path: Path) -> None:
    from storage.intake.log_csv import read_log_csv

    path = demo.make_demo_store(tmp_path)
    with Store.open(path) as store:
        for file in sample_data.files():
            again = read_log_csv(file, now=demo.demo_now(), existing=store)
            assert not again.refusals
            assert (len(again.entries), again.sample_count) == (0, 0)


def test_every_file_of_the_night_is_listed_once_with_what_it_brought(tmp_path: Path) -> None:
    from app.operations.intake import taken

    with Store.open(demo.make_demo_store(tmp_path)) as store:
        found = taken(store, "AB", demo.demo_now(), None).value
    assert sorted(s.name for s in found) == sorted(f.name for f in sample_data.files())
    assert all(s.entries + s.samples > 0 for s in found)
    assert sum(s.samples for s in found) > 20_000


def test_a_folder_that_is_not_there_is_refused(tmp_path: Path) -> None:
    with pytest.raises(StoreError) as refused:
        demo.make_demo_store(tmp_path / "gone")
    assert refused.value.message.key == "store.no_folder"


def test_the_pretended_clock_is_late_in_the_night() -> None:
    assert demo.demo_now() % (24 * HOUR) == 5.5 * HOUR
