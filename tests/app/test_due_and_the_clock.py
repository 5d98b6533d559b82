"""No due item is missed: over both clock changes, while the machine sleeps, and while the program is not running."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import pytest
from pytestqt.qtbot import QtBot

from app.look.formats import clock as wall_clock
from app.operations import entry, episode, figures
from app.session.clock import Clock
from app.session.model import SessionModel
from app.session.runner import Runner
from app.session.state import Changed, Session, What
from core.judgement.flag_history import history_of
from core.judgement.shapes import DueFigure
from core.record.instant import HOUR, MINUTE, Instant, parse
from storage.store import Store

START_LINES = ("ph 7.28 paco2 70 pao2 60 rr 30 gcs 15", "bpap-st 20/5 30")
ZONE = "Europe/London"


@dataclass(frozen=True)
class Hands:
    """A clock whose hands the test moves: a sleeping machine skips, it does not tick."""

    at: list[Instant]

    @property
    def pretended(self) -> Instant | None:
        return None

    @property
    def is_running(self) -> bool:
        return True

    def now(self) -> Instant:
        return self.at[0]


def begun(path: Path, start: Instant, zone: str = ZONE) -> Path:
    """A store with one bed that was put on support at `start`."""
    with Store.create(path, now=start - HOUR, by="AB") as store:
        episode.begin(store, "AB", start - 30 * MINUTE, episode.BeginRequest("A", {"indication": "copd"}))
        for line in START_LINES:
            made = entry.LineRequest("A", line, zone, confirmed=True)
            entry.log_line(store, "AB", start, made)
    return path


def due_gas(store: Store, at: Instant) -> DueFigure:
    found = figures.of_episode(store, "AB", at, figures.EpisodeRequest("A", at)).value.figures.due
    (item,) = [d for d in found if d.what == "gas"]
    return item


def overdue_since(path: Path) -> list[tuple[Instant, str]]:
    """When the flag of an overdue gas was met, and its state in the ledger."""
    with Store.open(path, read_only=True) as store:
        history = history_of(store.entries("A"))
    return [(h.since, h.life) for h in history.values() if h.marker == "gas_overdue"]


@pytest.mark.parametrize(
    ("start", "walls"),
    [
        ("2026-03-29T00:15:00Z", ("00:45", "03:15")),  # 01:00 becomes 02:00: the wall shows 3 h for 2 h
        ("2026-10-25T00:15:00Z", ("01:45", "02:15")),  # 02:00 becomes 01:00 again: the wall shows 1 h for 2 h
        ("2026-06-10T00:15:00Z", ("01:45", "03:15")),
    ],
)
def test_a_gas_is_due_after_elapsed_minutes_whatever_the_wall_shows(
    tmp_path: Path, start: str, walls: tuple[str, str]
) -> None:
    at = parse(start)
    with Store.open(begun(tmp_path / "w.luffmark", at)) as store:
        states = [due_gas(store, at + minutes * MINUTE).state for minutes in (29, 104, 105, 120)]
        assert states == ["open", "open", "soon", "soon"]
        late = due_gas(store, at + 120 * MINUTE + 1)
        assert late.state == "overdue"
        assert (late.due_from, late.due_until) == (at + 30 * MINUTE, at + 120 * MINUTE)
        assert tuple(wall_clock(t, ZONE)[:5] for t in (late.due_from, late.due_until)) == walls


@pytest.fixture
def at() -> Instant:
    return parse("2026-03-28T02:00:00Z")


def opened(path: Path, hands: Hands, qtbot: QtBot) -> SessionModel:
    clock: Clock = hands  # type: ignore[assignment]
    model = SessionModel(Session(path, clock=clock, person="AB"), Runner(lambda: Store.open(path)))
    with qtbot.waitSignal(model.changed):
        model.start()
    qtbot.waitUntil(lambda: not model.runner.is_busy)
    return model


def test_a_machine_that_slept_past_the_time_says_so_when_it_wakes(tmp_path: Path, qtbot: QtBot, at: Instant) -> None:
    path, hands = begun(tmp_path / "w.luffmark", at), Hands([at + 10 * MINUTE])
    model = opened(path, hands, qtbot)
    try:
        assert overdue_since(path) == []
        hands.at[0] = at + 7 * HOUR  # the lid was closed for most of a night
        told: list[Changed] = []
        model.changed.connect(told.append)
        model._ticked()
        assert any(c.touches(What.CLOCK) for c in told)  # views ask for figures of now
        model.flags.look()
        qtbot.waitUntil(lambda: not model.runner.is_busy)
    finally:
        model.close()
    assert overdue_since(path) == [(at + 120 * MINUTE, "raised")]
    with Store.open(path) as store:
        assert due_gas(store, hands.now()).state == "overdue"


def test_what_fell_due_while_the_program_was_closed_is_raised_when_it_opens(
    tmp_path: Path, qtbot: QtBot, at: Instant
) -> None:
    path = begun(tmp_path / "w.luffmark", at)
    first = opened(path, Hands([at + 10 * MINUTE]), qtbot)
    first.close()
    assert overdue_since(path) == []
    again = opened(path, Hands([at + 5 * HOUR]), qtbot)
    again.close()
    assert overdue_since(path) == [(at + 120 * MINUTE, "raised")]
    twice = opened(path, Hands([at + 6 * HOUR]), qtbot)
    twice.close()
    assert overdue_since(path) == [(at + 120 * MINUTE, "raised")]


def test_a_gas_that_came_while_it_slept_leaves_the_flag(tmp_path: Path, qtbot: QtBot, at: Instant) -> None:
    """Another machine logged it: the flag stood from the deadline to the gas, and both stay to be read."""
    path, hands = begun(tmp_path / "w.luffmark", at), Hands([at + 10 * MINUTE])
    model = opened(path, hands, qtbot)
    try:
        hands.at[0] = at + 4 * HOUR
        with Store.open(path) as other:
            line = "05:30 ph 7.33 paco2 60"
            entry.log_line(other, "CD", hands.now(), entry.LineRequest("A", line, "UTC", confirmed=True))
        model.look_for_changes()
        qtbot.waitUntil(lambda: not model.runner.is_busy)
    finally:
        model.close()
    assert overdue_since(path) == [(at + 120 * MINUTE, "no longer met")]


def test_a_clock_set_back_brings_no_item_twice(tmp_path: Path, qtbot: QtBot, at: Instant) -> None:
    path = begun(tmp_path / "w.luffmark", at)
    opened(path, Hands([at + 3 * HOUR]), qtbot).close()
    assert overdue_since(path) == [(at + 120 * MINUTE, "raised")]
    opened(path, Hands([at + HOUR]), qtbot).close()
    opened(path, Hands([at + 3 * HOUR]), qtbot).close()
    assert overdue_since(path) == [(at + 120 * MINUTE, "raised")]
