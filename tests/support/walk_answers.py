"""Dialogs that are waited for inside an action (which file, how many minutes, who): answered or left meanwhile."""

from __future__ import annotations

from functools import partial
from pathlib import Path
from random import Random
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt, QTimer
from PySide6.QtTest import QTest
from PySide6.QtWidgets import (
    QAbstractButton,
    QApplication,
    QDialog,
    QFileDialog,
    QInputDialog,
    QLineEdit,
    QMessageBox,
    QSpinBox,
    QWidget,
)

from app.dialogs.action_finder import ActionFinder
from app.dialogs.sign_in import SignInDialog

if TYPE_CHECKING:
    from tests.support.random_walk import Walker

EVERY_MS = 15
MOST = 12
"""Answers inside one action, after which everything is left."""


class Answerer:
    """Looks while an action has not come back yet. Draws from a chance of its own for each step."""

    def __init__(self, walker: Walker) -> None:
        self._walker, self._chance, self._count = walker, Random(0), 0
        self._timer = QTimer()
        self._timer.setInterval(EVERY_MS)
        self._timer.timeout.connect(self._look)
        self._timer.start()

    def begin(self, chance: Random) -> None:
        """A step begins."""
        self._chance, self._count = chance, 0

    def stop(self) -> None:
        """No more."""
        self._timer.stop()

    def _look(self) -> None:
        if not self._walker.inside:
            return
        dialog = QApplication.activeModalWidget()
        self._count += 1
        if isinstance(dialog, QDialog):  # an answer may bring up another dialog, which is then looked for here
            QTimer.singleShot(0, partial(self._answer, dialog))
        elif self._count > MOST:  # something else is waited for: a drag
            target = QApplication.focusWidget() or self._walker.window
            QTest.keyClick(target, Qt.Key.Key_Escape)

    def _answer(self, dialog: QDialog) -> None:
        chance = self._chance
        if not self._walker.lives(dialog) or QApplication.activeModalWidget() is not dialog:
            return
        if self._count > MOST:
            self._walker.say(f"  leaves {type(dialog).__name__}")
            dialog.reject()
        elif chance.random() < 0.06:
            self._walker.say(f"  meanwhile of {type(dialog).__name__}: locks")
            self._walker.window.keeping.locking.idle()
        elif chance.random() < 0.06:
            self._walker.say(f"  meanwhile of {type(dialog).__name__}: another logs")
            self._walker.other_logs(chance)
        elif isinstance(dialog, QFileDialog):
            self._answer_file(dialog)
        elif isinstance(dialog, QMessageBox):
            button: QAbstractButton = chance.choice(dialog.buttons())
            self._walker.say(f"  message '{dialog.text()[:60]}': {button.text()}")
            button.click()
        elif isinstance(dialog, QInputDialog):
            self._answer_input(dialog)
        elif isinstance(dialog, SignInDialog):
            dialog.initials.setText(chance.choice(("CD", "", "AB", "1", "<b>")))
            self._end(dialog, dialog.go)
        elif isinstance(dialog, ActionFinder):
            dialog.search.setText(chance.choice(("gas", "lock", "text", "undo", "nothing of it", "export")))
            self._end(dialog, None)
        else:
            self._walker.say(f"  leaves {type(dialog).__name__}")
            dialog.reject()

    def _end(self, dialog: QDialog, go: QAbstractButton | None) -> None:
        on = self._chance.random() < 0.6
        self._walker.say(f"  {'answers' if on else 'leaves'} {type(dialog).__name__}")
        if not on:
            dialog.reject()
        elif go is not None:
            go.click()
        else:
            QTest.keyClick(dialog.findChild(QLineEdit) or dialog, Qt.Key.Key_Return)

    def _answer_input(self, dialog: QInputDialog) -> None:
        box, line = dialog.findChild(QSpinBox), dialog.findChild(QLineEdit)
        if isinstance(box, QSpinBox):
            box.setValue(self._chance.choice((0, 1, 10, 240)))
        elif line is not None:
            line.setText(self._chance.choice(("07:30 19:30", "08:00", "25:00", "", "07:00 15:00 23:00")))
        on = self._chance.random() < 0.6
        self._walker.say(f"  input: {'takes' if on else 'leaves'}")
        (dialog.accept if on else dialog.reject)()

    def _answer_file(self, dialog: QFileDialog) -> None:
        if self._chance.random() < 0.35:
            self._walker.say("  file dialog: left")
            dialog.reject()
            return
        path = self._path_for(dialog)
        self._walker.say(f"  file dialog '{dialog.windowTitle()}': {path.name}")
        line = dialog.findChild(QLineEdit, "fileNameEdit")
        assert isinstance(line, QWidget)
        line.setText(str(path))
        QTest.keyClick(line, Qt.Key.Key_Return)

    def _path_for(self, dialog: QFileDialog) -> Path:
        files = self._walker.files
        if dialog.acceptMode() is QFileDialog.AcceptMode.AcceptSave:
            suffix = self._chance.choice((".luffmark", ".csv", ".pdf", ".png", ".json", ""))
            new = files.folder / "out" / f"made-{self._chance.randrange(6)}{suffix}"
            return self._chance.choice((new, new, new, files.folder / "nowhere" / "x.pdf"))
        if dialog.fileMode() is QFileDialog.FileMode.Directory:
            return files.folder / "out"
        title = dialog.windowTitle().lower()
        if "open store" in title or "restore" in title or "damaged" in title:
            return self._chance.choice(files.stores)
        return self._chance.choice(files.readable)
