"""Time on the mask that nobody has written about for long: said as presumed, with the moment of the last record."""

from __future__ import annotations

from app.look import formats
from app.telling.phrases import translate
from core.judgement.shapes import SupportFigure


def presumed_word(s: SupportFigure, zone: str, *, last_day: bool = False) -> str:
    """How many of the hours are presumed and since when nothing is logged; "" where the record is fresh.

    `last_day`: of the hours in the last 24 h, else of all since the start.
    """
    hours = s.hours_presumed_last_24h if last_day else s.hours_presumed
    if s.silent_since is None or not hours:
        return ""
    text = translate("presumed", "{hours} of it presumed: nothing logged since {time}")
    return text.format(hours=formats.hours(hours), time=formats.wall(s.silent_since, zone))


def silent_word(s: SupportFigure, zone: str) -> str:
    """That nothing has been logged for long, for a narrow row; "" where the record is fresh."""
    if s.silent_since is None:
        return ""
    return translate("presumed", "nothing logged since {time}").format(time=formats.wall(s.silent_since, zone))
