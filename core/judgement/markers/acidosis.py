"""Acidosis that is there: absolute limits of pH, on any gas whose pH stands for arterial."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Iterator

from core.judgement.markers import evidence as say
from core.judgement.markers.gas_points import from_gases
from core.judgement.markers.observed import Observed
from core.judgement.markers.spells import Point, Spell
from core.judgement.policy_sections import MarkerRule
from core.judgement.shapes import GasFigure
from core.record.instant import MINUTE
from core.record.message import Message


def ph_points(
    gases: Iterable[GasFigure], limit: float, more: Callable[[GasFigure], tuple[Message, ...]] = lambda _: ()
) -> Iterator[Point]:
    """pH below a limit at each gas that has one."""
    for gas in gases:
        if gas.ph is not None:
            met = gas.ph < limit
            yield Point(gas.at, met, (_low(gas, limit), *more(gas), *say.gas_doubts(gas)) if met else ())


def _low(gas: GasFigure, limit: float) -> Message:
    assert gas.ph is not None
    return say.value_is("ph", gas.ph, say.BELOW, limit, gas.at, gas.ph_text)


def ph_below_severe(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """pH below 7.25 on any arterial or capillary gas: early, late or off support."""
    return from_gases(seen, ph_points(seen.gases, rule.limits["ph"], say.drawn))


def ph_below_715(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """pH below 7.15 once support has begun."""
    start = seen.support.start
    gases = (g for g in seen.gases if start is not None and (seen.drawn_on_support(g) or g.off_support))
    return from_gases(seen, ph_points(gases, rule.limits["ph"], say.drawn))


def ph_below_715_before_support(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """A first gas before support below pH 7.15: a relative contraindication, until a gas on support."""
    points = []
    for gas in seen.gases:
        if gas.ph is None:
            continue
        before = not seen.drawn_on_support(gas) and not gas.off_support
        met = before and gas.ph < rule.limits["ph"]
        points.append(Point(gas.at, met, (_low(gas, rule.limits["ph"]), *say.gas_doubts(gas)) if met else ()))
    return from_gases(seen, points)


def ph_below_720_on_support(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """pH below 7.20 once on support."""
    return from_gases(seen, ph_points(seen.on_support_gases, rule.limits["ph"]))


def ph_720_725_twice(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """pH 7.20-7.25 on two gases on support at least 60 min apart, with none above in between."""
    low, high, apart = (rule.limits[k] for k in ("ph_low", "ph_high", "apart_min"))
    points: list[Point] = []
    first: GasFigure | None = None
    for gas in seen.on_support_gases:
        if gas.ph is None:
            continue
        if gas.ph > high:
            first = None
            points.append(Point(gas.at, False))
            continue
        if first is None or first.ph is None:
            first = gas
            continue
        if gas.at - first.at >= apart * MINUTE:
            twice = Message("evidence.twice", {"quantity": "ph", "first": first.ph, "first_at": first.at,
                            "second": gas.ph, "second_at": gas.at, "low": low, "high": high})  # fmt: skip
            points.append(Point(gas.at, True, (twice, *say.gas_doubts(gas))))
    return from_gases(seen, points)


def acidosis_off_support(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """pH below 7.35 in a break or soon after one; ends with the next gas that is not."""
    points = []
    for gas in seen.gases:
        if gas.ph is not None:
            met = gas.off_support and gas.ph < rule.limits["ph"]
            told = (_low(gas, rule.limits["ph"]), *say.drawn(gas), *say.gas_doubts(gas)) if met else ()
            points.append(Point(gas.at, met, told))
    return from_gases(seen, points)


def venous_ph_below_severe(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """A venous pH below 7.25: confirm arterially. Ends with the next arterial or capillary gas."""
    points = []
    for gas in seen.ctx.gases:
        if gas.ph is None:
            continue
        met = gas.site == "venous" and gas.ph < rule.limits["ph"]
        extra = Message("evidence.venous", {"at": gas.at})
        points.append(Point(gas.at, met, (_low(gas, rule.limits["ph"]), extra, *say.gas_doubts(gas)) if met else ()))
    return from_gases(seen, points)
