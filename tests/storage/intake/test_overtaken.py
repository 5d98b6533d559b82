"""Between reading and taking in: what others record of the same episodes is looked at inside the write lock."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

from app.operations import intake as operations
from app.operations.intake import ReadRequest, TakeRequest
from app.operations.outcome import CancelledError, watched
from core.record.entries import NewEntry
from core.record.message import RecordError
from storage.intake import batch
from storage.store import Store
from tests.storage.conftest import NOW
from tests.support.hl7_messages import gas, message

LOG = "episode,at,channel,value,unit,by,note\nE1,2026-03-28T01:00:00+00:00,rr,20,/min,AB,\n"


@pytest.fixture
def path(tmp_path: Path) -> Path:
    made = tmp_path / "a.csv"
    made.write_text(LOG)
    return made


def log(store: Store, episode: str, channel: str = "hr", **value: object) -> None:
    entry = NewEntry(episode, channel, NOW, **(value or {"number": 80.0}))  # type: ignore[arg-type]
    store.append([entry], by="CD", operation="log", now=NOW)


def test_the_same_file_taken_by_two_windows_is_taken_once(path: Path, store: Store) -> None:
    first, second = (operations.read(store, "AB", NOW, ReadRequest(path)).value for _ in range(2))
    operations.take(store, "AB", NOW, TakeRequest(first))
    with pytest.raises(RecordError) as refused:
        operations.take(store, "CD", NOW, TakeRequest(second))
    assert refused.value.message.key == "intake.overtaken"
    again = operations.read(store, "CD", NOW, ReadRequest(path)).value
    assert (again.repeated_in_store, again.entries) == (1, ())


def test_what_is_recorded_of_other_episodes_is_no_matter(path: Path, store: Store) -> None:
    intake = operations.read(store, "AB", NOW, ReadRequest(path)).value
    log(store, "E2")
    assert operations.take(store, "AB", NOW, TakeRequest(intake)).value.entries == 1


def test_an_identifier_that_is_confirmed_meanwhile_is_looked_at(tmp_path: Path, store: Store) -> None:
    path = tmp_path / "a.hl7"
    path.write_text(message(gas()))
    intake = operations.read(store, "AB", NOW, ReadRequest(path, episode="E1")).value
    log(store, "E2", "identifier", words="WARD-7|0042", raw="WARD-7|0042")
    with pytest.raises(RecordError) as refused:
        operations.take(store, "AB", NOW, TakeRequest(intake))
    assert refused.value.message.key == "intake.overtaken"


def test_an_intake_that_does_not_say_when_it_was_read_is_taken(path: Path, store: Store) -> None:
    intake = replace(operations.read(store, "AB", NOW, ReadRequest(path)).value, head=None)
    log(store, "E1")
    assert operations.take(store, "AB", NOW, TakeRequest(intake)).value.entries == 1


def test_stopped_between_two_parts_of_the_samples_nothing_stays(
    tmp_path: Path, store: Store, monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.setattr(batch, "_CHUNKS_AT_ONCE", 2)
    days = range(16, 28)
    rows = [f"E1,2026-03-{d:02d}T09:{m:02d}:00+00:00,leak,{m},L/min,device,\n" for d in days for m in range(60)]
    path = tmp_path / "a.csv"
    path.write_text(LOG + "".join(rows))
    intake = operations.read(store, "AB", NOW, ReadRequest(path)).value
    seen: list[tuple[int, int]] = []

    def stop(done: int, total: int) -> None:
        seen.append((done, total))
        if done >= 6:
            raise CancelledError

    with watched(stop), pytest.raises(CancelledError):
        operations.take(store, "AB", NOW, TakeRequest(intake))
    assert seen[1:] == [(0, 12), (2, 12), (4, 12), (6, 12)]
    assert (store.head(), store.episode_keys()) == (0, ())
    operations.take(store, "AB", NOW, TakeRequest(intake))
    assert store.samples("E1", channel="leak")[0].t.size == 720
