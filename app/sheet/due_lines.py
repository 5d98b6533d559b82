"""What is due on the ward, in lines: gases first, the longest overdue on top, checks of the skin summed last."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from typing import Final

from app import formats
from app.finding_names import due_name
from app.ward.ordering import GAS
from app.words import Reader
from core.figures.shift import ShiftFigures
from core.judgement.shapes import DueFigure
from core.record.instant import MINUTE

SKIN: Final = "skin_check"


def ward_due(episodes: Iterable[ShiftFigures], reader: Reader) -> Iterator[str]:
    """A line for each due item but the checks of the skin."""
    items = [(s, d) for s in episodes for d in s.due if d.what != SKIN]
    for s, d in sorted(items, key=lambda x: (*_urgency(x[1]), x[0].now.label)):
        yield f"{s.now.label}: {due_short(d, reader, s.end)}"


def _urgency(d: DueFigure) -> tuple[bool, bool, int]:
    return d.what not in GAS, d.state != "overdue", d.due_until


def due_short(d: DueFigure, reader: Reader, as_of: int | None = None) -> str:
    """What is due, by when; where it is overdue and `as_of` is told, by how long."""
    name = due_name(d.what, reader)
    if d.state == "overdue" and as_of is not None:
        return f"{name} {formats.minutes((as_of - d.due_until) / MINUTE)} OVERDUE"
    state = {"overdue": " OVERDUE", "awaiting result": " (sent, awaiting result)"}.get(d.state, "")
    return f"{name} by {reader.time(d.due_until)}{state}"


def skin_line(episodes: Iterable[ShiftFigures], reader: Reader) -> str:
    """All checks of the skin in one line: those overdue, then those to come; "" where there are none."""
    found = [(s.now.label, d) for s in episodes for d in s.due if d.what == SKIN]
    found.sort(key=lambda x: (x[1].due_until, x[0]))
    late = [label for label, d in found if d.state == "overdue"]
    to_come = [f"{label} by {reader.time(d.due_until)}" for label, d in found if d.state != "overdue"]
    return " ".join(_part(head, names) for head, names in (("overdue", late), ("to come", to_come)) if names)


def _part(head: str, names: Sequence[str]) -> str:
    return f"Skin checks {head}: {', '.join(names)}."
