"""The page before any store is open: what this is, the cautions, and three ways on."""

from __future__ import annotations

from collections.abc import Sequence
from pathlib import Path

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QCheckBox,
    QFrame,
    QHBoxLayout,
    QLabel,
    QPushButton,
    QScrollArea,
    QVBoxLayout,
    QWidget,
)

from app.keeping.steps import Step, word_of
from app.look.flow_row import FlowRow
from app.look.theme import Theme
from app.telling.cautions import cautions, intended_use

MOST_WIDTH = 960
MOST_RECENT = 4


class FirstPage(QWidget):
    """Leads to the sample shift, a new store, a store that exists, or taking in a file."""

    sample_wanted = Signal()
    new_wanted = Signal()
    open_wanted = Signal()
    file_wanted = Signal()
    recent_wanted = Signal(str)
    step_wanted = Signal(str)
    """A step out of what is said, by its key."""
    cautions_read = Signal()

    def __init__(self, theme: Theme, recent: Sequence[str], cautions_seen: bool) -> None:
        super().__init__()
        self._theme = theme
        px = theme.px
        middle = QFrame()
        middle.setProperty("card", True)
        middle.setFixedWidth(min(px(760), MOST_WIDTH))
        self._column = QVBoxLayout(middle)
        self._column.setContentsMargins(px(32), px(28), px(32), px(28))
        self._column.setSpacing(px(12))
        self.read = QCheckBox(self.tr("I have read this"))
        self.sample = QPushButton(self.tr("Open the sample shift"))
        self.new = QPushButton(self.tr("New store..."))
        self.open = QPushButton(self.tr("Open store..."))
        self.file = QPushButton(self.tr("Take in a file..."))
        self.recent: list[QPushButton] = []
        self.said = _text("")
        self.said.setProperty("role", "strong")
        self.steps: dict[str, QPushButton] = {}
        self._trouble = QFrame()
        self._trouble.setProperty("banner", True)
        self._trouble.hide()
        self._add_title()
        self._add_trouble()
        self._add_cautions(cautions_seen)
        self._add_recent(recent)
        self._add_ways()
        self._centre(middle)
        self._allow(cautions_seen)

    def say(self, text: str, steps: Sequence[Step] = ()) -> None:
        """Say why nothing could be opened, with the steps that lead on as buttons."""
        self.said.setText(text)
        for button in self.steps.values():
            button.deleteLater()
        self.steps = {}
        for step in steps:
            button = self.steps[step.value] = QPushButton(word_of(step))
            button.setProperty("step", step.value)
            button.setProperty("role", "small" if self.steps.keys() != {step.value} else "primary")
            button.clicked.connect(self._step)
            self._ways_out.addWidget(button)
        self._inside.setVisible(bool(steps))
        self._trouble.setVisible(bool(text))
        if self.steps:
            next(iter(self.steps.values())).setFocus()

    def _add_trouble(self) -> None:
        """What went wrong stands over everything else, and what can be done with it."""
        px = self._theme.px
        column = QVBoxLayout(self._trouble)
        column.setContentsMargins(px(14), px(10), px(14), px(12))
        column.setSpacing(px(10))
        column.addWidget(self.said)
        self._inside = QWidget()
        self._ways_out = FlowRow(self._inside, px(8))
        self._ways_out.setContentsMargins(0, 0, 0, 0)
        column.addWidget(self._inside)
        self._column.addWidget(self._trouble)

    def _step(self) -> None:
        button = self.sender()
        if button is not None:
            self.step_wanted.emit(str(button.property("step")))

    def _add_title(self) -> None:
        title = QLabel("Luffmark")
        title.setProperty("role", "display")
        self._column.addWidget(title)

    def _add_cautions(self, seen: bool) -> None:
        px = self._theme.px
        self._column.addWidget(_text(intended_use()))
        self._column.addSpacing(px(4))
        for caution in cautions():
            self._column.addWidget(_bullet(caution, px(10)))
        self.read.setChecked(seen)
        self.read.setVisible(not seen)
        self.read.toggled.connect(self._read)
        self._column.addWidget(self.read, 0, Qt.AlignmentFlag.AlignLeft)
        self._column.addSpacing(px(8))

    def _add_ways(self) -> None:
        ways = QWidget()
        row = FlowRow(ways, self._theme.px(12))
        row.setContentsMargins(0, 0, 0, 0)
        for button, signal in (
            (self.sample, self.sample_wanted),
            (self.new, self.new_wanted),
            (self.open, self.open_wanted),
            (self.file, self.file_wanted),
        ):
            button.clicked.connect(signal)
            row.addWidget(button)
        self._column.addWidget(ways)
        note = QLabel(self.tr("The sample shift is invented. It opens in a throw-away store."))
        note.setProperty("role", "caption")
        self._column.addWidget(note)

    def _add_recent(self, recent: Sequence[str]) -> None:
        """The ward's own store comes first, once there is one."""
        for n, path in enumerate(recent[:MOST_RECENT]):
            button = QPushButton(f"{Path(path).name}    {Path(path).parent}")
            button.setProperty("role", "plain" if n else "primary")
            button.setProperty("path", path)
            button.setAccessibleName(self.tr("Open {path}").format(path=path))
            button.clicked.connect(self._recent)
            self.recent.append(button)
            self._column.addWidget(button, 0, Qt.AlignmentFlag.AlignLeft)
        if not recent:
            self.sample.setProperty("role", "primary")

    def _centre(self, middle: QFrame) -> None:
        """In the middle of the page; with large text the page scrolls."""
        inside = QWidget()
        sides = QHBoxLayout(inside)
        sides.addStretch(1)
        sides.addWidget(middle, 0, Qt.AlignmentFlag.AlignVCenter)
        sides.addStretch(1)
        roll = QScrollArea()
        roll.setWidgetResizable(True)
        roll.setFrameShape(QFrame.Shape.NoFrame)
        roll.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        roll.setWidget(inside)
        outer = QVBoxLayout(self)
        outer.setContentsMargins(0, 0, 0, 0)
        outer.addWidget(roll)

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
