"""The window beside many closed episodes: opening a store, and an entry until the lanes show it.

Two windows live in one process and take turns; the ratio of their medians counts. Run with `-m bench -s`.
"""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import ExitStack
from functools import partial
from pathlib import Path
from statistics import median
from time import perf_counter

import pytest
from PySide6.QtCore import QEventLoop
from PySide6.QtWidgets import QApplication
from pytestqt.qtbot import QtBot

from app.operations import entry, episode
from app.operations.entry import LineRequest
from app.operations.episode import BeginRequest
from app.session.clock import still
from app.session.model import SessionModel
from app.session.runner import Runner
from app.session.state import Session
from app.window.main import MainWindow
from core.record.entries import NewEntry
from core.record.instant import DAY, HOUR, parse
from storage.draft_batch import DraftBatch, DraftEntry
from storage.store import Store
from tests.support.open_window import BEDS, NOW, ZONE, open_window

pytestmark = pytest.mark.bench
LIMIT = 1.3
LONG_AGO = NOW - 100 * DAY


def store_beside(path: Path, closed: int) -> Path:
    """Two beds on the ward, and episodes that were closed long ago."""
    with Store.create(path, now=LONG_AGO) as store:
        for start in range(0, closed, 500):
            rows = [_ended(f"E{i}") for i in range(start, min(start + 500, closed))]
            drafts = tuple(DraftEntry(e) for row in rows for e in row)
            store.append_drafts((DraftBatch("AB", "log", drafts),), (LONG_AGO,))
        for key, (facts, lines) in BEDS.items():
            episode.begin(store, "AB", parse("2026-03-27T21:30:00+00:00"), BeginRequest(key, facts, zone=ZONE))
            for line in lines:
                entry.log_line(store, "AB", NOW, LineRequest(key, line, ZONE, confirmed=True))
    return path


def _ended(key: str) -> list[NewEntry]:
    rate = NewEntry(key, "rr", LONG_AGO, 20.0, None, "20", "/min", 0, "UTC", "AB")
    ended = NewEntry(key, "ended_at", LONG_AGO + HOUR, float(LONG_AGO + HOUR))
    return [NewEntry(key, "label", LONG_AGO, words=key), rate, ended]


def passed() -> None:
    QApplication.processEvents(QEventLoop.ProcessEventsFlag.WaitForMoreEvents, 5)


def seconds_to_open(window: MainWindow, path: Path) -> float:
    """From the store's name to painted lanes."""
    window.close_model()
    begun = perf_counter()
    session = Session(path, zone=ZONE, clock=still(NOW), person="AB")
    window.show_model(SessionModel(session, Runner(partial(Store.open, path)), window))
    while not (window.feed is not None and window.feed.is_ready and window.pages.ward.lanes.spec is not None):
        passed()
    window.grab()
    return perf_counter() - begun


def seconds_to_lanes(window: MainWindow, number: int) -> float:
    """From Enter to lanes that show the entry."""
    window.select("bed-7")
    line = f"{4 + number // 60:02d}:{number % 60:02d} rr {20 + number % 15} spo2 90"
    request = LineRequest("bed-7", line, ZONE, confirmed=True)
    before, seen = window.pages.ward.lanes.spec, window.model.session.head
    begun = perf_counter()
    window.model.ask(entry.log_line, request)
    while window.pages.ward.lanes.spec is before or window.model.session.head == seen:
        passed()
    window.pages.ward.lanes.viewport().repaint()
    return perf_counter() - begun


@pytest.fixture
def windows(qtbot: QtBot, tmp_path: Path) -> Iterator[tuple[MainWindow, MainWindow]]:
    """One beside 10 closed episodes, one beside 10,000."""
    with ExitStack() as stack:
        paths = [store_beside(tmp_path / f"{n}.luffmark", n) for n in (10, 10_000)]
        yield stack.enter_context(open_window(qtbot, paths[0])), stack.enter_context(open_window(qtbot, paths[1]))


def test_an_entry_until_the_lanes_show_it(
    windows: tuple[MainWindow, MainWindow], capsys: pytest.CaptureFixture[str]
) -> None:
    costs: tuple[list[float], list[float]] = [], []
    for n in range(44):
        for window, own in zip(windows, costs, strict=True):
            took = seconds_to_lanes(window, n)
            if n >= 4:
                own.append(took)
    few, many = (median(own) for own in costs)
    with capsys.disabled():
        print(f"\nentry to lanes: 10 closed {few * 1e3:.0f} ms, 10,000 {many * 1e3:.0f} ms, ratio {many / few:.2f}")
    assert many <= LIMIT * few


def test_opening_a_store_until_the_lanes_are_painted(
    qtbot: QtBot, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    small, large = (store_beside(tmp_path / f"{n}.luffmark", n) for n in (20, 20_000))
    costs: tuple[list[float], list[float]] = [], []
    with open_window(qtbot, small) as window:
        for n in range(12):
            for path, own in zip((small, large), costs, strict=True):
                took = seconds_to_open(window, path)
                if n >= 2:
                    own.append(took)
    few, many = (median(own) for own in costs)
    with capsys.disabled():
        print(f"\nopening to lanes: 20 closed {few * 1e3:.0f} ms, 20,000 {many * 1e3:.0f} ms, ratio {many / few:.2f}")
    assert many <= LIMIT * few
