"""Flags reach the ledger by themselves while a session is live, and never while it looks back."""

from collections.abc import Iterator
from pathlib import Path

import pytest
from pytestqt.qtbot import QtBot

from app.operations import entry, episode
from app.session.clock import still
from app.session.model import SessionModel
from app.session.runner import Runner
from app.session.state import Session
from core.record.entries import Action
from core.record.instant import HOUR, parse
from storage.store import Store

NOW = parse("2026-03-28T02:30:00Z")


@pytest.fixture
def path(tmp_path: Path) -> Path:
    made = tmp_path / "ward.luffmark"
    with Store.create(made, now=NOW - 9 * HOUR) as store:
        episode.begin(store, "AB", NOW - 8 * HOUR, episode.BeginRequest("A"))
    return made


@pytest.fixture
def model(path: Path, qtbot: QtBot) -> Iterator[SessionModel]:
    made = SessionModel(Session(path, clock=still(NOW), person="AB"), Runner(lambda: Store.open(path)))
    with qtbot.waitSignal(made.changed):
        made.start()
    qtbot.waitUntil(lambda: not made.runner.is_busy)
    yield made
    made.close()


def transitions(path: Path) -> list[tuple[str, str | None]]:
    with Store.open(path) as store:
        return [(e.channel, e.words) for e in store.entries("A") if e.action is Action.FLAG]


def log(model: SessionModel, qtbot: QtBot, text: str) -> None:
    with qtbot.waitSignal(model.changed):
        model.ask(entry.log_line, entry.LineRequest("A", text, "UTC", confirmed=True))
    qtbot.waitUntil(lambda: not model.runner.is_busy)


def test_a_gas_raises_its_flag_in_the_ledger_once(model: SessionModel, path: Path, qtbot: QtBot) -> None:
    log(model, qtbot, "02:00 site arterial ph 7.21 paco2 80")
    log(model, qtbot, "02:10 rr 20")
    told = transitions(path)
    assert ("ph_below_severe", "raised") in told
    assert len(told) == len(set(told))


def test_a_look_back_writes_nothing(model: SessionModel, path: Path, qtbot: QtBot) -> None:
    model.set_as_of(NOW - HOUR)
    log(model, qtbot, "02:00 site arterial ph 7.21 paco2 80")
    assert transitions(path) == []
    model.set_as_of(None)
    model.flags.look()
    qtbot.waitUntil(lambda: not model.runner.is_busy)
    assert ("ph_below_severe", "raised") in transitions(path)
