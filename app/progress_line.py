"""The line that shows long work and can stop it."""

from __future__ import annotations

from PySide6.QtCore import QTimer, Signal
from PySide6.QtWidgets import QHBoxLayout, QLabel, QProgressBar, QPushButton, QWidget

from app.runner import Progress


class ProgressLine(QWidget):
    """Shows long work after half a second, and a button that stops it."""

    cancelled = Signal(int)
    AFTER_MS = 500

    def __init__(self, parent: QWidget) -> None:
        super().__init__(parent)
        self._number = 0
        self.word = QLabel()
        self.bar = QProgressBar()
        self.bar.setTextVisible(False)
        self.stop = QPushButton(self.tr("Stop"))
        row = QHBoxLayout(self)
        row.setContentsMargins(16, 0, 16, 4)
        row.addWidget(self.word)
        row.addWidget(self.bar, 1)
        row.addWidget(self.stop)
        self.stop.clicked.connect(self._stop)
        self._wait = QTimer(self)
        self._wait.setSingleShot(True)
        self._wait.setInterval(self.AFTER_MS)
        self._wait.timeout.connect(self._appear)
        self.hide()

    def show_progress(self, progress: Progress) -> None:
        """Say how far the running work is."""
        self._number = progress.number
        self.word.setText(progress.subject or self.tr("Working"))
        self.bar.setRange(0, progress.total)
        self.bar.setValue(progress.done)

    def busy_changed(self, busy: bool) -> None:
        """Work began, or all of it is done."""
        if busy:
            self.bar.setRange(0, 0)
            self.word.setText(self.tr("Working"))
            self._wait.start()
        else:
            self._wait.stop()
            self.hide()

    def _appear(self) -> None:
        self.show()

    def _stop(self) -> None:
        self.cancelled.emit(self._number)
