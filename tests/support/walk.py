"""A person at the window: presses, types, answers dialogs that stand in the way, and may take a picture of each step.

`LUFF_WALK_PICTURES=FOLDER` keeps the pictures.
"""

from __future__ import annotations

import os
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TypeVar

from PySide6.QtCore import QPoint, Qt, QTimer
from PySide6.QtGui import QColor, QKeySequence, QPainter
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QCheckBox, QDialog, QFileDialog, QLineEdit, QWidget
from pytestqt.qtbot import QtBot

from app.keeping.preferences import load
from app.window.main import MainWindow
from tests.support.open_window import until

D = TypeVar("D", bound=QDialog)


class Walk:
    """One walk through one window."""

    def __init__(self, qtbot: QtBot, window: MainWindow) -> None:
        self.qtbot, self.window = qtbot, window
        self._folder = os.environ.get("LUFF_WALK_PICTURES", "")
        self._count = 0

    def start_again(self, preferences: Path) -> None:
        """Close the window and start the program anew, with the preferences that were kept."""
        self.window.close()
        self.window = MainWindow(load(preferences), preferences)
        self.qtbot.addWidget(self.window)
        self.window.show()
        self.until(self.window.isVisible)

    def until(self, done: Callable[[], object]) -> None:
        """Wait for something."""
        until(self.qtbot, lambda: bool(done()))

    def rest(self) -> None:
        """Wait until every question is answered."""
        self.until(lambda: self.window.model is None or not self.window.model.runner.is_busy)

    def press(self, widget: QWidget) -> None:
        """Press a button; a tick at its box."""
        self.until(widget.isVisible)
        assert widget.isEnabled(), widget
        at = QPoint(10, widget.height() // 2) if isinstance(widget, QCheckBox) else widget.rect().center()
        self.qtbot.mouseClick(widget, Qt.MouseButton.LeftButton, pos=at)

    def write(self, line: QLineEdit, text: str, *, enter: bool = False) -> None:
        """Write into a field that is there to be seen."""
        self.until(line.isVisible)
        assert line.isEnabled(), line.accessibleName()
        line.clear()
        self.qtbot.keyClicks(line, text)
        if enter:
            self.qtbot.keyClick(line, Qt.Key.Key_Return)

    def keys(self, text: str) -> None:
        """Press a shortcut."""
        self.window.activateWindow()
        self.until(self.window.isActiveWindow)
        QTest.keySequence(self.window, QKeySequence(text))

    def dialog(self, kind: type[D]) -> D:
        """The dialog of a kind that stands there, once it does."""
        self.until(lambda: self._dialogs(kind))
        return self._dialogs(kind)[-1]

    def _dialogs(self, kind: type[D]) -> list[D]:
        return [w for w in QApplication.topLevelWidgets() if isinstance(w, kind) and w.isVisible()]

    @contextmanager
    def choosing(self, path: Path) -> Iterator[None]:
        """Answer the file dialog that comes up inside, by typing a path and Enter."""
        answered: list[bool] = []

        def answer() -> None:
            found = self._dialogs(QFileDialog)
            if not found:
                QTimer.singleShot(20, answer)
                return
            line = found[0].findChild(QLineEdit, "fileNameEdit")
            assert line is not None
            line.setText(str(path))
            answered.append(True)
            QTest.keyClick(line, Qt.Key.Key_Return)

        QTimer.singleShot(20, answer)
        yield
        assert answered, "no file was asked for"

    def log(self, text: str) -> None:
        """Log a line for the patient in hand."""
        strip, model = self.window.strip, self.window.model
        assert strip is not None
        assert model is not None
        head = model.session.head
        self.write(strip.line, text)
        self.until(lambda: strip.state != "awaited" and not model.runner.is_busy)
        self.qtbot.keyClick(strip.line, Qt.Key.Key_Return)
        self.until(lambda: model.session.head > head and not model.runner.is_busy)

    def seen(self) -> str:
        """Every text that could be read on the screen now."""
        tops = [w for w in QApplication.topLevelWidgets() if w.isVisible()]
        parts = [w for top in tops for w in [top, *top.findChildren(QWidget)] if w.isVisible()]
        names = ("windowTitle", "text", "toPlainText", "accessibleName")
        return "\n".join(str(getattr(w, n)()) for w in parts for n in names if callable(getattr(w, n, None)))

    def picture(self, name: str) -> None:
        """A picture of the window with everything that lies over it."""
        self._count += 1
        if not self._folder:
            return
        QTest.qWait(60)
        picture, corner = self.window.grab(), self.window.frameGeometry().topLeft()
        painter = QPainter(picture)
        for over in (w for w in QApplication.topLevelWidgets() if w.isVisible() and w is not self.window):
            at = over.frameGeometry().topLeft() - corner
            painter.fillRect(at.x() - 1, at.y() - 23, over.width() + 2, 22, QColor("#445566"))
            painter.setPen(QColor("white"))
            painter.drawText(at.x() + 8, at.y() - 7, over.windowTitle())
            painter.drawPixmap(at, over.grab())
        painter.end()
        picture.save(str(Path(self._folder) / f"{self._count:02d}-{name}.png"))
