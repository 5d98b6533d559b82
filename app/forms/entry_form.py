"""A form that logs: its fields become one line of the log strip, previewed and recorded by the strip's operations.

So a form and the strip cannot differ in what they read, ask or record.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import replace
from typing import NamedTuple

from PySide6.QtWidgets import QWidget

from app.forms.previewed_form import PreviewedForm
from app.look.theme import Theme
from app.operations import entry
from app.operations.entry import LineRequest
from app.session.model import SessionModel
from app.strip.preview_words import PreviewWords, preview_words
from core.record.channels import CHANNELS
from core.record.episode import Episode
from core.record.instant import Instant
from core.record.log_line import read_line
from core.record.message import RecordError
from core.record.settings import Settings, SettingsInForce


class Patient(NamedTuple):
    """For whom a form logs."""

    record: Episode
    label: str


_COMPOUND = re.compile(r"\b[a-z0-9]+(?:_[a-z0-9]+)+\b")


def spoken(line: str) -> str:
    """A line with the names of channels as they are typed by hand, a space where the program keeps a bar.

    >>> spoken("stopped end_reason weaned note to ward_7")
    'stopped end reason weaned note to ward_7'
    """
    return _COMPOUND.sub(lambda m: m[0].replace("_", " ") if m[0] in CHANNELS else m[0], line)


class EntryForm(PreviewedForm):
    """Build fields in `build`, turn them into words of a line in `items`."""

    def __init__(
        self,
        patient: Patient,
        model: SessionModel,
        gas_unit: str,
        theme: Theme,
        parent: QWidget | None = None,
    ) -> None:
        self.patient = patient
        super().__init__(patient.label, model, gas_unit, theme, parent)

    def items(self) -> str:
        """What the fields say, as words of a log line; "" while they say nothing."""
        raise NotImplementedError

    # the moment

    def moment(self) -> Instant:
        """The moment that is typed, read as the strip reads it; now where it cannot be read."""
        now = self.model.session.now()
        try:
            empty = SettingsInForce(self.patient.record).at(now)
            return read_line(f"{self.time.text()} checked no change", now=now, zone=self.model.session.zone,
                             in_force=empty).at  # fmt: skip
        except RecordError:
            return now

    def in_force(self) -> Settings:
        """The settings in force just at that moment."""
        return SettingsInForce(self.patient.record).at(self.moment())

    # the line

    def request(self) -> LineRequest | None:
        items = self.items()
        line = f"{self.time.text().strip()} {items}".strip() if items else ""
        self.as_line.setText(self.tr("In the log strip: {line}").format(line=spoken(line)) if line else "")
        return LineRequest(self.patient.record.key, line, self.model.session.zone) if line else None

    def ask_preview(self, request: LineRequest) -> None:
        self.model.ask(entry.preview, request, done=self.previewed, failed=self.refused, subject="form preview")

    def ask_record(self, request: LineRequest, *, confirmed: bool) -> None:
        request = replace(request, confirmed=confirmed)
        self.model.ask(entry.log_line, request, done=self.was_recorded, failed=self.refused)

    def words(self) -> PreviewWords:
        """The preview in words."""
        return preview_words(self.preview, self.patient.record, self.model.session.now(), self.reader())

    def questions(self) -> tuple[str, ...]:
        return self.words().questions

    def told(self) -> tuple[str, str, str]:
        words = self.words()
        return words.head, ", ".join(words.values), " ".join(words.effects)


def worded(parts: Mapping[str, str]) -> str:
    """Channels with their values as words of a line; those without a value are left out.

    >>> worded({"rr": "28", "hr": "", "spo2": "91"})
    'rr 28 spo2 91'
    """
    return " ".join(f"{key} {text}" for key, text in parts.items() if text)
