"""Gases that are due: after a start or a change, and an arterial one after a venous (rules 7).

A gas due runs from 30 to 120 minutes after its anchor. A later anchor takes its place but keeps its latest time, so
that one change after another cannot put a gas off for ever. An early gas (1-29 min) and a venous one close nothing.
"""

from __future__ import annotations

from bisect import bisect_left
from collections.abc import Iterator
from dataclasses import dataclass

from core.judgement import arms
from core.judgement.due_item import Item
from core.judgement.markers.observed import Observed
from core.judgement.policy_sections import DueRule
from core.judgement.response_noise import direction, rr_noise
from core.judgement.response_shapes import ResponseFigure, Step
from core.judgement.shapes import GasFigure
from core.record.instant import MINUTE, Instant
from core.record.message import Message


@dataclass(frozen=True, slots=True)
class _Pending:
    """A gas that an anchor asks for. `counts_from`: gases before it are early."""

    because: Message
    counts_from: Instant
    until: Instant
    anchor_at: Instant


def gas_items(seen: Observed) -> list[Item]:
    """Every gas due after a start or change since the record began: done ones, and the one that is pending."""
    rule = seen.policy.due.get("gas")
    if rule is None or not rule.on:
        return []
    items: list[Item] = []
    pending: _Pending | None = None
    for i, response in enumerate(seen.ctx.responses):
        if not response.effects:
            continue
        wanted = _because(seen, rule, i, response)
        counts_from = response.anchor_at + int(rule.from_min * MINUTE)
        if wanted is not None or pending is not None:
            until = _until(seen, rule, response)
            if pending is not None:
                until = pending.until
            because = wanted if wanted is not None else pending.because if pending is not None else None
            assert because is not None
            pending = _Pending(because, counts_from, until, response.anchor_at)
        if pending is None:
            continue
        until_next = _next_first(seen, i)
        gas = _closing(seen, pending.counts_from, until_next)
        if gas is not None or until_next is None:
            items.append(_item(seen, rule, pending, gas))
            pending = None
    return items


def _next_first(seen: Observed, i: int) -> Instant | None:
    return next((r.first_at for r in seen.ctx.responses[i + 1 :] if r.effects), None)


