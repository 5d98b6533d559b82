"""What was there before logging began: support that runs already, since when, and its settings."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QLineEdit

from app.forms.answer_row import AnswerRow
from app.forms.cells import Card, Cell, QuietChooser
from app.forms.number_field import NumberField
from app.look.theme import Theme
from app.telling.phrases import channel_name
from core.record.channels import BILEVEL_MODES, CHANNELS, MODES

_STARTS = {"ipap": 12.0, "epap": 5.0, "cpap": 8.0, "fio2": 28.0, "o2_flow": 2.0, "rate_set": 14.0}
RUNNING, BEGINS, NOT_YET = "running", "begins", "not yet"


class RunningCard(Card):
    """`edited` when anything changed. Settings are recorded as in force from now on: what they were before is not
    known, and is not made up."""

    edited = Signal()

    def __init__(self, theme: Theme) -> None:
        super().__init__(theme, self.tr("Support"))
        choices = [
            (NOT_YET, self.tr("not yet")), (BEGINS, self.tr("begins now")), (RUNNING, self.tr("runs already")),
        ]  # fmt: skip
        self.state = AnswerRow(self.tr("Support"), choices, theme)
        self.since = QLineEdit()
        self.since.setPlaceholderText(self.tr("14:20; empty: not known"))
        self.mode = QuietChooser()
        self.mode.addItem(self.tr("not recorded"), "")
        for mode in MODES[:-1]:
            self.mode.addItem(mode, mode)
        self.fields: dict[str, NumberField] = {}
        self.cells: dict[str, Cell] = {}
        self.add(Cell(self.tr("It"), self.state, theme, width=0, noted=False))
        self._add("since", self.tr("Since"), self.since)
        self._add("mode", channel_name("mode"), self.mode)
        for key, start in _STARTS.items():
            unit = "%" if key == "fio2" else CHANNELS[key].unit
            name = f"{channel_name(key)}, {unit}"
            limits = (21.0, 100.0) if key == "fio2" else None
            self.fields[key] = NumberField(key, name, theme, starts_at=start, limits=limits)
            self.fields[key].edited.connect(self.edited)
            self._add(key, name, self.fields[key])
        self.state.chosen.connect(self._changed)
        self.mode.activated.connect(self._changed)
        self.since.textEdited.connect(self.edited)
        self._show()

    def _add(self, key: str, name: str, field: NumberField | QLineEdit | QuietChooser) -> None:
        self.cells[key] = Cell(name, field, self._theme, width=210, noted=False)
        self.add(self.cells[key])

    def _changed(self) -> None:
        self._show()
        self.edited.emit()

    def _show(self) -> None:
        runs = self.state.key in (RUNNING, BEGINS)
        for key, cell in self.cells.items():
            cell.setVisible(self.state.key == RUNNING if key == "since" else runs and self._takes(key))

    def _takes(self, key: str) -> bool:
        mode = str(self.mode.currentData())
        if key in ("ipap", "epap", "rate_set"):
            return mode in BILEVEL_MODES
        return mode == "CPAP" if key == "cpap" else True

    def started(self) -> str:
        """The time of day at which support started, as typed; "" where it is not known or not said."""
        return self.since.text().strip() if self.state.key == RUNNING else ""

    def typed(self) -> dict[str, str]:
        """The settings in force, by channel."""
        if self.state.key not in (RUNNING, BEGINS):
            return {}
        found = {"mode": str(self.mode.currentData() or "")}
        found |= {key: field.text for key, field in self.fields.items() if self._takes(key)}
        return {key: text for key, text in found.items() if text}

    def lacks(self) -> str:
        """What is missing in what was said to run."""
        if self.state.key not in (RUNNING, BEGINS):
            return ""
        mode = self.mode.currentData()
        if not mode:
            return self.tr("Say which mode runs.")
        wanted = ("ipap", "epap") if mode in BILEVEL_MODES else ("cpap",) if mode == "CPAP" else ()
        missing = [channel_name(k) for k in wanted if not self.fields[k].text]
        if missing:
            return self.tr("{mode} needs {missing}.").format(mode=mode, missing=", ".join(missing))
        low, high = (_number(self.fields[k].text) for k in ("epap", "ipap"))
        if wanted == ("ipap", "epap") and low is not None and high is not None and high <= low:
            return self.tr("IPAP must lie above EPAP.")
        return ""


def _number(text: str) -> float | None:
    try:
        return float(text.replace(",", "."))
    except ValueError:
        return None
