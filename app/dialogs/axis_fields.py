"""The two ends of a panel's axis as fields: a number in the reader's unit, or nothing where the end follows."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QHBoxLayout, QLabel, QLineEdit, QWidget

from app.episode.traces import Shown
from core.record.message import refuse


class AxisFields(QWidget):
    """`edited` when a person has finished with an end. Values are handed over in canonical units."""

    edited = Signal()

    def __init__(self, name: str) -> None:
        super().__init__()
        self._name, self._shown = name, Shown("", 0, 1.0)
        self.label = QLabel(name)
        self.low, self.high = QLineEdit(), QLineEdit()
        row = QHBoxLayout(self)
        row.setContentsMargins(0, 0, 0, 0)
        row.addWidget(self.low, 1)
        row.addWidget(QLabel(self.tr("to")))
        row.addWidget(self.high, 1)
        for field in (self.low, self.high):
            field.setPlaceholderText(self.tr("follows"))
            field.editingFinished.connect(self.edited)

    def show_ends(self, low: float | None, high: float | None, shown: Shown | None) -> None:
        """The ends of an axis in canonical units; `shown` says in what unit they are read, None: no such axis."""
        self.setEnabled(shown is not None)
        self._shown = shown or Shown("", 0, 1.0)
        unit = self._shown.unit
        self.label.setText(self.tr("{axis}, {unit}").format(axis=self._name, unit=unit) if unit else self._name)
        for field, value, word in (
            (self.low, low, self.tr("{axis} from")),
            (self.high, high, self.tr("{axis} to")),
        ):
            field.setAccessibleName(word.format(axis=self.label.text()))
            field.setText("" if value is None else f"{round(value * self._shown.factor, 6):g}")

    def ends(self, title: str) -> tuple[float | None, float | None]:
        """Both ends in canonical units.

        Raises:
            RecordError: `panel.axis_unreadable`.
        """
        return self._number(self.low, title), self._number(self.high, title)

    def _number(self, field: QLineEdit, title: str) -> float | None:
        text = field.text().strip()
        if not text:
            return None
        try:
            return float(text.replace(",", ".")) / self._shown.factor
        except ValueError:
            accepted = self.tr("a number, or nothing to follow the values")
            raise refuse("panel.axis_unreadable", title=title, value=text, accepted=accepted) from None
