"""Circulation: low pressure, lactate, arrest, and a sudden fall after the airway pressure was raised."""

from __future__ import annotations

import re
from collections.abc import Iterable, Iterator

import numpy as np

from core.judgement.markers import evidence as say
from core.judgement.markers.gas_points import from_gases
from core.judgement.markers.observed import Observed
from core.judgement.markers.spells import Point, Spell, from_points, from_runs, held, united
from core.judgement.policy_sections import MarkerRule
from core.judgement.shapes import GasFigure
from core.judgement.sustained import spells as crossings
from core.judgement.vitals_near import Found
from core.record.episode import Series
from core.record.instant import HOUR, MINUTE, Instant
from core.record.message import Message
from core.record.samples import Times, Values

BETA_AGONIST = re.compile(r"salbutamol|albuterol|terbutaline|formoterol|adrenaline|epinephrine", re.IGNORECASE)
NEBULISER = re.compile(r"nebuli[sz]|\bnebs?\b", re.IGNORECASE)
NO_AGONIST = re.compile(r"ipratropium|saline|budesonide|acetylcysteine|tobramycin|colistin", re.IGNORECASE)
"""A nebuliser that names none of these may have held a beta-agonist: a doubt is said."""
RAISED = frozenset({"ipap", "epap", "cpap", "pressure_support"})


