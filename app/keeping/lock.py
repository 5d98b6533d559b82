"""The idle lock: after some minutes without a key or the mouse every screen is hidden, until somebody proves who
they are.

Nothing is closed: what was typed stays where it was, out of sight. Activity is read at the windows of the platform,
not at every widget: a filter on the whole application would slow each drawing.
"""

from __future__ import annotations

import time
from typing import TYPE_CHECKING, Final

from PySide6.QtCore import QEvent, QObject, Qt, QTimer, Signal
from PySide6.QtGui import QGuiApplication, QWindow
from PySide6.QtWidgets import QApplication, QDialog, QToolTip, QWidget
from shiboken6 import isValid

from app.keeping.lock_page import LockPage

if TYPE_CHECKING:
    from app.window.shell import Shell

LOOK_MS: Final = 2_000
_SIGNS: Final = frozenset({
    QEvent.Type.KeyPress, QEvent.Type.MouseMove, QEvent.Type.MouseButtonPress, QEvent.Type.Wheel,
    QEvent.Type.TouchBegin, QEvent.Type.TabletPress,
})  # fmt: skip


class IdleWatch(QObject):
    """Tells when nobody has touched key or mouse for a time, also over a sleep of the computer."""

    idle = Signal()

    def __init__(self, parent: QObject) -> None:
        super().__init__(parent)
        self._limit_s = 0.0
        self._last = (time.monotonic(), time.time())
        self._look = QTimer(self)
        self._look.setInterval(LOOK_MS)
        self._look.timeout.connect(self.look)

    def start(self, minutes: float) -> None:
        """Begin to watch; `idle` comes after so many minutes."""
        self._limit_s = minutes * 60
        self.touch()
        app = QGuiApplication.instance()
        if isinstance(app, QGuiApplication) and not self._look.isActive():
            app.focusWindowChanged.connect(self._watch)
            for window in app.topLevelWindows():
                self._watch(window)
        self._look.start()

    def stop(self) -> None:
        """Watch no more."""
        app = QGuiApplication.instance()
        if self._look.isActive() and isinstance(app, QGuiApplication):
            app.focusWindowChanged.disconnect(self._watch)
        self._look.stop()

    def touch(self) -> None:
        """Somebody is there."""
        self._last = (time.monotonic(), time.time())

    def look(self) -> None:
        """Whether nobody was there for too long. A clock set back counts for nothing, one that slept does."""
        still = max(time.monotonic() - self._last[0], time.time() - self._last[1])
        if still >= self._limit_s:
            self.touch()
            self.idle.emit()

    def _watch(self, window: QWindow | None) -> None:
        if window is not None:
            window.installEventFilter(self)
        self.touch()

    def eventFilter(self, _watched: QObject, event: QEvent) -> bool:
        if event.type() in _SIGNS:
            self.touch()
        return False


class Lock(QObject):
    """Hides what the window shows, and shows it again. Who may unlock is for others to say."""

    def __init__(self, window: Shell) -> None:
        super().__init__(window)
        self._window = window
        self.page = LockPage(window.theme)
        self._dialogs: list[tuple[QDialog, Qt.WindowModality]] = []
        self._focus: QWidget | None = None
        self.is_locked = False
        self.over: QWidget | None = None
        """A dialog that belongs to unlocking, and so may be seen."""

    def lock(self) -> None:
        """Hide everything of this window; the page says how to get in again."""
        if self.is_locked:
            return
        self.is_locked = True
        self._focus = QApplication.focusWidget()
        for widget in QApplication.topLevelWidgets():
            self._put_away(widget)
        QToolTip.hideText()
        self._window.menuBar().hide()
        self._window.cover.setCurrentWidget(self.page)
        app = QApplication.instance()
        if app is not None:
            app.installEventFilter(self)

    def unlock(self) -> None:
        """Show everything as it was."""
        if not self.is_locked:
            return
        self.is_locked = False
        app = QApplication.instance()
        if app is not None:
            app.removeEventFilter(self)
        self.page.end()
        self._window.cover.setCurrentIndex(0)
        self._window.menuBar().show()
        for dialog, modality in self._dialogs:
            if isValid(dialog):
                dialog.finished.disconnect(self._has_ended)
                dialog.setWindowModality(modality)
                dialog.show()
        if self._focus is not None and isValid(self._focus) and self._focus.isVisible():
            self._focus.setFocus()
        self._dialogs, self._focus = [], None

    def _put_away(self, widget: QWidget) -> None:
        if widget in (self._window, self.over) or not widget.isVisible():
            return
        if isinstance(widget, QDialog) and type(widget).__module__.startswith("PySide6"):
            # Qt's own are waited for by whoever asked: hidden they are over, and the printer they point to is gone
            QDialog.reject(widget)
        elif isinstance(widget, QDialog):
            self._dialogs.append((widget, widget.windowModality()))
            widget.finished.connect(self._has_ended)
            widget.hide()
        elif widget.windowType() in (Qt.WindowType.Popup, Qt.WindowType.ToolTip):
            widget.hide()  # a tip's own end would leave it there for a while

    def _has_ended(self, _result: int) -> None:
        """What a dialog had asked for was answered while nobody saw it: it is over, and comes back no more."""
        ended = self.sender()
        self._dialogs = [kept for kept in self._dialogs if kept[0] is not ended]

    def eventFilter(self, watched: QObject, event: QEvent) -> bool:
        """A dialog that some late answer opens stays out of sight too."""
        if event.type() == QEvent.Type.Show and self.is_locked and self._comes_late(watched):
            QTimer.singleShot(0, self, self._hide_late)
        return False

    def _comes_late(self, shown: QObject) -> bool:
        return isinstance(shown, QWidget) and shown.isWindow() and shown not in (self._window, self.over)

    def _hide_late(self) -> None:
        if self.is_locked:
            for widget in QApplication.topLevelWidgets():
                self._put_away(widget)
