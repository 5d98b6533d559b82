"""One field for each fact of a patient, by the kind of its channel: text, number, answers, a list, a time."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtWidgets import QLineEdit, QWidget

from app.forms.answer_row import AnswerRow
from app.forms.cells import QuietChooser
from app.forms.number_field import NumberField
from app.look.formats import trimmed
from app.look.theme import Theme
from app.telling.phrases import channel_name
from core.record.channels import CHANNELS, Kind
from core.record.episode import Episode
from core.record.instant import Instant
from core.record.units import MMHG_PER_KPA

MOST_BUTTONS = 5
"""More answers than these stand in a list."""
WIDE = 210
TEXT = 290
OF_SENTENCES = ("plan", "jobs")
"""Texts that have a line of their own."""
LIST = 340
_IN_GAS_UNIT = ("usual_paco2",)
Word = Callable[[str, str], str]


class FactField:
    """A field with what stood there. `text` is what stands there now, in the words that a reading takes."""

    def __init__(self, key: str, gas_unit: str, theme: Theme, word: Word, starts_at: float | None = None) -> None:
        self.key, self._gas_unit = key, gas_unit
        self.channel = CHANNELS[key]
        self.unit = gas_unit if key in _IN_GAS_UNIT else self.channel.unit
        self.name = channel_name(key)
        self.shown = ""
        self.width = WIDE
        self.widget = self._made(theme, word, starts_at)

    def _made(self, theme: Theme, word: Word, starts_at: float | None) -> QWidget:
        kind, choices = self.channel.kind, self.channel.choices
        if kind is Kind.NUMBER:
            return self._number(theme, starts_at)
        if kind is Kind.TEXT and self.key != "label":
            self.width = 0 if self.key in OF_SENTENCES else TEXT
        if kind is not Kind.CHOICE:
            return QLineEdit()
        if len(choices) <= MOST_BUTTONS:
            self.width = 0
            return AnswerRow(self.name, [(c, word(self.key, c)) for c in choices], theme)
        self.width = LIST
        box = QuietChooser()
        box.addItem(word(self.key, ""), "")
        for choice in choices:
            box.addItem(word(self.key, choice), choice)
        return box

    def _number(self, theme: Theme, starts_at: float | None) -> NumberField:
        name = f"{self.name}, {self.unit}" if self.unit not in ("", "points", "y") else self.name
        self.name = name
        start = starts_at if starts_at is not None else 0.0
        if self.unit == "kPa":
            start /= MMHG_PER_KPA
        return NumberField(self.key, name, theme, starts_at=round(start, 1))

    def connect(self, edited: Callable[[], None]) -> None:
        """Tell of every change by a person."""
        if isinstance(self.widget, NumberField):
            self.widget.edited.connect(edited)
        elif isinstance(self.widget, AnswerRow):
            self.widget.chosen.connect(edited)
        elif isinstance(self.widget, QuietChooser):
            self.widget.activated.connect(edited)
        elif isinstance(self.widget, QLineEdit):
            self.widget.textEdited.connect(edited)

    # what stands there

    @property
    def text(self) -> str:
        """What stands there."""
        if isinstance(self.widget, NumberField):
            return self.widget.text
        if isinstance(self.widget, AnswerRow):
            return self.widget.key
        if isinstance(self.widget, QuietChooser):
            return str(self.widget.currentData() or "")
        assert isinstance(self.widget, QLineEdit)
        return self.widget.text().strip()

    @property
    def differs(self) -> bool:
        """Whether a person changed it; emptied is not changed, since a fact is withdrawn elsewhere, with a reason."""
        return bool(self.text) and self.text != self.shown

    @property
    def typed(self) -> str:
        """What a reading takes: a number with its unit."""
        return f"{self.text} {self.unit}" if self.key in _IN_GAS_UNIT else self.text

    def put(self, text: str) -> None:
        """Put something there without telling."""
        if isinstance(self.widget, NumberField):
            self.widget.set_text(text)
        elif isinstance(self.widget, AnswerRow):
            self.widget.choose(text)
        elif isinstance(self.widget, QuietChooser):
            self.widget.setCurrentIndex(max(self.widget.findData(text), 0))
        elif isinstance(self.widget, QLineEdit):
            self.widget.setText(text)
            self.widget.setCursorPosition(0)  # a text longer than its field is read from its beginning

    def take(self, record: Episode, at: Instant, clock: Callable[[Instant], str]) -> Instant | None:
        """Put there what was in force at a moment; since when, None where nothing was."""
        series = (
            record.number(self.key) if self.channel.kind in (Kind.NUMBER, Kind.INSTANT) else record.text(self.key)
        )
        i = int(series.t.searchsorted(at, side="right")) - 1
        self.shown = "" if i < 0 else self._shown(series.v[i], clock)
        self.put(self.shown)
        return None if i < 0 else int(series.t[i])

    def _shown(self, value: float | str, clock: Callable[[Instant], str]) -> str:
        if isinstance(value, str):
            return value
        if self.channel.kind is Kind.INSTANT:
            return clock(int(value))
        return trimmed(value / MMHG_PER_KPA if self.unit == "kPa" else value)
