"""For whom the window's sentences are written: zone, unit, and times of this shift without their date."""

from __future__ import annotations

from PySide6.QtCore import QCoreApplication

from app.telling.language import speak
from app.words import Reader
from core.record.instant import HOUR, Instant

NEAR = 11 * HOUR
"""Less than half a day: a time without a date can only be the one meant."""


def reader_at(zone: str, gas_unit: str, moment: Instant) -> Reader:
    """A reader at a moment: times near it are told without their date."""
    return Reader(zone, gas_unit, near=(moment - NEAR, moment + NEAR))


def speak_through_qt() -> None:
    """Have every sentence pass through Qt's translators, in the context `sentence`."""
    speak(_in_qt_s_language)


def _in_qt_s_language(text: str) -> str:
    return QCoreApplication.translate("sentence", text)
