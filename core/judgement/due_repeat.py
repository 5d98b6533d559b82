"""The repeat of a gas: soon after one that is grave, at 4-6 h after one that is merely poor (rules 7).

A grave gas is severe, worse than its baseline or than the start, has lost the gain, or is not better since the start;
and any gas while a flag stands that is to be escalated. Its repeat counts from that gas (or from the flag, where that
came later), so that no later change can put it off.
"""

from __future__ import annotations

from collections.abc import Iterable

from core.judgement import arms
from core.judgement.due_gas import closed, sent
from core.judgement.due_item import Item
from core.judgement.markers.not_better import comparisons, not_gained
from core.judgement.markers.observed import Observed
from core.judgement.policy_sections import DueRule
from core.judgement.shapes import FlagFigure, GasFigure
from core.record.instant import MINUTE, Instant
from core.record.message import Message

ESCALATE = "escalate"
_OPEN = frozenset({"raised", "seen"})


def repeat_items(seen: Observed) -> list[Item]:
    """The repeat that each gas on support asks for by itself. Flags ask too: see `repeats`."""
    return repeats(seen, ())


def repeats(seen: Observed, flags: Iterable[FlagFigure]) -> list[Item]:
    """The repeat that each gas on support asks for, by itself or because a flag stands; done ones among them."""
    rule = seen.policy.due.get("repeat_gas")
    if rule is None or not rule.on:
        return []
    urgent = [f for f in flags if f.tier == ESCALATE and not f.undone_by_correction]
    items = []
    for gas, later, after_grave, after_poor in seen.once(_asked_by_gases):
        asked = after_grave, _after_flag(seen, rule, gas, later, urgent), after_poor
        wanted = [i for i in asked if i is not None]
        if wanted:
            items.append(min(wanted, key=lambda i: i.due_until))
    return items


def _asked_by_gases(seen: Observed) -> list[tuple[GasFigure, GasFigure | None, Item | None, Item | None]]:
    """Each gas on support, the one after it, and the repeats that it asks for by itself: if grave, if poor."""
    rule = seen.policy.due["repeat_gas"]
    gases = [g for g in seen.on_support_gases if g.ph is not None]
    made = []
    for gas, later in zip(gases, [*gases[1:], None], strict=False):
        made.append((gas, later, _after_grave(seen, rule, gas, later), _after_poor(seen, rule, gas, later)))
    return made


def _item(
    seen: Observed, rule: DueRule, because: Message, span: tuple[Instant, float, float], gas: GasFigure,
    later: GasFigure | None,
) -> Item:  # fmt: skip
    """A repeat from and until so many minutes after a moment, closed by the next gas."""
    base, first, last = span
    awaited = sent(seen, rule, gas.at + MINUTE) if later is None else None
    return Item("repeat_gas", because, base + int(first * MINUTE), base + int(last * MINUTE), rule.soon_min, base,
                *closed(later), awaiting_since=awaited)  # fmt: skip


def _soon(rule: DueRule, base: Instant) -> tuple[Instant, float, float]:
    return base, rule.limits["grave_from_min"], rule.limits["grave_until_min"]


def _after_grave(seen: Observed, rule: DueRule, gas: GasFigure, later: GasFigure | None) -> Item | None:
    why = grave(seen, gas)
    if why is None:
        return None
    because = Message("due.repeat_gas_soon", {"gas_at": gas.at, "ph": gas.ph, "why": why})
    return _item(seen, rule, because, _soon(rule, gas.at), gas, later)


def _after_flag(
    seen: Observed, rule: DueRule, gas: GasFigure, later: GasFigure | None, urgent: list[FlagFigure]
) -> Item | None:
    """While a flag stands that is to be escalated: of several, the one that asks first."""
    asking = [f for f in urgent if _stood(f, later)]
    if not asking:
        return None
    first = min(asking, key=lambda f: f.since)
    because = Message("due.repeat_gas_flag", {"gas_at": gas.at, "marker": first.marker, "since": first.since})
    return _item(seen, rule, because, _soon(rule, max(gas.at, first.since)), gas, later)


def _stood(flag: FlagFigure, later: GasFigure | None) -> bool:
    """Whether a flag stands and nobody settled it; for a gas that has had its repeat: whether it stood until then."""
    if later is None:
        return flag.ended_at is None and flag.state in _OPEN
    return flag.since < later.at and (flag.ended_at is None or flag.ended_at >= later.at)


def _after_poor(seen: Observed, rule: DueRule, gas: GasFigure, later: GasFigure | None) -> Item | None:
    """At 4-6 h from its anchor; from the gas itself where it came later than that."""
    if not _poor(seen, gas):
        return None
    base = _anchor_of(seen, gas)
    if gas.at >= base + int(rule.from_min * MINUTE):
        base = gas.at
    because = Message("due.repeat_gas", {"gas_at": gas.at, "ph": gas.ph, "state": gas.state})
    return _item(seen, rule, because, (base, rule.from_min, rule.until_min), gas, later)


def grave(seen: Observed, gas: GasFigure) -> str | None:
    """Why a gas on support must be repeated soon: severe, doubtful, worse (since start), gain lost, not better."""
    if gas.state == "severe":
        return "severe"
    if gas.in_doubt and gas.ph is not None:
        return "doubtful"
    if any(a.judged.verdict == arms.WORSE for a in seen.attributed.get(gas.at, ())):
        return "worse"
    since = seen.since_start.get(gas.at)
    if since is not None and since.verdict == arms.WORSE:
        return "worse since start"
    if since is not None and since.gain_lost:
        return "gain lost"
    return "not better" if _not_better(seen, gas) else None


def _not_better(seen: Observed, gas: GasFigure) -> bool:
    """Still acidotic at 1-2 h of a start or change, and pH not up since the start (rules 1.9).

    A pH that rises step by step, each step inside noise, is better since the start: its repeat can wait.
    """
    if gas.state != "acidotic":
        return False
    rules = seen.policy.response
    low, high = rules.one_to_two_hours_from_min.value, rules.one_to_two_hours_to_min.value
    compared = comparisons(seen, gas)
    timely = any(low <= c.minutes <= high and not_gained(seen, c) for c in compared)
    since = seen.since_start.get(gas.at)
    return timely and (since is None or since.verdict != arms.BETTER)


def _anchor_of(seen: Observed, gas: GasFigure) -> Instant:
    anchors = [a.response.anchor_at for a in seen.attributed.get(gas.at, ()) if a.response.effects]
    return max((a for a in anchors if a <= gas.at), default=gas.at)


def _poor(seen: Observed, gas: GasFigure) -> bool:
    """Acidotic or severe, or judged worse or mixed."""
    verdicts = {a.judged.verdict for a in seen.attributed.get(gas.at, ())}
    return gas.state in ("severe", "acidotic") or bool(verdicts & {"worse", "mixed"})
