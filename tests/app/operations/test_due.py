"""A person's word on a due item: an entry, with the reason where it is not needed, and taken back by undo."""

from collections.abc import Iterator
from pathlib import Path

import pytest

from app.operations import correction, due, entry, episode, figures
from core.judgement.shapes import DueFigure
from core.record.instant import HOUR, MINUTE, parse
from core.record.message import RecordError
from storage.store import Store

NOW = parse("2026-03-28T06:30:00Z")


@pytest.fixture
def store(tmp_path: Path) -> Iterator[Store]:
    with Store.create(tmp_path / "ward.luffmark", now=NOW - 9 * HOUR) as made:
        episode.begin(made, "AB", NOW - 5 * HOUR, episode.BeginRequest("A", {"indication": "copd"}))
        for line in ("01:30 ph 7.28 paco2 70 pao2 60", "02:00 bpap-st 20/5 30"):
            entry.log_line(made, "AB", NOW, entry.LineRequest("A", line, "UTC", confirmed=True))
        yield made


def items(store: Store, now: int = NOW) -> dict[str, DueFigure]:
    found = figures.of_episode(store, "AB", now, figures.EpisodeRequest("A", now)).value.figures.due
    return {d.what: d for d in found}


def test_done_by_a_persons_word(store: Store) -> None:
    assert items(store)["skin_check"].state == "overdue"
    due.close(store, "CD", NOW, due.DueRequest("A", "skin_check"))
    closed = items(store)["skin_check"]
    assert (closed.state, closed.done_by, closed.done_at) == ("done", "CD", NOW)
    assert store.verify() == ()


def test_not_needed_wants_its_reason(store: Store) -> None:
    for reason in ("", "  "):
        with pytest.raises(RecordError) as refused:
            due.close(store, "CD", NOW, due.DueRequest("A", "gas", due.NOT_NEEDED, reason))
        assert refused.value.message.key == "due_word.no_reason"
    due.close(store, "CD", NOW, due.DueRequest("A", "gas", due.NOT_NEEDED, "agreed with the registrar"))
    assert items(store)["gas"].state == "done"
    (said,) = [e for e in store.entries("A") if e.action.value == "due"]
    assert (said.words, said.reason, said.by) == ("not needed", "agreed with the registrar", "CD")


def test_what_is_not_due_is_refused(store: Store) -> None:
    for what in ("complete_score", "tea"):
        with pytest.raises(RecordError) as refused:
            due.close(store, "CD", NOW, due.DueRequest("A", what))
        assert refused.value.message.key == "due_word.not_due"
    due.close(store, "CD", NOW, due.DueRequest("A", "ceiling"))
    with pytest.raises(RecordError):
        due.close(store, "CD", NOW + MINUTE, due.DueRequest("A", "ceiling"))


@pytest.mark.parametrize(("what", "next_after"), [("skin_check", 4 * HOUR), ("reassessment", 4 * HOUR)])
@pytest.mark.parametrize("words", [due.DONE, due.NOT_NEEDED])
def test_closing_what_comes_again_asks_for_the_next(store: Store, what: str, next_after: int, words: str) -> None:
    due.close(store, "CD", NOW, due.DueRequest("A", what, words, "asleep"))
    found = figures.of_episode(store, "AB", NOW + HOUR, figures.EpisodeRequest("A", NOW + HOUR)).value.figures.due
    (open_one,) = [d for d in found if d.what == what and d.state != "done"]
    assert (open_one.state, open_one.due_until) == ("open", NOW + next_after)
    later = NOW + next_after + MINUTE
    late = figures.of_episode(store, "AB", later, figures.EpisodeRequest("A", later)).value.figures.due
    assert [d.state for d in late if d.what == what and d.state != "done"] == ["overdue"]


def test_the_word_can_be_taken_back(store: Store) -> None:
    made = due.close(store, "CD", NOW, due.DueRequest("A", "skin_check")).value
    correction.undo(store, "CD", NOW + MINUTE, correction.UndoRequest("A", made.ids))
    assert items(store, NOW + MINUTE)["skin_check"].state == "overdue"
