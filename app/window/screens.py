"""Pictures of every screen, light and dark, at two sizes, drawn off-screen from a store or the sample shift."""

from __future__ import annotations

import tempfile
from collections.abc import Callable, Iterator
from functools import partial
from pathlib import Path
from time import monotonic
from typing import Final

from PySide6.QtCore import QEventLoop, QPoint, QThread
from PySide6.QtGui import QCursor
from PySide6.QtWidgets import QApplication, QDialog, QWidget

from app.episode.figure_list import FoldHead
from app.episode.view import EpisodeView
from app.forms.samples import fill
from app.keeping.preferences import Preferences
from app.look.style_sheet import apply_theme
from app.look.theme import THEMES
from app.session.clock import REAL, still
from app.session.model import SessionModel
from app.session.runner import Runner
from app.session.state import Session
from app.window.main import MainWindow
from app.window.screen_dialogs import dialogs, on_show
from app.window.start import application
from storage.store import Store

SIZES: Final = ((1280, 800), (1920, 1080))
LINE: Final = "20m ago 22/6 32 rr 27"
BACK_MIN: Final = 120
"""How far the picture of a look back looks back."""
_PATIENCE_S: Final = 60.0
_PAUSE_MS: Final = 2


def draw_all(folder: Path, store_path: Path | None = None, *, passphrase: str | None = None) -> tuple[Path, ...]:
    """Draw every screen into `folder`; the pictures' paths. The sample shift where no store is given.

    Raises:
        OSError: the folder cannot be made or written to.
        RuntimeError: the figures did not come in a minute.
    """
    folder.mkdir(parents=True, exist_ok=True)
    app = application()
    QCursor.setPos(QPoint(4000, 4000))  # nothing is hovered in a picture
    made: list[Path] = []
    with tempfile.TemporaryDirectory(prefix="luffmark-screens-") as scratch:
        session, opener = _session(Path(scratch), store_path, passphrase)
        for name in THEMES:
            apply_theme(app, THEMES[name])
            for width, height in SIZES:
                made += _draw(folder, session, opener, name, (width, height))
    return tuple(made)


def _session(scratch: Path, store_path: Path | None, passphrase: str | None) -> tuple[Session, Callable[[], Store]]:
    if store_path is not None:
        from app.session.local_zone import local_zone

        opener = partial(Store.open, store_path, passphrase=passphrase, read_only=True)
        return Session(store_path, zone=local_zone(), clock=REAL), opener
    from app import demo

    path = demo.make_demo_store(scratch)
    session = Session(path, zone=demo.ZONE, clock=still(demo.demo_now()), person=demo.BY, is_demo=True)
    return session, partial(Store.open, path)


def _draw(
    folder: Path, session: Session, opener: Callable[[], Store], theme: str, size: tuple[int, int]
) -> list[Path]:
    window = MainWindow(Preferences(theme=theme, cautions_seen=True))
    window.resize(*size)
    window.show()
    made = []
    try:
        for name, widget in _screens(window, session, opener):
            path = folder / f"{name}-{theme}-{size[0]}x{size[1]}.png"
            if not widget.grab().save(str(path)):
                raise OSError(f"{path} could not be written")
            made.append(path)
            if isinstance(widget, QDialog):
                widget.reject()
    finally:
        window.close()
        window.deleteLater()
        _pass_events()
    return made


