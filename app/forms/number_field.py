"""A number that may be left empty: large buttons beside it, arrow keys step it, the wheel never changes it."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QValidator, QWheelEvent
from PySide6.QtWidgets import QAbstractSpinBox, QHBoxLayout, QPushButton, QWidget

from app.look.formats import MINUS, trimmed
from app.look.theme import Theme
from core.record.channels import CHANNELS

TARGET = 44
"""Least height and width in pixels of what is pressed, at 100 %: fingers in gloves."""
BIG = 5
"""Steps of Page up and Page down."""


class StepField(QAbstractSpinBox):
    """The spin box itself. Any text is let in, because the line that it becomes says in words what is wrong."""

    edited = Signal()

    def __init__(self, step: float, low: float, high: float, starts_at: float) -> None:
        super().__init__()
        self._step, self._low, self._high = step, low, high
        self.starts_at = starts_at
        """Where the first step goes from while nothing is typed."""
        self.setButtonSymbols(QAbstractSpinBox.ButtonSymbols.NoButtons)
        self.lineEdit().textEdited.connect(self._typed)

    def set_steps(self, step: float, limits: tuple[float, float] | None, starts_at: float) -> None:
        """Step otherwise: another unit was chosen."""
        self._step, self.starts_at = step, starts_at
        self._low, self._high = limits or (-1e9, 1e9)

    def _typed(self) -> None:
        self.edited.emit()

    def stepEnabled(self) -> QAbstractSpinBox.StepEnabledFlag:
        return QAbstractSpinBox.StepEnabledFlag.StepUpEnabled | QAbstractSpinBox.StepEnabledFlag.StepDownEnabled

    def validate(self, text: str, at: int) -> tuple[QValidator.State, str, int]:
        return QValidator.State.Acceptable, text, at

    def stepBy(self, steps: int) -> None:
        """So many steps on, inside the limits; what cannot be read is left as it is."""
        if self.isReadOnly():
            return
        text = self.lineEdit().text().strip().replace(",", ".").replace(MINUS, "-")
        try:
            now = float(text) if text else self.starts_at
        except ValueError:
            return
        wanted = now + self._step * (max(-BIG, min(steps, BIG)) if text else 0)
        self.lineEdit().setText(trimmed(min(max(wanted, self._low), self._high)).replace(MINUS, "-"))
        self.selectAll()
        self.edited.emit()

    def wheelEvent(self, event: QWheelEvent) -> None:
        event.ignore()  # a scrolled page must never change a pressure


class NumberField(QWidget):
    """`edited` when a person changed it; `text` is what stands there, as typed."""

    edited = Signal()

    def __init__(
        self, channel: str, name: str, theme: Theme, *, step: float = 1.0, starts_at: float = 0.0,
        limits: tuple[float, float] | None = None,
    ) -> None:  # fmt: skip
        super().__init__()
        low, high = limits or CHANNELS[channel].hard or (-1e9, 1e9)
        self.channel = channel
        self.box = StepField(step, low, high, starts_at)
        self.box.setAlignment(Qt.AlignmentFlag.AlignCenter)
        self.box.setFont(theme.font(theme.type.emphasis, bold=True))
        self.less, self.more = QPushButton("\N{MINUS SIGN}"), QPushButton("+")
        self.rename(name)
        side = theme.px(TARGET)
        for button in (self.less, self.more):
            button.setAutoDefault(False)
            button.setFocusPolicy(Qt.FocusPolicy.NoFocus)  # arrow keys do it: Tab goes from value to value
            button.setProperty("role", "step")
            button.setFixedSize(side, side)
        self.box.setProperty("role", "large")
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 0, 0)
        row.setSpacing(theme.px(4))
        for widget in (self.less, self.box, self.more):
            row.addWidget(widget, 1 if widget is self.box else 0)
        self.setFocusProxy(self.box)
        self.less.clicked.connect(self._less)
        self.more.clicked.connect(self._more)
        self.box.edited.connect(self.edited)

    def rename(self, name: str) -> None:
        """What a screen reader calls it; the unit belongs to the name."""
        self.setAccessibleName(name)
        self.box.setAccessibleName(name)
        self.less.setAccessibleName(self.tr("{name}, less").format(name=name))
        self.more.setAccessibleName(self.tr("{name}, more").format(name=name))

    @property
    def text(self) -> str:
        """What stands there, without a separator that waits for its decimals."""
        return self.box.lineEdit().text().strip().rstrip(".,")

    def set_text(self, text: str) -> None:
        """Put a text there without telling."""
        self.box.lineEdit().setText(text)

    def _less(self) -> None:
        self.box.stepBy(-1)

    def _more(self) -> None:
        self.box.stepBy(1)
