"""What is due on the ward, in lines: gases first, the longest overdue on top, then other kinds, skin checks last."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Sequence
from typing import Final

from app.look import formats
from app.telling.finding_names import due_name
from app.telling.language import in_language as tr
from app.ward.ordering import GAS
from app.words import Reader
from core.figures.shift import ShiftFigures
from core.judgement.shapes import DueFigure
from core.record.instant import MINUTE

SKIN: Final = "skin_check"


def gases_due(episodes: Iterable[ShiftFigures], reader: Reader) -> Iterator[str]:
    """A line for each gas that is due, the longest overdue first."""
    items = [(s, d) for s in episodes for d in s.due if d.what in GAS]
    for s, d in sorted(items, key=lambda x: (*_urgency(x[1]), x[0].now.label)):
        yield f"{s.now.label}: {due_short(d, reader, s.end)}"


def others_due(episodes: Iterable[ShiftFigures], reader: Reader) -> Iterator[str]:
    """A line for each other kind of due item, the longest overdue first in it and of them; skin checks apart."""
    items = [(s, d) for s in episodes for d in s.due if d.what not in GAS and d.what != SKIN]
    kinds: dict[str, list[str]] = {}
    for s, d in sorted(items, key=lambda x: (*_urgency(x[1]), x[0].now.label)):
        kinds.setdefault(due_name(d.what, reader), []).append(f"{s.now.label} {_when(d, reader, s.end)}")
    for name, found in kinds.items():
        yield f"{name}: {'; '.join(found)}"


def _urgency(d: DueFigure) -> tuple[bool, int]:
    return d.state != "overdue", d.due_until


def due_short(d: DueFigure, reader: Reader, as_of: int | None = None) -> str:
    """What is due, by when; where it is overdue and `as_of` is told, by how long."""
    return f"{due_name(d.what, reader)} {_when(d, reader, as_of)}"


def _when(d: DueFigure, reader: Reader, as_of: int | None) -> str:
    if d.state == "overdue" and as_of is not None:
        return f"{tr('OVERDUE')} {formats.minutes((as_of - d.due_until) / MINUTE)}"
    state = {"overdue": f" {tr('OVERDUE')}", "awaiting result": tr(" (sent, awaiting result)")}.get(d.state, "")
    return tr("by {time}{state}").format(time=reader.time(d.due_until), state=state)


def skin_line(episodes: Iterable[ShiftFigures], reader: Reader) -> str:
    """All checks of the skin in one line: those overdue, then those to come; "" where there are none."""
    found = [(s.now.label, d) for s in episodes for d in s.due if d.what == SKIN]
    found.sort(key=lambda x: (x[1].due_until, x[0]))
    late = [label for label, d in found if d.state == "overdue"]
    to_come = [f"{label} by {reader.time(d.due_until)}" for label, d in found if d.state != "overdue"]
    return " ".join(_part(head, names) for head, names in ((tr("overdue"), late), (tr("to come"), to_come)) if names)


def _part(head: str, names: Sequence[str]) -> str:
    return tr("Skin checks {head}: {those}.").format(head=head, those=", ".join(names))
