"""A window on a small store of its own, at a clock that stands still. Two beds, logged as people log."""

from __future__ import annotations

from collections.abc import Callable, Iterator
from contextlib import contextmanager
from functools import cache, partial
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import TypeVar

from PySide6.QtWidgets import QDialog
from pytestqt.qtbot import QtBot

from app.keeping.preferences import Preferences
from app.look.style_sheet import apply_theme
from app.look.theme import THEMES
from app.operations import entry, episode
from app.operations.entry import LineRequest
from app.operations.episode import BeginRequest
from app.session.clock import Clock, still
from app.session.model import SessionModel
from app.session.runner import Runner
from app.session.state import Session
from app.window.main import MainWindow
from core.record.instant import parse
from storage.store import Store

D = TypeVar("D", bound=QDialog)
NOW = parse("2026-03-28T05:30:00+00:00")
ZONE = "Europe/London"
WAIT_MS = 60_000
"""How long an answer is waited for: on a machine that does much else a window on two beds has taken 20 s."""

BEDS = {
    "bed-7": (
        {"label": "Bed 7", "indication": "copd", "location": "Bay B", "ceiling_of_care": "full"},
        ("23:40 ph 7.26 paco2 68 pao2 58 gas_fio2 28% rr 30 spo2 87 hr 110 gcs 15", "00:00 bpap-st 14/5 28",
         "01:05 ph 7.27 paco2 67 pao2 60", "02:00 18/5",
         "03:05 ph 7.24 paco2 71 pao2 61 rr 27 gcs 14 spo2 89", "04:30 skin check", "05:00 rr 27 spo2 90 gcs 14"),
    ),
    "bed-3": (
        {"label": "Bed 3", "indication": "copd", "location": "Bay A", "ceiling_of_care": "full"},
        ("22:00 ph 7.28 paco2 64 pao2 60 gas_fio2 28%", "22:20 bpap-st 16/5 28",
         "23:25 ph 7.36 paco2 52 pao2 64", "05:00 rr 20 spo2 91"),
    ),
}  # fmt: skip


def make_store(path: Path) -> Path:
    """A store with both beds: logged once in a run, and copied."""
    path.touch(mode=0o600, exist_ok=False)
    path.write_bytes(_both_beds())
    return path


@cache
def _both_beds() -> bytes:
    with TemporaryDirectory() as folder:
        path = _logged(Path(folder) / "ward.luffmark")
        assert list(path.parent.iterdir()) == [path], "a store that is closed is one file"
        return path.read_bytes()


def _logged(path: Path) -> Path:
    with Store.create(path, now=NOW - 12 * 3_600_000_000, by="AB") as store:
        for key, (facts, lines) in BEDS.items():
            episode.begin(store, "AB", parse("2026-03-27T21:30:00+00:00"), BeginRequest(key, facts, zone=ZONE))
            for line in lines:
                entry.log_line(store, "AB", NOW, LineRequest(key, line, ZONE, confirmed=True))
    return path


@contextmanager
def open_window(
    qtbot: QtBot,
    path: Path,
    *,
    preferences: Preferences | None = None,
    clock: Clock | None = None,
    passphrase: str | None = None,
) -> Iterator[MainWindow]:
    """The window with its figures shown; closed with everything in it when the block ends."""
    preferences = preferences or Preferences(cautions_seen=True)
    apply_theme(_app(), THEMES[preferences.theme].scaled(preferences.text_scale))
    window = MainWindow(preferences)
    qtbot.addWidget(window)
    window.show()
    session = Session(path, zone=ZONE, clock=clock or still(NOW), person="AB")
    window.show_model(SessionModel(session, Runner(partial(Store.open, path, passphrase=passphrase)), window))
    qtbot.waitUntil(lambda: window.feed.is_ready and not window.model.runner.is_busy, timeout=WAIT_MS)
    try:
        yield window
    finally:
        window.close()


def dialog_of(window: MainWindow, kind: type[D]) -> D:
    """The dialog of a kind that is on show."""
    return next(d for d in window.findChildren(kind) if d.isVisible())


def settled(qtbot: QtBot, window: MainWindow) -> None:
    """Wait until every question that the window asked is answered."""
    qtbot.waitUntil(lambda: not window.model.runner.is_busy and window.strip.state != "awaited", timeout=WAIT_MS)


def until(qtbot: QtBot, done: Callable[[], bool]) -> None:
    """Wait for something."""
    qtbot.waitUntil(done, timeout=WAIT_MS)


def _app():  # type: ignore[no-untyped-def]
    from PySide6.QtWidgets import QApplication

    return QApplication.instance()


def type_line(qtbot: QtBot, window: MainWindow, text: str) -> None:
    """Type on the line as a person does, and wait for what is said of it."""
    qtbot.keyClicks(window.strip.line, text)
    settled(qtbot, window)
