"""How sure a number is, in words; and the star that stands where a threshold is to be confirmed locally."""

from __future__ import annotations

from typing import Final, Protocol

from PySide6.QtCore import QCoreApplication

from core.judgement.concern import UNCONFIRMED

translate = QCoreApplication.translate
STAR: Final = "*"


class HasCertainty(Protocol):
    """What says how sure it is: a flag, a rule of the policy."""

    @property
    def sure(self) -> str: ...
    @property
    def detail_sure(self) -> str | None: ...


def starred(text: str, sure: str) -> str:
    """A short text that holds or stands for a threshold, with a star where that is to be confirmed locally.

    >>> starred("pH below 7.15", "from memory"), starred("pH below 7.25", "confirmed")
    ('pH below 7.15*', 'pH below 7.25')
    """
    return f"{text}{STAR}" if sure in UNCONFIRMED else text


def star_note() -> str:
    """What the star means; once on each page that bears any."""
    return translate("certainty", "* threshold from memory or common practice: to be confirmed locally")


def sure_words(sure: str) -> str:
    """How sure a number is, in words that cannot be misread."""
    return {
        "confirmed": translate("explain", "confirmed in the source's own text"),
        "secondary": translate("explain", "from a secondary source"),
        "from memory": translate("explain", "from memory: confirm locally before relying on it"),
        "computed here": translate("explain", "computed here from a confirmed figure"),
        "common practice": translate("explain", "common practice, no source found"),
    }.get(sure, sure)


def certainty_words(of: HasCertainty) -> str:
    """How sure the limit is and, where the source does not give them, how sure durations and details are."""
    text = sure_words(of.sure)
    if not of.detail_sure or of.detail_sure == of.sure:
        return text
    details = translate("certainty", "{limit}; for how long and the like: {details}")
    return details.format(limit=text, details=sure_words(of.detail_sure))
