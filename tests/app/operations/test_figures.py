"""Figures by episode and ward, as of and as known at, from a shelf that is never stale."""

from collections.abc import Iterator
from pathlib import Path

import pytest

from app.operations import correction, entry, episode, figures
from app.operations.episode_shelf import shelf_of
from core.record.entries import NewEntry
from core.record.instant import HOUR, MINUTE, parse
from core.record.message import RecordError
from storage.store import Store

NOW = parse("2026-03-28T02:30:00Z")


@pytest.fixture
def store(tmp_path: Path) -> Iterator[Store]:
    with Store.create(tmp_path / "ward.luffmark", now=NOW - 9 * HOUR) as made:
        for key in ("A", "B"):
            episode.begin(made, "AB", NOW - 8 * HOUR, episode.BeginRequest(key))
        yield made


def log(store: Store, key: str, text: str, now: int = NOW) -> entry.Recorded:
    return entry.log_line(store, "AB", now, entry.LineRequest(key, text, "UTC", confirmed=True)).value


def ask(store: Store, key: str = "A", as_of: int = NOW, known: int | None = None) -> figures.EpisodeAnswer:
    return figures.of_episode(store, "AB", NOW, figures.EpisodeRequest(key, as_of, known)).value


def test_a_new_entry_is_in_the_next_figures(store: Store) -> None:
    log(store, "A", "02:00 16/6 35")
    assert ask(store).figures.support.pressure_support_cmH2O == 10
    log(store, "A", "02:10 20/6 35")
    assert ask(store).figures.support.pressure_support_cmH2O == 14


def test_an_entry_of_another_process_is_in_the_next_figures(store: Store) -> None:
    log(store, "A", "02:00 16/6 35")
    ask(store)
    with Store.open(store.path) as other:
        log(other, "A", "02:10 20/6 35")
    assert ask(store).figures.support.pressure_support_cmH2O == 14


def test_an_unchanged_episode_is_not_built_again(store: Store) -> None:
    log(store, "A", "02:00 16/6 35")
    first = shelf_of(store).get(store, "A")
    log(store, "B", "02:00 18/6 35")
    assert shelf_of(store).get(store, "A") is first
    log(store, "A", "02:05 rr 20")
    assert shelf_of(store).get(store, "A") is not first


def test_an_entry_moved_away_leaves_both_episodes_right(store: Store) -> None:
    made = log(store, "A", "02:00 rr 30")
    ask(store, "A")
    ask(store, "B")
    correction.move(store, "AB", NOW, correction.MoveRequest("A", made.ids[0], "B", "wrong bed"))
    assert ask(store, "A").record.latest("rr") is None
    assert ask(store, "B").record.latest("rr") == 30


def test_as_known_at_a_moment_a_late_entry_is_not_known(store: Store) -> None:
    log(store, "A", "01:00 ph 7.22 paco2 80")
    assert ask(store, as_of=NOW - HOUR).figures.gases
    assert not ask(store, as_of=NOW - HOUR, known=NOW - MINUTE).figures.gases


def test_an_unknown_episode_is_refused_with_those_that_are_near(store: Store) -> None:
    with pytest.raises(RecordError) as refused:
        ask(store, "a")
    assert refused.value.message.key == "episode.unknown"
    assert "A" in str(refused.value.message.values["accepted"])


def test_the_ward_holds_who_is_there_at_the_moment(store: Store) -> None:
    log(store, "A", "01:00 16/6 35")
    log(store, "B", "02:00 16/6 35")
    log(store, "B", "ended_at 2026-03-28T02:20:00+00:00")

    def keys(as_of: int, **more: bool) -> set[str]:
        found = figures.of_ward(store, "AB", NOW, figures.WardRequest(as_of, **more)).value
        return {f.episode for f in found.figures}

    assert keys(NOW - HOUR) == {"A"}
    assert keys(NOW) == {"A", "B"}
    assert keys(NOW + 25 * HOUR) == {"A"}
    assert keys(NOW + 25 * HOUR, everything=True) == {"A", "B"}


def test_the_ward_of_a_store_in_its_second_year_reads_only_who_is_on_it(
    store: Store, monkeypatch: pytest.MonkeyPatch
) -> None:
    for key in ("A", "B"):
        log(store, key, "02:00 16/6 35")
    ended = NewEntry("B", "ended_at", NOW, float(NOW))
    store.append([ended], by="AB", operation="log", now=NOW)
    later = NOW + 400 * 24 * HOUR
    read: list[str] = []
    shelf = shelf_of(store)
    get = shelf.get
    monkeypatch.setattr(shelf, "get", lambda s, key: read.append(key) or get(s, key))
    ward = figures.of_ward(store, "AB", later, figures.WardRequest(later)).value
    assert [e.figures.episode for e in ward.episodes] == ["A"]
    assert read == ["A"]
    figures.of_ward(store, "AB", later, figures.WardRequest(later, everything=True))
    assert sorted(read) == ["A", "A", "B"]
