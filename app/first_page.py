"""The page before any store is open: what this is, the cautions, and three ways on."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QCheckBox, QFrame, QHBoxLayout, QLabel, QPushButton, QVBoxLayout, QWidget

from app.cautions import cautions, intended_use
from app.theme import Theme


class FirstPage(QWidget):
    """Leads to the sample shift, a new store, a store that exists, or taking in a file."""

    sample_wanted = Signal()
    new_wanted = Signal()
    open_wanted = Signal()
    file_wanted = Signal()
    recent_wanted = Signal(str)
    cautions_read = Signal()

    def __init__(self, theme: Theme, recent: Sequence[str], cautions_seen: bool) -> None:
        super().__init__()
        px = theme.px
        middle = QFrame()
        middle.setProperty("card", True)
        middle.setFixedWidth(px(760))
        column = QVBoxLayout(middle)
        column.setContentsMargins(px(32), px(28), px(32), px(28))
        column.setSpacing(px(12))
        title = QLabel("Luffmark")
        title.setProperty("role", "display")
        column.addWidget(title)
        column.addWidget(_text(intended_use()))
        column.addSpacing(px(4))
        for caution in cautions():
            column.addWidget(_bullet(caution, px(10)))
        self.read = QCheckBox(self.tr("I have read this"))
        self.read.setChecked(cautions_seen)
        self.read.setVisible(not cautions_seen)
        self.read.toggled.connect(self._read)
        column.addWidget(self.read, 0, Qt.AlignmentFlag.AlignLeft)
        column.addSpacing(px(8))
        row = QHBoxLayout()
        row.setSpacing(px(12))
        self.sample = QPushButton(self.tr("Open the sample shift"))
        self.sample.setProperty("role", "primary")
        self.new = QPushButton(self.tr("New store..."))
        self.open = QPushButton(self.tr("Open store..."))
        self.file = QPushButton(self.tr("Take in a file..."))
        for button, signal in (
            (self.sample, self.sample_wanted),
            (self.new, self.new_wanted),
            (self.open, self.open_wanted),
            (self.file, self.file_wanted),
        ):
            button.clicked.connect(signal)
            row.addWidget(button)
        row.addStretch(1)
        column.addLayout(row)
        note = QLabel(self.tr("The sample shift is invented. It opens in a throw-away store."))
        note.setProperty("role", "caption")
        column.addWidget(note)
        self.recent: list[QPushButton] = []
        for path in recent[:4]:
            button = QPushButton(f"{Path(path).name}    {Path(path).parent}")
            button.setProperty("role", "plain")
            button.setProperty("path", path)
            button.setAccessibleName(self.tr("Open {path}").format(path=path))
            button.clicked.connect(self._recent)
            self.recent.append(button)
            column.addWidget(button, 0, Qt.AlignmentFlag.AlignLeft)
        sides = QHBoxLayout()
        sides.addStretch(1)
        sides.addWidget(middle)
        sides.addStretch(1)
        outer = QVBoxLayout(self)
        outer.addStretch(1)
        outer.addLayout(sides)
        outer.addStretch(2)
        self._allow(cautions_seen)

    def _read(self, checked: bool) -> None:
        self._allow(checked)
        if checked:
            self.cautions_read.emit()

    def _allow(self, allowed: bool) -> None:
        for button in (self.sample, self.new, self.open, self.file, *self.recent):
            button.setEnabled(allowed)

    def _recent(self) -> None:
        button = self.sender()
        if button is not None:
            self.recent_wanted.emit(str(button.property("path")))


def _text(text: str) -> QLabel:
    label = QLabel(text)
    label.setWordWrap(True)
    label.setTextFormat(Qt.TextFormat.PlainText)
    return label


def _bullet(text: str, width: int) -> QWidget:
    row = QWidget()
    layout = QHBoxLayout(row)
    layout.setContentsMargins(0, 0, 0, 0)
    layout.setSpacing(width)
    dash = QLabel("-")
    layout.addWidget(dash, 0, Qt.AlignmentFlag.AlignTop)
    layout.addWidget(_text(text), 1)
    return row
