"""What is late: a gas, a skin check. Clocks for audit (60 and 120 min to start) are no flags of the night."""

from __future__ import annotations

from collections.abc import Iterable

from core.judgement.due_care import skin_items
from core.judgement.due_gas import confirm_items, gas_items
from core.judgement.due_item import Item, closed_by_word
from core.judgement.due_repeat import repeat_items
from core.judgement.markers.observed import Observed
from core.judgement.markers.spells import Spell
from core.judgement.policy_sections import MarkerRule
from core.record.instant import Instant
from core.record.message import Message, Value


def comfort_since(seen: Observed) -> Instant | None:
    """Since when comfort is the ceiling; None while it is not. Gas dues rest then."""
    ceiling = seen.episode.text("ceiling_of_care")
    if not len(ceiling) or ceiling.v[-1] != "comfort":
        return None
    i = len(ceiling) - 1
    while i and ceiling.v[i - 1] == "comfort":
        i -= 1
    return int(ceiling.t[i])


def _overdue(items: Iterable[Item], as_of: Instant, rest: Instant | None) -> list[Spell]:
    """Spells in which something was overdue. Each names every item in it, the first overdue first: the evidence
    must bear out since when the flag stands."""
    found: list[Spell] = []
    for item in items:
        until = min((t for t in (item.done_at, item.awaiting_since, rest) if t is not None), default=None)
        if as_of <= item.due_until or (until is not None and until <= item.due_until):
            continue
        told: dict[str, Value] = {"what": item.what, "until": item.due_until, "because": item.because.key}
        found.append(Spell(item.due_until, until, (Message("evidence.overdue", told),)))
    return _joined(found)


def _joined(spells: Iterable[Spell]) -> list[Spell]:
    out: list[Spell] = []
    for spell in sorted(spells, key=lambda s: s.since):
        last = out[-1] if out else None
        if last is None or (last.until is not None and last.until < spell.since):
            out.append(spell)
            continue
        until = None if last.until is None or spell.until is None else max(last.until, spell.until)
        out[-1] = Spell(last.since, until, tuple(dict.fromkeys((*last.evidence, *spell.evidence))))
    return out


def gas_overdue(seen: Observed, _rule: MarkerRule) -> Iterable[Spell]:
    """A gas that is past its latest time, whose result is not awaited, and that nobody called done or not needed."""
    items = [*seen.once(gas_items), *seen.once(repeat_items), *confirm_items(seen)]
    items = [closed_by_word(item, seen.episode.transitions) for item in items]
    return _overdue(items, seen.as_of, comfort_since(seen))


def skin_check_overdue(seen: Observed, _rule: MarkerRule) -> Iterable[Spell]:
    """The skin under the mask was not looked at in time."""
    return _overdue(skin_items(seen), seen.as_of, None)
