"""Flags in the ledger: raised once, seen and settled by a person, undone by a correction, taken back by undo."""

from collections.abc import Iterator
from pathlib import Path

import pytest

from app.operations import correction, entry, episode, figures, flag
from core.judgement.shapes import FlagFigure
from core.record.entries import Action
from core.record.instant import HOUR, MINUTE, parse
from core.record.message import RecordError
from storage.store import Store

NOW = parse("2026-03-28T02:30:00Z")


@pytest.fixture
def store(tmp_path: Path) -> Iterator[Store]:
    with Store.create(tmp_path / "ward.luffmark", now=NOW - 9 * HOUR) as made:
        episode.begin(made, "AB", NOW - 8 * HOUR, episode.BeginRequest("A"))
        line = entry.LineRequest("A", "02:00 site arterial ph 7.21 paco2 80", "UTC", confirmed=True)
        entry.log_line(made, "AB", NOW, line)
        yield made


def flags(store: Store, now: int = NOW) -> tuple[FlagFigure, ...]:
    return figures.of_episode(store, "AB", now, figures.EpisodeRequest("A", now)).value.figures.flags


def acidosis(store: Store, now: int = NOW) -> FlagFigure:
    return next(f for f in flags(store, now) if f.marker == "ph_below_severe")


def test_a_flag_is_raised_in_the_ledger_once(store: Store) -> None:
    first = flag.keep_transitions(store, "AB", NOW, ["A"]).value
    assert first == len([f for f in flags(store) if f.state == "raised"]) > 0
    assert flag.keep_transitions(store, "AB", NOW + MINUTE, ["A"]).value == 0


def test_seen_and_settled_carry_who_and_why_and_keep_the_evidence(store: Store) -> None:
    before = acidosis(store)
    flag.see(store, "CD", NOW, flag.FlagRequest("A", before.flag_id))
    seen = acidosis(store)
    assert (seen.state, seen.seen_by, seen.seen_at) == ("seen", "CD", NOW)
    flag.settle(store, "EF", NOW + MINUTE, flag.FlagRequest("A", before.flag_id, "registrar came"))
    settled = acidosis(store, NOW + MINUTE)
    assert (settled.state, settled.settled_by, settled.settled_why) == ("settled", "EF", "registrar came")
    assert settled.evidence == before.evidence


def test_settling_needs_a_reason_and_an_open_flag(store: Store) -> None:
    name = acidosis(store).flag_id
    for request, key in (
        (flag.FlagRequest("A", name), "flag.no_reason"),
        (flag.FlagRequest("A", "gone@1", "x"), "flag.unknown"),
        (flag.FlagRequest("Z", name, "x"), "episode.unknown"),
    ):
        with pytest.raises(RecordError) as refused:
            flag.settle(store, "EF", NOW, request)
        assert refused.value.message.key == key
    flag.settle(store, "EF", NOW, flag.FlagRequest("A", name, "done"))
    with pytest.raises(RecordError) as refused:
        flag.settle(store, "EF", NOW, flag.FlagRequest("A", name, "again"))
    assert refused.value.message.key == "flag.not_open"


def test_a_correction_undoes_the_flag_and_it_stays_visible(store: Store) -> None:
    flag.keep_transitions(store, "AB", NOW, ["A"])
    gas = next(s.entry for s in store.episode("A").standing if s.entry.channel == "ph")
    correction.correct(store, "AB", NOW, correction.CorrectionRequest("A", gas.id, "misread", "7.41"))
    flag.keep_transitions(store, "AB", NOW + MINUTE, ["A"])
    gone = acidosis(store, NOW + MINUTE)
    assert gone.undone_by_correction
    assert gone.state == "no longer met"


def test_a_word_on_a_flag_is_taken_back_by_undo(store: Store) -> None:
    before = acidosis(store)
    seen = flag.see(store, "CD", NOW, flag.FlagRequest("A", before.flag_id)).value
    settled = flag.settle(store, "CD", NOW, flag.FlagRequest("A", before.flag_id, "misread")).value
    assert acidosis(store).state == "settled"
    correction.undo(store, "CD", NOW + MINUTE, correction.UndoRequest("A", settled.ids))
    assert acidosis(store, NOW + MINUTE).state == "seen"
    correction.undo(store, "CD", NOW + MINUTE, correction.UndoRequest("A", seen.ids))
    assert acidosis(store, NOW + MINUTE).state == "raised"
    words = [e.words for e in store.entries("A") if e.action is Action.FLAG and e.channel == "ph_below_severe"]
    assert words == ["raised", "seen", "settled", "reopened", "not seen"]
    assert store.verify() == ()
