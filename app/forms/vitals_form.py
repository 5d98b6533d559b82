"""Vital signs by form. Every field starts empty; the last value stands beside it with its age, never in it."""

from __future__ import annotations

from app.forms.answer_row import AnswerRow
from app.forms.cells import Cell
from app.forms.entry_form import EntryForm, worded
from app.forms.number_field import NumberField
from app.look.formats import choice_word, quantity, since
from app.telling.phrases import channel_name
from core.record.channels import CHANNELS
from core.record.instant import DAY
from core.record.units import written

_NUMBERS = {"rr": 20.0, "spo2": 92.0, "hr": 80.0, "sbp": 120.0, "dbp": 70.0, "temp": 37.0, "gcs": 15.0,
            "dyspnoea": 5.0}  # fmt: skip
"""Fields, and where a first press of a button goes from while nothing was ever counted."""
_CHOICES = ("acvpu", "accessory_muscle_use", "comfort")


class VitalsForm(EntryForm):
    """What was counted, measured and looked at."""

    def build(self) -> None:
        self.set_name(self.tr("Vital signs"))
        self.fields: dict[str, NumberField] = {}
        self.rows: dict[str, AnswerRow] = {}
        self.cells: dict[str, Cell] = {}
        numbers, looks = self.card(self.tr("Counted and measured")), self.card(self.tr("Looked at"))
        for key, start in _NUMBERS.items():
            c = CHANNELS[key]
            unit = self.tr("0 to 10") if key == "dyspnoea" else written(c.unit)
            name = f"{channel_name(key)}, {unit}" if unit else channel_name(key)
            last = self.patient.record.latest(key)
            field = NumberField(key, name, self.theme, step=0.1 if key == "temp" else 1.0,
                                starts_at=start if last is None else last)  # fmt: skip
            field.edited.connect(self.edited)
            self.fields[key], self.cells[key] = field, Cell(name, field, self.theme, width=204)
            numbers.add(self.cells[key])
        for key in _CHOICES:
            words = [(choice, self.choice_word(choice)) for choice in CHANNELS[key].choices]
            row = AnswerRow(channel_name(key), words, self.theme)
            row.chosen.connect(self.edited)
            self.rows[key], self.cells[key] = row, Cell(channel_name(key), row, self.theme, width=0)
            looks.add_line(self.cells[key])
        self.fit(980, 776)
        self.first = self.fields["rr"].box

    def choice_word(self, choice: str) -> str:
        """A choice in the reader's language."""
        return self.tr(choice_word(choice))

    def items(self) -> str:
        numbers = {key: field.text for key, field in self.fields.items()}
        return worded(numbers | {key: row.key for key, row in self.rows.items()})

    def show_extra(self) -> None:
        """The last value of each with its age; older than a day it says nothing."""
        at, record = self.moment(), self.patient.record
        for key, cell in self.cells.items():
            series = record.number(key) if key in self.fields else record.text(key)
            i = int(series.t.searchsorted(at, side="right")) - 1
            told = ""
            if i >= 0 and at - int(series.t[i]) <= DAY:
                told = f"{quantity(key, series.v[i])}, {since(int(series.t[i]), at)}"
            cell.tell(told)