def _screens(window: MainWindow, session: Session, opener: Callable[[], Store]) -> Iterator[tuple[str, QWidget]]:
    _pass_events()
    yield "first", window
    window.show_model(SessionModel(session, Runner(opener), window))
    _wait_for(window, lambda: window.feed is not None and window.feed.is_ready)
    _settle(window)
    yield "ward", window
    yield from _strip(window)
    if window.opened is None or window.opened.model.session.selection is None:
        return
    window.show_page("episode")
    _settle(window)
    yield "episode", window
    pages = window.opened.pages
    start, end = pages.episode.stack.in_view
    pages.episode.stack.point_at(start + (end - start) * 2 // 3)
    _pass_events()
    yield "episode-crosshair", window
    yield from _figures(window, pages.episode)
    for name in ("map", "compare", "handover", "statistics"):
        window.show_page(name)
        _settle(window)
        yield name, window
    window.show_page("ward")
    yield from _dialogs(window)
    window.doers.review.step(-BACK_MIN)
    _settle(window)
    yield "as-known", window
    window.actions_by_key["came_later"].trigger()
    _settle(window)
    later = on_show(window)
    if later is not None:
        yield "came-later", later
        _pass_events()
    window.actions_by_key["lock"].trigger()
    _settle(window)
    yield "locked", window


def _figures(window: MainWindow, episode: EpisodeView) -> Iterator[tuple[str, QWidget]]:
    """The list of figures, folded and unfolded; explanations of a figure, of one without a value, of a score."""
    side = episode.side
    inside = side.widget()
    if side.figures is None or inside is None:
        return
    side.ensureWidgetVisible(side.figures)
    _pass_events()
    yield "figures-folded", window
    for name in ("gas", "oxygenation", "breathing"):
        fold = next(f for f in side.figures.folds if f.head.key == f"figures.{name}")
        side.figures.set_unfolded(False)
        fold.head.unfold()
        for inner in fold.findChildren(FoldHead)[1:]:
            inner.unfold()
        _pass_events()
        side.verticalScrollBar().setValue(fold.mapTo(inside, QPoint(0, 0)).y() - 40)
        _pass_events()
        yield f"figures-{name}", window
    for name, key in (("doubt", "ventilatory_ratio"), ("none", "aa_gradient_expected"), ("class", "gas_class")):
        side.figures.set_unfolded(False)
        side.figures.set_unfolded(True)
        fact = next((f for f in side.facts() if getattr(f.payload, "key", "") == key), None)
        if fact is not None and fact.explanation is not None:
            window.doers.view.explain(fact.explanation)
            _pass_events()
            yield f"explain-{name}", _dialog(window)
            _pass_events()
    side.figures.set_unfolded(False)
    score = next((f for f in side.facts() if f.explanation is not None and f.explanation.population), None)
    if score is not None and score.explanation is not None:
        window.doers.view.explain(score.explanation)
        _pass_events()
        yield "explain-score", _dialog(window)
    _pass_events()


def _dialog(window: MainWindow) -> QWidget:
    found = on_show(window)
    if found is None:
        raise RuntimeError("the dialog did not come up")
    return found


def _strip(window: MainWindow) -> Iterator[tuple[str, QWidget]]:
    strip = window.strip
    if strip is None or strip.patient is None:
        return
    strip.set_text(LINE)
    _settle(window)
    strip.line.deselect()
    yield "strip", window
    strip.leave()


def _dialogs(window: MainWindow) -> Iterator[tuple[str, QWidget]]:
    with tempfile.TemporaryDirectory(prefix="luffmark-screens-") as scratch:
        for name, dialog in dialogs(window, Path(scratch), partial(_settle, window)):
            fill(dialog)
            _settle(window)
            yield name, dialog
            _pass_events()


def _settle(window: MainWindow) -> None:
    def settled() -> bool:
        o = window.opened
        return o is None or (not o.model.runner.is_busy and o.strip.state != "awaited")

    _wait_for(window, settled)


def _wait_for(window: MainWindow, done: Callable[[], bool]) -> None:
    """Let the worker answer, then let everything be laid out."""
    began = monotonic()
    while not done():
        if monotonic() - began > _PATIENCE_S:
            raise RuntimeError(f"the window {window.windowTitle()!r} did not get its figures in {_PATIENCE_S:.0f} s")
        QApplication.processEvents(QEventLoop.ProcessEventsFlag.AllEvents, 20)
        QThread.msleep(_PAUSE_MS)  # with a time limit Qt waits for nothing, and a busy loop would slow the worker
    _pass_events()


def _pass_events() -> None:
    for _ in range(5):
        QApplication.processEvents(QEventLoop.ProcessEventsFlag.AllEvents, 20)
