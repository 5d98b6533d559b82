"""PaCO2 that rises, and a rate that falls while the patient gets worse: tiring."""

from __future__ import annotations

from collections.abc import Iterable

from core.judgement import arms
from core.judgement.markers import evidence as say
from core.judgement.markers.gas_points import compared_doubts, from_gases
from core.judgement.markers.observed import Observed
from core.judgement.markers.spells import Point, Spell
from core.judgement.policy_sections import MarkerRule
from core.judgement.response_noise import direction, paco2_noise, pf_noise, ph_noise, rr_noise
from core.judgement.shapes import GasFigure
from core.record.instant import HOUR
from core.record.message import Message, Value


def paco2_rising(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """PaCO2 up beyond noise from the lowest of the last hours, and above the greater of 45 mmHg (6.0 kPa) and the
    usual PaCO2, or with rate or P/F not better. Ends once it is no longer up beyond noise."""
    points = []
    for gas in seen.gases:
        if gas.paco2_mmHg is None or gas.off_support:
            continue
        earlier = seen.gases_before(gas, int(rule.limits["within_h"] * HOUR))
        known = [g for g in earlier if g.paco2_mmHg is not None and not g.off_support]
        if not known:
            continue
        low = min(known, key=lambda g: (g.paco2_mmHg or 0.0, -g.at))
        points.append(_rise(seen, rule, low, gas))
    return from_gases(seen, points)


def _rise(seen: Observed, rule: MarkerRule, low: GasFigure, gas: GasFigure) -> Point:
    assert low.paco2_mmHg is not None
    assert gas.paco2_mmHg is not None
    noise = paco2_noise(seen.policy.noise, low.paco2_mmHg)
    if direction(gas.paco2_mmHg - low.paco2_mmHg, noise) < 1:
        return Point(gas.at, False)
    told = [say.changed("paco2", low.paco2_mmHg, low.at, gas.paco2_mmHg, gas.at, noise)]
    usual = seen.episode.latest("usual_paco2")
    limit = rule.pressures["paco2"]
    above = say.is_above(gas.paco2_mmHg, limit) and (usual is None or gas.paco2_mmHg > usual)
    if above and usual is not None and usual > limit.mmHg:
        own: dict[str, Value] = {"quantity": "paco2", "value": gas.paco2_mmHg, "usual": usual, "at": gas.at}
        told.append(Message("evidence.above_usual", own))
    elif above:
        told.append(say.pressure_is("paco2", gas.paco2_mmHg, say.ABOVE, limit, gas.at))
    poor, known = _no_better(seen, low, gas)
    met = True if above or poor else False if known else None
    return Point(gas.at, met, (*told, *poor, *compared_doubts(seen, gas)))


def _no_better(seen: Observed, low: GasFigure, gas: GasFigure) -> tuple[list[Message], bool]:
    """Rate or P/F that is known and not better, and whether both are known: what is not known says nothing."""
    said: list[Message] = []
    before, after = seen.vitals.rate(low.at, 0, gas.at), seen.rate_near(gas.at)
    rated = before is not None and after is not None and after.at > before.at
    if rated and before is not None and after is not None:
        noise = rr_noise(seen.policy.noise, before.device and after.device)
        if direction(after.value - before.value, noise) != -1:
            said.append(say.moved("rr", before, after, noise))
    comparable = arms.pf_comparable(low, gas, seen.policy) is None
    if comparable and low.pf_mmHg is not None and gas.pf_mmHg is not None:
        noise = pf_noise(seen.policy.noise, low.pf_mmHg)
        if direction(gas.pf_mmHg - low.pf_mmHg, noise) != 1:
            said.append(say.changed("pf", low.pf_mmHg, low.at, gas.pf_mmHg, gas.at, noise))
    return said, rated and comparable


def rate_falling_worse_gas(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """Rate down beyond noise between two gases while pH fell or PaCO2 rose beyond noise: tiring.

    Each value is compared with the newest one before it: a gas that lacks it parts nothing and ends nothing.
    """
    points = []
    reach = int(rule.limits["within_h"] * HOUR)
    gases = [g for g in seen.gases if not g.off_support and (g.ph is not None or g.paco2_mmHg is not None)]
    for i, gas in enumerate(gases[1:], 1):
        earlier = [g for g in gases[:i] if gas.at - g.at <= reach]
        worse, told = _worse(seen, earlier, gas)
        if not worse:
            points.append(Point(gas.at, False if told else None))
            continue
        rr = next((found for base, _ in worse if (found := _rate_change(seen, base, gas)) is not None), None)
        if rr is None:
            points.append(Point(gas.at, None))
            continue
        said, slower = rr
        points.append(Point(gas.at, slower, (said, *(m for _, m in worse), *compared_doubts(seen, gas))))
    return from_gases(seen, points)


def _worse(seen: Observed, earlier: list[GasFigure], gas: GasFigure) -> tuple[list[tuple[GasFigure, Message]], bool]:
    """What is worse than in the newest gas before that holds it, and whether the gas holds all of that."""
    said: list[tuple[GasFigure, Message]] = []
    ph = next((g for g in reversed(earlier) if g.ph is not None), None)
    if ph is not None and ph.ph is not None and gas.ph is not None:
        noise = ph_noise(seen.policy.noise)
        if direction(gas.ph - ph.ph, noise) == -1:
            said.append((ph, say.changed("ph", ph.ph, ph.at, gas.ph, gas.at, noise)))
    co2 = next((g for g in reversed(earlier) if g.paco2_mmHg is not None), None)
    if co2 is not None and co2.paco2_mmHg is not None and gas.paco2_mmHg is not None:
        noise = paco2_noise(seen.policy.noise, co2.paco2_mmHg)
        if direction(gas.paco2_mmHg - co2.paco2_mmHg, noise) == 1:
            said.append((co2, say.changed("paco2", co2.paco2_mmHg, co2.at, gas.paco2_mmHg, gas.at, noise)))
    held = [have is not None for before, have in ((ph, gas.ph), (co2, gas.paco2_mmHg)) if before is not None]
    return said, bool(held) and all(held)


def _rate_change(seen: Observed, before: GasFigure, gas: GasFigure) -> tuple[Message, bool] | None:
    then, now = seen.vitals.rate(before.at, 0, gas.at), seen.rate_near(gas.at)
    if then is None or now is None or now.at <= then.at:
        return None
    noise = rr_noise(seen.policy.noise, then.device and now.device)
    told = say.moved("rr", then, now, noise)
    return told, direction(now.value - then.value, noise) == -1