def _closing(seen: Observed, counts_from: Instant, before: Instant | None) -> GasFigure | None:
    """The first arterial or capillary gas on support that counts: whole minutes, the next anchor's own included."""
    gases = seen.once(_counting)
    i = bisect_left(gases, counts_from // MINUTE, key=lambda g: g.at // MINUTE)
    if i == len(gases):
        return None
    return gases[i] if before is None or gases[i].at // MINUTE <= before // MINUTE else None


def _counting(seen: Observed) -> list[GasFigure]:
    return [g for g in seen.on_support_gases if g.ph is not None or g.paco2_mmHg is not None]


def _until(seen: Observed, rule: DueRule, response: ResponseFigure) -> Instant:
    """The latest time; in a record that began with support running, nothing is late before 30 min of it."""
    until = response.anchor_at + int(rule.until_min * MINUTE)
    first = seen.first_at
    return until if first is None else max(until, first + int(rule.from_min * MINUTE))


def _item(seen: Observed, rule: DueRule, pending: _Pending, gas: GasFigure | None) -> Item:
    return Item(
        "gas", pending.because, min(pending.counts_from, pending.until), pending.until, rule.soon_min,
        pending.anchor_at, *closed(gas),
        awaiting_since=sent(seen, rule, pending.counts_from) if gas is None else None,
    )  # fmt: skip


def closed(gas: GasFigure | None) -> tuple[Instant | None, str | None]:
    """When a gas closed an item, and the entry that did."""
    return (None, None) if gas is None else (gas.at, gas.ids[0] if gas.ids else None)


def sent(seen: Observed, rule: DueRule, since: Instant) -> Instant | None:
    """When a gas was sent whose result may still come: the newest, not before `since`, not too long ago."""
    moments = seen.episode.text("gas_sent").t
    if not moments.size:
        return None
    newest, wait = int(moments[-1]), int(rule.limits.get("awaiting_min", 60.0) * MINUTE)
    return newest if newest // MINUTE >= since // MINUTE and seen.as_of - newest <= wait else None


def _because(seen: Observed, rule: DueRule, i: int, response: ResponseFigure) -> Message | None:
    """Why this anchor needs a gas, or None where it does not."""
    values = {"anchor_at": response.anchor_at}
    if response.anchor == "start":
        reference = i == 0 and _running_before(seen)
        return Message("due.gas_reference" if reference else "due.gas_after_start", values)
    acidotic = _last_acidotic(seen, response.first_at)
    if response.anchor == "break_end":
        return Message("due.gas_after_break", values) if acidotic or _worse_after_break(seen, response) else None
    steps = len({s.at for s in response.steps})
    more = {**values, "steps": steps}
    if steps > 1:
        return Message("due.gas_after_chain", more)
    return Message("due.gas_after_change", more) if acidotic or _large(seen, rule, response) else None


def _running_before(seen: Observed) -> bool:
    first, start = seen.first_at, seen.support.start
    return not seen.support.start_recorded or (start is not None and first is not None and start < first)


def _last_acidotic(seen: Observed, at: Instant) -> bool:
    gas = seen.gas_with_ph_at(at)
    return gas is not None and gas.ph is not None and gas.ph < seen.policy.state.acidotic_below_ph.value


def _large(seen: Observed, rule: DueRule, response: ResponseFigure) -> bool:
    """Pressure support by 2 or more, any change of mode, oxygen up by 0.04 or 1 L/min at hypercapnic risk (or by
    nobody knows how much), FiO2 up by 0.10 in hypoxaemic failure."""
    channels = {s.channel for s in response.steps}
    if "mode" in channels:
        return True
    moved = {c: _moved(response.steps, c) for c in channels}
    support = moved.get("ipap", 0.0) - moved.get("epap", 0.0) + moved.get("pressure_support", 0.0)
    if round(abs(support) - rule.limits["pressure_support"], 6) >= 0:
        return True
    if _oxygen_raised(seen, rule, response, moved.get("fio2", 0.0)):
        return True
    if not channels & {"fio2", "o2_flow"} or not (seen.risk_since is not None or seen.ctx.hypercapnic_risk):
        return False
    if _oxygen_not_comparable(response.steps):
        return True
    return any(round(moved.get(c, 0.0) - rule.limits[c], 6) >= 0 for c in ("fio2", "o2_flow"))


def _oxygen_not_comparable(steps: tuple[Step, ...]) -> bool:
    """A known FiO2 gave way to a flow, or the other way: whether it rose cannot be told, so it may have."""
    return any(s.channel == "fio2" and (s.before is None) is not (s.after is None) for s in steps)


def _oxygen_raised(seen: Observed, rule: DueRule, response: ResponseFigure, by: float) -> bool:
    """FiO2 up by 0.10 or more while the last P/F before it was at or below 300: is it enough?"""
    if round(by - rule.limits["fio2_hypoxaemic"], 6) < 0:
        return False
    with_pf = (g for g in reversed(seen.gases) if g.at <= response.first_at and g.pf_mmHg is not None)
    last = next(with_pf, None)
    return last is not None and arms.hypoxaemia(last, seen.policy)


def _moved(steps: tuple[Step, ...], channel: str) -> float:
    """By how much the steps of an anchor moved a setting in all; what was not known on one side moved nothing."""
    moved = 0.0
    for step in steps:
        if step.channel == channel and isinstance(step.before, (int, float)) and isinstance(step.after, (int, float)):
            moved += step.after - step.before
    return moved


def _worse_after_break(seen: Observed, response: ResponseFigure) -> bool:
    """Rate up or SpO2 down beyond noise over the break."""
    ended = next((b for b in seen.support.breaks if b.end == response.first_at), None)
    if ended is None:
        return False
    vitals, noise = seen.vitals, seen.policy.noise
    near = ended.end or seen.as_of
    before_rate = vitals.rate(ended.start, 0, ended.start)
    after_rate = vitals.rate(near, ended.start, min(near + 30 * MINUTE, seen.as_of))
    if before_rate is not None and after_rate is not None:
        limit = rr_noise(noise, before_rate.device and after_rate.device)
        if direction(after_rate.value - before_rate.value, limit) == 1:
            return True
    before, after = vitals.spo2(ended.start, 0, ended.start), vitals.spo2(near, ended.start, near)
    return before is not None and after is not None and direction(after.value - before.value, noise.spo2.value) == -1


def confirm_items(seen: Observed) -> Iterator[Item]:
    """An arterial gas after a venous pH below 7.25."""
    rule = seen.policy.due.get("arterial_gas")
    if rule is None or not rule.on:
        return
    severe = seen.policy.state.severe_below_ph.value
    for gas in seen.ctx.gases:
        if gas.site != "venous" or gas.ph is None or gas.ph >= severe:
            continue
        later = next((g for g in seen.gases if g.at >= gas.at), None)
        because = Message("due.confirm_arterially", {"gas_at": gas.at, "ph": gas.ph})
        yield Item("arterial_gas", because, gas.at + int(rule.from_min * MINUTE),
                   gas.at + int(rule.until_min * MINUTE), rule.soon_min, None, *closed(later))  # fmt: skip
