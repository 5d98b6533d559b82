"""Closed flags beside the panels: each stays to be read, with who saw it, who settled it and why it ended."""

from pathlib import Path

import pytest
from pytestqt.qtbot import QtBot

from app.episode.flag_history import closed_flags, history_fact, line_of, word_lines
from app.look.theme import THEMES
from app.operations import correction, entry, figures, flag
from app.words import Reader
from core.judgement.shapes import EpisodeFigures, FlagFigure
from core.record.instant import HOUR, MINUTE
from storage.store import Store
from tests.support.open_window import NOW, make_store, open_window, settled, until

READER = Reader("UTC")


@pytest.fixture
def path(tmp_path: Path) -> Path:
    return make_store(tmp_path / "ward.luffmark")


def of(store: Store, now: int = NOW) -> EpisodeFigures:
    return figures.of_episode(store, "AB", now, figures.EpisodeRequest("bed-7", now)).value.figures


def the(store: Store, marker: str, now: int = NOW) -> FlagFigure:
    return next(f for f in of(store, now).flags if f.marker == marker)


def test_seen_settled_ended_and_taken_back_are_told_with_who_and_when(path: Path) -> None:
    with Store.open(path) as store:
        flag.keep_transitions(store, "AB", NOW, ["bed-7"])
        raised = the(store, "ph_below_severe")
        flag.see(store, "CD", NOW, flag.FlagRequest("bed-7", raised.flag_id))
        assert word_lines(the(store, "ph_below_severe"), READER) == ["Seen by CD 28-Mar-2026 05:30."]
        flag.settle(store, "EF", NOW + MINUTE, flag.FlagRequest("bed-7", raised.flag_id, "registrar came."))
        still = the(store, "ph_below_severe", NOW + MINUTE)
        assert line_of(still, READER) == (
            "pH below 7.25 (concern), from 28-Mar-2026 03:05. Seen by CD 28-Mar-2026 05:30. "
            "Settled by EF 28-Mar-2026 05:31: registrar came. Still met."
        )
        better = entry.LineRequest("bed-7", "05:35 site arterial ph 7.36 paco2 52", "UTC", confirmed=True)
        entry.log_line(store, "AB", NOW + 6 * MINUTE, better)
        ended = the(store, "ph_below_severe", NOW + 7 * MINUTE)
        assert line_of(ended, READER).endswith("registrar came. No longer met 28-Mar-2026 05:35.")


def test_a_flag_taken_back_by_a_correction_says_so(path: Path) -> None:
    with Store.open(path) as store:
        flag.keep_transitions(store, "AB", NOW, ["bed-7"])
        wrong = next(e for e in store.entries("bed-7") if e.channel == "ph" and e.number == 7.24)
        right = correction.CorrectionRequest("bed-7", wrong.id, "typed wrong", "7.34")
        correction.correct(store, "AB", NOW + MINUTE, right)
        flag.keep_transitions(store, "AB", NOW + MINUTE, ["bed-7"])
        undone = the(store, "ph_below_severe", NOW + HOUR)
        assert undone.undone_by_correction
        taken = "Taken back 28-Mar-2026 05:31: what was logged later or corrected no longer bears it out."
        assert taken in line_of(undone, READER)
        assert undone in closed_flags(of(store, NOW + HOUR))


def test_no_closed_flag_no_line(qtbot: QtBot, path: Path) -> None:
    with Store.open(path) as store:
        told = figures.of_episode(store, "AB", NOW, figures.EpisodeRequest("bed-7", NOW - 6 * HOUR)).value.figures
    assert not closed_flags(told)
    assert history_fact(THEMES["light"], told, READER) is None


def test_the_window_keeps_a_settled_flag_to_be_unfolded(qtbot: QtBot, path: Path) -> None:
    with open_window(qtbot, path) as window:
        window.open_episode("bed-7")
        settled(qtbot, window)
        side = window.pages.episode.side
        before = [f for f in side.facts() if isinstance(f.payload, FlagFigure)]
        first = before[0].payload
        window.model.ask(flag.settle, flag.FlagRequest("bed-7", first.flag_id, "chest drain placed"))
        until(qtbot, lambda: first.flag_id not in [
            f.payload.flag_id for f in side.facts() if isinstance(f.payload, FlagFigure)])  # fmt: skip
        (history,) = [f for f in side.facts() if "earlier flag" in f.accessibleName()]
        assert not history.is_unfolded
        history.unfold()
        assert history.is_unfolded
        assert history.explanation is not None
        assert any("Settled by AB" in r and "05:30: chest drain placed." in r for r in history.explanation.rules)
