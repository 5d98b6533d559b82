"""Everything that is due for an episode: gases, looks at the patient, care of the mask, facts to be recorded."""

from __future__ import annotations

from collections.abc import Iterable, Iterator

from core.judgement.context import Context
from core.judgement.due_care import reassessment_item, skin_items
from core.judgement.due_gas import confirm_items, gas_items
from core.judgement.due_item import Item, closed_by_word
from core.judgement.due_repeat import repeats
from core.judgement.due_tasks import (
    break_end_items,
    ceiling_item,
    mask_item,
    oxygen_item,
    probable_break_items,
    recheck_item,
    score_item,
)
from core.judgement.markers.observed import Observed
from core.judgement.markers.timing import comfort_since
from core.judgement.shapes import DueFigure, FlagFigure
from core.record.instant import HOUR

GASES = frozenset({"gas", "repeat_gas", "arterial_gas"})
SERVED_BY_ONE = frozenset({"gas", "repeat_gas"})
KEYS = (
    "gas", "repeat_gas", "arterial_gas", "reassessment", "skin_check", "mask_check", "oxygen_review",
    "complete_score", "ceiling", "break_end", "probable_break", "spo2_recheck",
)  # fmt: skip
ORDER = {"overdue": 0, "soon": 1, "open": 2, "awaiting result": 3, "done": 4}
DONE_SHOWN_H = 12
"""Done items of the last shift are shown, older ones are not."""
AFTER_END = frozenset({"arterial_gas"})


def due_keys() -> tuple[str, ...]:
    """The key of every due item; its name stands in `due_item.<key>`."""
    return KEYS


def due_items(ctx: Context, flags: Iterable[FlagFigure], seen: Observed | None = None) -> tuple[DueFigure, ...]:
    """What is due as of the moment, the most urgent first; what was done in the last 12 h comes last."""
    seen = seen if seen is not None else Observed(ctx)
    items = _one_gas_serves([closed_by_word(i, seen.episode.transitions) for i in _gathered(seen, tuple(flags))], ctx)
    shown = (i for i in items if _shown(seen, i))
    figures = [i.figure(ctx.as_of) for i in shown]
    return tuple(sorted(figures, key=lambda d: (ORDER[d.state], d.due_until, d.what)))


def _gathered(seen: Observed, flags: tuple[FlagFigure, ...]) -> Iterator[Item]:
    yield from seen.once(gas_items)
    yield from repeats(seen, flags)
    yield from confirm_items(seen)
    yield from skin_items(seen)
    yield from break_end_items(seen)
    yield from probable_break_items(seen)
    single = (reassessment_item(seen, flags), mask_item(seen, flags), oxygen_item(seen, flags), score_item(seen),
              ceiling_item(seen), recheck_item(seen))  # fmt: skip
    yield from (item for item in single if item is not None)


def _one_gas_serves(items: list[Item], ctx: Context) -> list[Item]:
    """One gas serves a change and a repeat: only the earlier is asked for, so that neither can put the other off.

    The later one is asked for beside it once it is overdue while only the earlier one's result is awaited.
    """
    pending = [i for i in items if i.what in SERVED_BY_ONE and i.done_at is None]
    if len(pending) < 2:
        return items
    first = min(pending, key=lambda i: i.due_until)
    awaited = first.state(ctx.as_of) == "awaiting result"
    hidden = [i for i in pending if i is not first and not (awaited and i.state(ctx.as_of) == "overdue")]
    return [i for i in items if not any(i is h for h in hidden)]


def _shown(seen: Observed, item: Item) -> bool:
    if item.done_at is not None:
        return seen.as_of - item.done_at <= DONE_SHOWN_H * HOUR
    end = seen.support.end
    if end is not None and end <= seen.as_of and item.what not in AFTER_END:
        return False
    return item.what not in GASES or comfort_since(seen) is None