def sbp_below_90(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """Systolic pressure below 90 mmHg; ends once it has recovered by a margin."""
    sbp = seen.series("sbp")
    limit = rule.limits["sbp"]
    low = held(sbp.v < limit, sbp.v >= rule.limits["clear"])

    def told(_first: int, last: int) -> tuple[Message, ...]:
        lowest = last - int(np.argmax((sbp.v < limit)[last::-1]))
        return (say.value_is("sbp", float(sbp.v[lowest]), say.BELOW, limit, int(sbp.t[lowest])),)

    return from_runs(sbp.t, low, told)


def lactate_above_2(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """Lactate above 2 mmol/L on any sample."""
    return from_gases(seen, _lactate(seen, rule))


def lactate_above_4(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """Lactate above 4 mmol/L on any sample."""
    return from_gases(seen, _lactate(seen, rule))


def _lactate(seen: Observed, rule: MarkerRule) -> Iterator[Point]:
    limit = rule.limits["lactate"]
    for gas in seen.ctx.samples:
        if gas.lactate_mmol_L is not None:
            told = say.value_is("lactate", gas.lactate_mmol_L, say.ABOVE, limit, gas.at)
            yield Point(gas.at, gas.lactate_mmol_L > limit, (told, *_after_beta_agonist(seen, rule, gas)))


def lactate_rising(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """Lactate above 2 mmol/L and higher than on the sample before it."""
    points = []
    before: GasFigure | None = None
    for gas in seen.ctx.samples:
        now = gas.lactate_mmol_L
        if now is None:
            continue
        then = before.lactate_mmol_L if before is not None else None
        if before is not None and then is not None:
            rise = round(now - then - rule.limits["rise"], 6) >= 0
            told = (say.changed("lactate", then, before.at, now, gas.at), *_after_beta_agonist(seen, rule, gas))
            points.append(Point(gas.at, rise and now > rule.limits["lactate"], told))
        before = gas
    return from_gases(seen, points)


def _after_beta_agonist(seen: Observed, rule: MarkerRule, gas: GasFigure) -> tuple[Message, ...]:
    """A nebulised beta-agonist in the hours before raises lactate by itself: say so."""
    drugs = seen.episode.text("drug")
    since = gas.at - int(rule.limits["beta_agonist_h"] * HOUR)
    for at, text in zip(reversed(drugs.t.tolist()), reversed(drugs.v), strict=True):
        nebuliser = NEBULISER.search(text) and not NO_AGONIST.search(text)
        if since <= at <= gas.at and (BETA_AGONIST.search(text) or nebuliser):
            return (Message("evidence.after_beta_agonist", {"at": at, "text": text}),)
    return ()


def arrest(seen: Observed, _rule: MarkerRule) -> Iterable[Spell]:
    """An arrest was logged: support ends. It stands until support is logged again."""
    events = seen.episode.text("arrest")
    found = []
    for at, text in zip(events.t.tolist(), events.v, strict=True):
        resumed = [t for t in seen.settings.moments if t > at and not seen.settings.at(t).is_off]
        resumed += [int(t) for t in seen.episode.text("mask_on").t if t > at]
        told = (Message("evidence.event", {"event": "arrest", "at": at, "text": text}),
                Message("evidence.support_ends", {"at": at}))  # fmt: skip
        found.append(Spell(at, min(resumed, default=None), told))
    return united(found)


def raised_pressures(seen: Observed) -> list[Instant]:
    """When a pressure was raised on the patient."""
    found = set()
    for response in seen.ctx.responses:
        for step in response.steps:
            numbers = isinstance(step.before, (int, float)) and isinstance(step.after, (int, float))
            if step.channel in RAISED and numbers and float(step.after or 0) > float(step.before or 0):
                found.add(step.at)
    return sorted(found)


def spo2_fall_after_pressure(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """A sudden fall of SpO2, to below its range, within the hour after a pressure was raised."""
    spo2 = seen.machine("spo2")
    found: list[Spell] = []
    raised = np.array(seen.once(raised_pressures), np.int64)
    starts, firsts = np.searchsorted(spo2.t, raised - 15 * MINUTE), np.searchsorted(spo2.t, raised)
    lasts = np.searchsorted(spo2.t, raised + int(rule.limits["within_min"] * MINUTE), side="right")
    lowest, highest = _lowest(spo2.v, firsts, lasts), -_lowest(-spo2.v, starts, firsts)
    for k in np.flatnonzero(lowest + rule.limits["points"] <= highest).tolist():
        median = float(np.median(spo2.v[starts[k] : firsts[k]]))
        if lowest[k] + rule.limits["points"] <= median:
            before = slice(int(starts[k]), int(firsts[k]))
            level = Found(median, int(raised[k]), True, int(spo2.t[before][0]))
            found += _falls(seen, rule, spo2.cut(slice(int(firsts[k]), None)), level)
    return united(found)


def _lowest(v: Values, firsts: Times, ends: Times) -> Values:
    """The lowest value of each window [first, end), shapes (n,); infinite for an empty one."""
    out = np.full(firsts.shape, np.inf)
    held = firsts < ends
    if held.any():
        edges = np.column_stack((firsts[held], ends[held])).ravel()
        out[held] = np.minimum.reduceat(np.append(v, np.inf), edges)[::2]
    return out


def _falls(seen: Observed, rule: MarkerRule, after: Series, level: Found) -> list[Spell]:
    """Falls below both the range and the level before the pressure was raised, that begin within the hour."""
    median, at = level.value, level.at
    after = after.cut(~seen.off_mask(after.t))
    limit = np.minimum(median - rule.limits["points"] + 1e-9, seen.targets(after.t)[0])
    n, m = int(rule.limits["minutes"]), int(rule.limits["of_minutes"])
    found = []
    for s in crossings(after.t, after.v, limit, n, m, below=True):
        if s.start > at + int(rule.limits["within_min"] * MINUTE):
            break
        i, j = np.searchsorted(after.t, [s.start, s.end if s.end is not None else after.t[-1] + 1])
        lowest = int(i) + int(np.argmin(after.v[i:j]))
        told = say.moved("spo2", level, Found(float(after.v[lowest]), int(after.t[lowest]), False))
        found.append(Spell(s.start, s.end, (told, *_after_raise(at, s.start))))
    return found


def sbp_fall_after_pressure(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """A fall of systolic pressure within the hour after a pressure was raised."""
    sbp = seen.series("sbp")
    found = []
    for at in seen.once(raised_pressures):
        i = sbp.last_at_or_before(at)
        if i < 0 or at - int(sbp.t[i]) > rule.limits["before_h"] * HOUR:
            continue
        then = float(sbp.v[i])
        j = int(np.searchsorted(sbp.t, at + int(rule.limits["within_min"] * MINUTE), side="right"))
        if i + 1 >= j or then - sbp.v[i + 1 : j].min() < rule.limits["sbp_fall"]:
            continue
        points = []
        for t, v in zip(sbp.t[i + 1 :].tolist(), sbp.v[i + 1 :].tolist(), strict=True):
            fell = then - v >= rule.limits["sbp_fall"]
            late = t > at + int(rule.limits["within_min"] * MINUTE)
            told = (say.changed("sbp", then, int(sbp.t[i]), v, t), *_after_raise(at, t))
            points.append(Point(t, None if fell and late else fell, told))
        found += from_points(points)
    return united(found)


def _after_raise(raised_at: Instant, at: Instant) -> tuple[Message, ...]:
    return (say.timing("pressure raised", raised_at, (at - raised_at) // MINUTE),
            Message("evidence.think_of", {"what": "pneumothorax"}))  # fmt: skip
