"""Closing a due item in the window, and what is done folded under what is due."""

from pathlib import Path

import pytest
from pytestqt.qtbot import QtBot

from app.episode.due_done import line_of
from app.operations.due import NOT_NEEDED
from app.words import Reader
from core.record.entries import Action
from storage.store import Store
from tests.support.open_window import make_store, open_window, settled, until


@pytest.fixture
def path(tmp_path: Path) -> Path:
    return make_store(tmp_path / "ward.luffmark")


def test_an_item_is_closed_shown_as_done_and_opened_again(qtbot: QtBot, path: Path) -> None:
    with open_window(qtbot, path) as window:
        window.open_episode("bed-7")
        settled(qtbot, window)

        def state(what: str) -> str:
            return next(d.state for d in window.feed.answers["bed-7"].figures.due if d.what == what)

        first = next(d for d in window.feed.answers["bed-7"].figures.due if d.state != "done")
        window.actions_by_key["close_due"].trigger()
        asking = window.doers.due.asking
        assert asking is not None
        asking.word.button(NOT_NEEDED).click()
        asking.submit()
        assert "few words" in asking.wrong.text()
        asking.reason.setText("agreed with the registrar")
        asking.submit()
        until(qtbot, lambda: window.doers.due.asking is None)
        settled(qtbot, window)
        assert state(first.what) == "done"
        done = [f for f in window.pages.episode.side.facts() if "done in the last 12 h" in f.accessibleName()]
        assert len(done) == 1
        window.actions_by_key["undo"].trigger()
        settled(qtbot, window)
        until(qtbot, lambda: state(first.what) != "done")


def test_done_by_which_entry(qtbot: QtBot, path: Path) -> None:
    with open_window(qtbot, path) as window:
        due = window.feed.answers["bed-7"].figures.due
        gas = next(d for d in due if d.what == "gas" and d.state == "done")
        assert gas.done_by is not None
        assert f"(entry {gas.done_by[:8]})" in line_of(gas, Reader("UTC"))


def test_nothing_due_says_so(qtbot: QtBot, path: Path) -> None:
    with open_window(qtbot, path) as window:
        window.model.select(None)
        window.doers.due.close()
        assert window.doers.due.asking is None
        assert window.strip.said.text() == "Nothing is due."


def test_a_word_goes_to_the_patient_it_was_asked_for_whoever_is_in_hand_by_then(qtbot: QtBot, path: Path) -> None:
    """Another window takes an episode back while its dialog stands there: the hand goes on, the word must not."""
    with open_window(qtbot, path) as window:
        window.select("bed-7")
        settled(qtbot, window)
        window.actions_by_key["close_due"].trigger()
        asking = window.doers.due.asking
        assert asking is not None
        assert asking.windowTitle() == "Close due item, Bed 7"
        window.model.select("bed-3")
        asking.submit()
        until(qtbot, lambda: window.doers.due.asking is None)
        assert "recorded for Bed 7" in window.strip.plain()
    with Store.open(path, read_only=True) as store:
        said = {key: [e for e in store.entries(key) if e.action is Action.DUE] for key in ("bed-7", "bed-3")}
    assert len(said["bed-7"]) == 1
    assert said["bed-3"] == []
