"""What a file would record, row by row in words: entries by their time, samples by their span."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from typing import TYPE_CHECKING

from app.look import formats
from app.telling.phrases import channel_name
from app.words import Reader
from core.record.entries import Action, NewEntry

if TYPE_CHECKING:
    from storage.intake.findings import Intake

Row = tuple[str, str, str, str]


def new_rows(intake: Intake, reader: Reader, words: dict[str, str]) -> Iterator[Row]:
    """Rows of (line, what, value, where and when), samples first: each of their rows tells of many.

    `words`: new, corrects, withdraws, samples, empty, over.
    """
    told = replace(reader, near=None)  # a file is of any day
    for (episode, channel), span in intake.spans.items():
        when = f"{told.time(span.first)} - {told.time(span.last)}"
        what = f"{words['new']}, {channel_name(channel)}"
        empty = f" ({span.empty:,} {words['empty']})" if span.empty else ""
        over = f"; {words['over'].format(count=f'{span.over:,}')}" if span.over else ""
        yield "", what, f"{span.count:,} {words['samples']}{empty}", f"{episode}, {when}{over}"
    for draft in intake.entries:
        e = draft.entry
        what = {Action.CORRECT: words["corrects"], Action.WITHDRAW: words["withdraws"]}.get(e.action, words["new"])
        yield "", f"{what}, {channel_name(e.channel)}", _value(e), f"{e.episode}, {told.time(e.at)}"


def _value(e: NewEntry) -> str:
    if e.words is not None:
        return e.words
    if e.number is not None and not e.raw:
        return formats.trimmed(e.number)
    return formats.as_typed(e.raw if e.number is None else e.raw.replace(",", "."), e.raw_unit)
