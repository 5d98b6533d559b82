"""Not better: a pH that has not risen beyond noise at one to two hours, or after hours of optimised support.

"Not better" is a gain of at most the noise of pH with pH still below 7.35 (rules of judgement 1.9). It is judged
against the baseline of the anchor a gas belongs to, and against that of the start.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from functools import partial
from math import isnan

from core.judgement.markers import evidence as say
from core.judgement.markers.gas_points import compared_doubts, from_gases, is_early
from core.judgement.markers.observed import Observed
from core.judgement.markers.population import inside
from core.judgement.markers.spells import Point, Spell
from core.judgement.policy_sections import MarkerRule
from core.judgement.response_noise import direction, paco2_noise, ph_noise, rr_noise
from core.judgement.shapes import GasFigure
from core.record.channels import BILEVEL_MODES
from core.record.instant import HOUR, MINUTE, Instant
from core.record.message import Message, Value

LOST = {"ph": "gain_lost", "pf": "oxygen_gain_lost"}
"""Where a gas says which gain it lost."""
SEVERE, CONCERN, SETTLING = "severe", "concern", "settling"


@dataclass(frozen=True, slots=True)
class Comparison:
    """A gas against one baseline: which anchor, how many minutes after it."""

    gas: GasFigure
    base: GasFigure
    anchor: str
    anchor_at: Instant
    minutes: float

    @property
    def gain(self) -> float:
        """How much pH rose."""
        assert self.gas.ph is not None
        assert self.base.ph is not None
        return self.gas.ph - self.base.ph


def comparisons(seen: Observed, gas: GasFigure) -> list[Comparison]:
    """What a gas is compared with: the baseline of its own anchor, and that of the start. Both need a pH."""
    if gas.ph is None or not seen.drawn_on_support(gas):
        return []
    by_at = seen.by_moment
    out: list[Comparison] = []
    for a in seen.attributed.get(gas.at, ()):
        base = by_at.get(a.response.baseline_at) if a.response.baseline_at is not None else None
        if base is not None and base.ph is not None and base.at < gas.at and "co2" in a.response.effects:
            out.append(Comparison(gas, base, a.response.anchor, a.response.anchor_at, a.judged.minutes))
    base = seen.start_baseline
    start = seen.ctx.responses[0] if seen.ctx.responses else None
    if base is not None and base.ph is not None and start is not None and base.at < gas.at:
        minutes = gas.at // MINUTE - start.anchor_at // MINUTE
        if not any(c.anchor_at == start.anchor_at for c in out) and minutes > 0:
            out.append(Comparison(gas, base, start.anchor, start.anchor_at, minutes))
    return out


def not_gained(seen: Observed, c: Comparison) -> bool:
    """pH rose by no more than its noise."""
    return direction(c.gain, ph_noise(seen.policy.noise)) < 1


@dataclass(frozen=True, slots=True)
class Judgement:
    """A gas on support with a pH: the comparison by which it is not better, of which kind, or that it is over."""

    gas: GasFigure
    poor: Comparison | None
    kind: str
    over: bool


def _judged(seen: Observed) -> list[Judgement]:
    """What each gas on support with a pH says.

    A gas outside the hours that judge does not begin anything; it ends what began when pH reached 7.35, has risen
    beyond noise since the baseline of that beginning, or is better than at the start without having fallen back
    since (`_better_since_start`). An early gas ends it by a pH of 7.35 alone: the rest is not steady yet.
    """
    rules = seen.policy.response
    low, high = rules.one_to_two_hours_from_min.value, rules.one_to_two_hours_to_min.value
    out: list[Judgement] = []
    standing: Comparison | None = None
    for gas in seen.on_support_gases:
        if gas.ph is None:
            continue
        acidotic = gas.ph < seen.policy.state.acidotic_below_ph.value
        timely = [c for c in comparisons(seen, gas) if low <= c.minutes <= high]
        poor = next((c for c in timely if not_gained(seen, c)), None) if acidotic else None
        over = not acidotic
        if poor is None and standing is not None and standing.base.ph is not None and not is_early(seen, gas):
            over = over or direction(gas.ph - standing.base.ph, ph_noise(seen.policy.noise)) == 1
            over = over or any(not not_gained(seen, c) for c in timely) or _better_since_start(seen, gas, standing)
        standing = poor if poor is not None else None if over else standing
        out.append(Judgement(gas, poor, _kind(seen, poor) if poor is not None else "", over))
    return out


def _better_since_start(seen: Observed, gas: GasFigure, standing: Comparison) -> bool:
    """A later gas that answers for the whole course: no longer severe, pH above that of the start beyond noise, and
    at least that of the gas and the baseline by which a change had done nothing. So a drift down ends nothing, and
    a patient who got better in steps, each inside the noise, is not called "not better" for hours."""
    base = seen.start_baseline
    if base is None or base.ph is None or gas.ph is None or gas.ph < seen.policy.state.severe_below_ph.value:
        return False
    held = gas.ph >= max(standing.base.ph or 0.0, standing.gas.ph or 0.0)
    return held and direction(gas.ph - base.ph, ph_noise(seen.policy.noise)) == 1


def _kind(seen: Observed, c: Comparison) -> str:
    assert c.gas.ph is not None
    if c.gas.ph < seen.policy.state.severe_below_ph.value:
        return SEVERE
    return SETTLING if _settling(seen, c)[0] else CONCERN


def _settling(seen: Observed, c: Comparison) -> tuple[bool, tuple[Message, ...]]:
    """Rate down beyond noise and at least 12, GCS unchanged and PaCO2 lower: all three known. With what was seen."""
    said: list[Message] = []
    before, after = seen.vitals.rate(c.base.at, 0, max(c.base.at, c.anchor_at)), seen.rate_near(c.gas.at)
    slower = False
    if before is None or after is None or after.at <= before.at:
        newer = after is not None and (before is None or after.at > before.at)
        then = None if before is None else (before.value, before.at)
        said.append(say.one_sided("rr", then, (after.value, after.at) if after is not None and newer else None))
    else:
        noise = rr_noise(seen.policy.noise, before.device and after.device)
        said.append(say.moved("rr", before, after, noise))
        least = seen.policy.markers["ph_not_better_settling"].limits["rr_least"]
        slower = direction(after.value - before.value, noise) == -1 and after.value >= least
    co2_lower = False
    if c.base.paco2_mmHg is not None and c.gas.paco2_mmHg is not None:
        said.append(say.changed("paco2", c.base.paco2_mmHg, c.base.at, c.gas.paco2_mmHg, c.gas.at))
        co2_lower = c.gas.paco2_mmHg < c.base.paco2_mmHg
    gcs_then, gcs_now = _gcs(seen, c.base.at), _gcs(seen, c.gas.at)
    if gcs_then is None or gcs_now is None:
        said.append(say.one_sided("gcs", gcs_then, gcs_now))
    else:
        said.append(say.changed("gcs", gcs_then[0], gcs_then[1], gcs_now[0], gcs_now[1]))
    unchanged = gcs_then is not None and gcs_now is not None and gcs_now[0] >= gcs_then[0]
    return slower and co2_lower and unchanged, tuple(said)


def _gcs(seen: Observed, at: Instant) -> tuple[float, Instant] | None:
    """The newest GCS at a moment, or the first soon after it where vitals were taken with the gas; fresh only."""
    series = seen.series("gcs")
    fresh = seen.policy.freshness
    i = series.last_at_or_before(at + int(fresh.vitals_min.value * MINUTE))
    if i < 0 or at - int(series.t[i]) > fresh.gcs_min.value * MINUTE:
        return None
    return float(series.v[i]), int(series.t[i])


def _told(seen: Observed, c: Comparison) -> tuple[Message, ...]:
    assert c.gas.ph is not None
    assert c.base.ph is not None
    state = seen.policy.state  # the limit that the marker's name says
    limit = (state.severe_below_ph if c.gas.ph < state.severe_below_ph.value else state.acidotic_below_ph).value
    return (
        say.value_is("ph", c.gas.ph, say.BELOW, limit, c.gas.at, c.gas.ph_text),
        say.changed("ph", c.base.ph, c.base.at, c.gas.ph, c.gas.at, ph_noise(seen.policy.noise)),
        say.timing(c.anchor, c.anchor_at, c.minutes),
        *_settling(seen, c)[1],
        *say.gas_doubts(c.gas),
    )


def _of_kind(seen: Observed, kind: str) -> Iterable[Spell]:
    points = []
    for j in seen.once(_judged):
        if j.poor is not None:
            points.append(Point(j.gas.at, j.kind == kind, partial(_told, seen, j.poor)))
        else:
            points.append(Point(j.gas.at, False if j.over else None))
    return from_gases(seen, points)


def ph_not_better(seen: Observed, _rule: MarkerRule) -> Iterable[Spell]:
    """pH 7.25-7.34 and not better at 1-2 h, without signs of settling."""
    return _of_kind(seen, CONCERN)


def ph_not_better_settling(seen: Observed, _rule: MarkerRule) -> Iterable[Spell]:
    """pH 7.25-7.34 and not better at 1-2 h, but rate down, GCS unchanged and PaCO2 lower."""
    return _of_kind(seen, SETTLING)


def ph_not_better_severe(seen: Observed, _rule: MarkerRule) -> Iterable[Spell]:
    """pH below 7.25 and not better at 1-2 h."""
    return _of_kind(seen, SEVERE)


def hdu_criterion(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """pH below 7.30 and not better at 1-2 h: a higher level of care was advised."""
    limit = rule.limits["ph"]
    points = []
    for j in seen.once(_judged):
        gas = j.gas
        assert gas.ph is not None
        if gas.ph >= limit:
            points.append(Point(gas.at, False))
        elif j.poor is not None:
            value = say.value_is("ph", gas.ph, say.BELOW, limit, gas.at, gas.ph_text)
            points.append(Point(gas.at, True, (value, *_told(seen, j.poor)[1:3], *say.gas_doubts(gas))))
        else:
            points.append(Point(gas.at, False if j.over else None))
    return from_gases(seen, points)


def no_gain_after_hours(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """Neither pH nor PaCO2 better than at the start after 4-6 h of support that is not too little."""
    start, base = seen.support.start, seen.start_baseline
    if start is None or base is None or base.ph is None:
        return []
    points = []
    for gas in seen.on_support_gases:
        if gas.ph is None or gas.paco2_mmHg is None or base.paco2_mmHg is None:
            continue
        still = gas.ph < seen.policy.state.acidotic_below_ph.value
        no_gain = still and direction(gas.ph - base.ph, ph_noise(seen.policy.noise)) < 1
        if not no_gain or _paco2_lower(seen, base, gas):
            points.append(Point(gas.at, False))
            continue
        hours = seen.support.hours_on_mask(start, gas.at)
        if hours < rule.limits["hours"]:
            continue
        met = not support_is_small(seen, gas.at)
        told = [say.changed("ph", base.ph, base.at, gas.ph, gas.at, ph_noise(seen.policy.noise))]
        told.append(say.changed("paco2", base.paco2_mmHg, base.at, gas.paco2_mmHg, gas.at))
        hours_told: dict[str, Value] = {"what": "on support", "hours": round(hours, 2), "limit": rule.limits["hours"]}
        points.append(Point(gas.at, met, (*told, Message("evidence.hours", hours_told), *say.gas_doubts(gas))))
    return from_gases(seen, points)


def _paco2_lower(seen: Observed, base: GasFigure, gas: GasFigure) -> bool:
    assert base.paco2_mmHg is not None
    assert gas.paco2_mmHg is not None
    noise = paco2_noise(seen.policy.noise, base.paco2_mmHg)
    return direction(gas.paco2_mmHg - base.paco2_mmHg, noise) == -1


def support_is_small(seen: Observed, at: Instant, by_gas: Instant | None = None) -> bool:
    """Hypercapnic COPD on an IPAP below the least, or on one pressure, with no reason logged.

    `by_gas`: the gas that says who the patient is, where it is not the newest at that moment.
    """
    rule = seen.policy.markers.get("too_little_support")
    if rule is None or not inside(seen, "hypercapnic copd", at if by_gas is None else by_gas):
        return False
    mode, ipap = seen.episode.text("mode").at(at), seen.settings.steps("ipap").at(at)
    if mode in BILEVEL_MODES or (mode is None and not isnan(ipap)):
        small = ipap < rule.limits["ipap"]
    else:
        small = mode == "CPAP" or (mode is None and not isnan(seen.settings.steps("cpap").at(at)))
    return small and seen.episode.text("support_reason").at(at) is None


def too_little_support(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """Hypercapnic COPD, pH below 7.35 at 1 h or later, IPAP below 20 cmH2O, no reason logged."""
    start = seen.support.start
    if start is None:
        return []
    first = start + int(rule.limits["from_min"] * MINUTE)
    reasons = seen.episode.text("support_reason").t.tolist()
    moments = sorted({*(g.at for g in seen.gases), *seen.settings.moments, *reasons})
    points = []
    for at in moments:
        gas = seen.gas_on_support_at(at)
        if gas is None or gas.ph is None or gas.at < first:
            continue
        poor = gas.ph < seen.policy.state.acidotic_below_ph.value
        met = poor and inside(seen, rule.population, gas.at) and support_is_small(seen, at, gas.at)
        points.append(Point(at, met, partial(_small, seen, rule, at, gas)))
    return from_gases(seen, points)


def _small(seen: Observed, rule: MarkerRule, at: Instant, gas: GasFigure) -> tuple[Message, ...]:
    assert gas.ph is not None
    now = seen.settings.at(at)
    ipap = None if now.is_cpap else now.ipap
    support = {"quantity": "ipap", "value": ipap, "relation": say.BELOW, "limit": rule.limits["ipap"]}
    limit = seen.policy.state.acidotic_below_ph.value
    return (
        say.value_is("ph", gas.ph, say.BELOW, limit, gas.at, gas.ph_text),
        Message("evidence.support", support),
        Message("evidence.no_reason_logged", {}),
        *say.gas_doubts(gas),
    )


def gain_lost(seen: Observed, _rule: MarkerRule) -> Iterable[Spell]:
    """A relapse of pH and PaCO2 from the best gas since the start, beyond noise; ends with a gas that is none."""
    return _relapse(seen, "ph")


def oxygen_gain_lost(seen: Observed, _rule: MarkerRule) -> Iterable[Spell]:
    """A relapse of P/F from the best since the start, beyond noise; ends with a gas that is none."""
    return _relapse(seen, "pf")


def _relapse(seen: Observed, quantity: str) -> list[Spell]:
    points = []
    for gas in seen.on_support_gases:
        since = seen.since_start.get(gas.at)
        lost = (
            since.ph_lost if since is not None and quantity == "ph" else since.pf_lost if since is not None else None
        )
        said = since.reasons.get(LOST[quantity]) if since is not None else None
        told = (_lost(said, gas.at), *compared_doubts(seen, gas)) if lost and said is not None else ()
        points.append(Point(gas.at, lost, told))  # None: the gas lacks what it would take to tell
    return from_gases(seen, points)


def _lost(said: Message, at: Instant) -> Message:
    v = said.values
    best, best_at, now = float(v["best"] or 0), int(v["best_at"] or 0), float(v["now"] or 0)
    return say.changed(str(v["quantity"]), best, best_at, now, at)


def late_failure(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """Acidosis again after more than 48 h of success: pH 7.35 or above and no acidotic gas for so long."""
    limit, hours = seen.policy.state.acidotic_below_ph.value, rule.limits["hours"]
    success: Instant | None = None
    failing: Instant | None = None
    points = []
    for gas in seen.on_support_gases:
        if gas.ph is None:
            continue
        if gas.ph >= limit:
            success = gas.at if success is None or failing is not None else success
            failing = None
            points.append(Point(gas.at, False))
            continue
        if failing is None:
            failing = success if success is not None and gas.at - success > hours * HOUR else -1
        if failing >= 0:
            value = say.value_is("ph", gas.ph, say.BELOW, limit, gas.at, gas.ph_text)
            well = {"since": failing, "hours": round((gas.at - failing) / HOUR, 1)}
            told = (value, Message("evidence.success", well), *say.gas_doubts(gas))
            points.append(Point(gas.at, True, told))
    return from_gases(seen, points)
