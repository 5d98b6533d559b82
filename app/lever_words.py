"""What is said of a lever: whether it could act, and if not, whether for lack of need, of knowledge or of effect."""

from __future__ import annotations

from typing import Final

from app.words import Reader, sentence
from core.judgement.shapes import LeverFigure
from core.record.message import Message

DECIDES: Final = "lever.qualified_person_decides"
"""Stands with every lever; a page says it once."""
_NO_NEED: Final = frozenset({
    "lever.leak_within_limit", "lever.mask_time_enough", "lever.no_acidosis", "lever.nothing_logged",
    "lever.oxygen_enough", "lever.spo2_in_range",
})  # fmt: skip
_NOT_KNOWN: Final = frozenset({
    "lever.leak_definition_not_known", "lever.leak_not_known", "lever.mask_time_not_known", "lever.no_gas",
    "lever.own_rate_not_known", "lever.pressures_not_known", "lever.spo2_not_known",
})  # fmt: skip
_AT_LIMIT: Final = frozenset({
    "lever.fio2_at_maximum", "lever.review_epap", "lever.review_ipap", "lever.review_ti",
})  # fmt: skip
_NOT_FOR_THIS: Final = frozenset({"lever.ti_not_for_this", "lever.traps_air"})


def lever_standing(lever: LeverFigure, reader: Reader) -> str:
    """In a few words whether it could act. Nothing wrong seen in the log is no proof that nothing is wrong."""
    first = lever.why[0].key if lever.why else ""
    if lever.can_act:
        return reader.translate("can act")
    if first in _NO_NEED:
        return reader.translate("no need seen in what was logged")
    if first in _NOT_KNOWN:
        return reader.translate("not known")
    if any(m.key in _AT_LIMIT for m in lever.limits):
        return reader.translate("at its limit: review first")
    if first in _NOT_FOR_THIS:
        return reader.translate("not for this condition")
    return reader.translate("no effect")


def without_decides(messages: tuple[Message, ...]) -> tuple[Message, ...]:
    """The messages but for who decides, which the page says once."""
    return tuple(m for m in messages if m.key != DECIDES)


def lever_reasons(lever: LeverFigure, reader: Reader) -> tuple[str, ...]:
    """Why it could act or not, and what limits it, a sentence each."""
    return tuple(sentence(m, reader) for m in without_decides((*lever.why, *lever.limits)))
