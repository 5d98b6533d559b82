"""A small card that shows long work and can stop it. It floats: what is being read never moves for it."""

from __future__ import annotations

from PySide6.QtCore import QTimer, Signal
from PySide6.QtWidgets import QFrame, QHBoxLayout, QLabel, QProgressBar, QPushButton, QWidget

from app.session.runner import Progress
from app.telling.phrases import translate

AFTER_MS = 1000
"""Work that is done sooner shows nothing."""


class ProgressLine(QFrame):
    """Stands at the lower left of `over`, above what is there: at the right stand the legend and what is due."""

    cancelled = Signal(int)

    def __init__(self, parent: QWidget) -> None:
        super().__init__(parent)
        self._number = 0
        self._over: QWidget | None = None
        self.setProperty("card", True)
        self.setAutoFillBackground(True)
        self.word = QLabel()
        self.bar = QProgressBar()
        self.bar.setTextVisible(False)
        self.bar.setFixedWidth(180)
        self.bar.setAccessibleName(self.tr("Progress"))
        self.stop = QPushButton(self.tr("Stop"))
        self.stop.setProperty("role", "small")
        row = QHBoxLayout(self)
        row.setContentsMargins(10, 3, 6, 3)
        row.addWidget(self.word)
        row.addWidget(self.bar)
        row.addWidget(self.stop)
        self.stop.clicked.connect(self._stop)
        self._wait = QTimer(self)
        self._wait.setSingleShot(True)
        self._wait.setInterval(AFTER_MS)
        self._wait.timeout.connect(self._appear)
        self.hide()

    def stand_over(self, widget: QWidget | None) -> None:
        """The widget at whose lower right it stands; None: out of sight, for what it stood over goes."""
        self._over = widget
        if widget is None:
            self.busy_changed(False)

    def show_progress(self, progress: Progress) -> None:
        """Say how far the running work is."""
        self._number = progress.number
        self.stop.setEnabled(True)
        self.word.setText(subject_words(progress.subject))
        self.bar.setRange(0, progress.total)
        self.bar.setValue(progress.done)
        if self.isVisible():
            self.place()  # as wide as its words

    def busy_changed(self, busy: bool) -> None:
        """Work began, or all of it is done."""
        if busy:
            self._number = 0
            self.stop.setEnabled(False)
            self.bar.setRange(0, 0)
            self.word.setText(subject_words(""))
            self._wait.start()
        else:
            self._wait.stop()
            self.hide()

    def _appear(self) -> None:
        if self._over is None or not self._over.isVisible():
            return  # nothing to stand over: the window is locked
        self.show()
        self.place()

    def place(self) -> None:
        """Stand where it belongs, after sizes have changed."""
        parent = self.parentWidget()
        if self._over is None or parent is None:
            return
        self.adjustSize()
        corner = self._over.mapTo(parent, self._over.rect().bottomLeft())
        self.move(corner.x() + 12, corner.y() - self.height())
        self.raise_()

    def _stop(self) -> None:
        self.cancelled.emit(self._number)


def subject_words(subject: str) -> str:
    """What is being worked on, for people."""
    return {
        "ward figures": translate("progress", "Computing the ward's figures"),
        "handover": translate("progress", "Gathering the shift"),
        "handover sheet": translate("progress", "Writing the handover"),
        "statistics": translate("progress", "Counting"),
    }.get(subject, translate("progress", "Working"))
