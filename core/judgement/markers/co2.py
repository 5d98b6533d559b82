"""PaCO2 that rises, and a rate that falls while the patient gets worse: tiring."""

from __future__ import annotations

from collections.abc import Iterable
from itertools import pairwise

from core.judgement import arms
from core.judgement.markers import evidence as say
from core.judgement.markers.observed import Observed
from core.judgement.markers.spells import Point, Spell, from_points
from core.judgement.policy_sections import MarkerRule
from core.judgement.response_noise import direction, paco2_noise, pf_noise, ph_noise, rr_noise
from core.judgement.shapes import GasFigure
from core.record.instant import HOUR
from core.record.message import Message


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
    return from_points(points)


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
        told.append(say.value_is("paco2", gas.paco2_mmHg, say.ABOVE, usual, gas.at))
    elif above:
        told.append(say.pressure_is("paco2", gas.paco2_mmHg, say.ABOVE, limit, gas.at))
    poor = _no_better(seen, low, gas)
    met = above or bool(poor)
    return Point(gas.at, met, (*told, *poor, *say.gas_doubts(gas)))


def _no_better(seen: Observed, low: GasFigure, gas: GasFigure) -> list[Message]:
    """Rate or P/F that is known and not better. A value that is not known says nothing."""
    said: list[Message] = []
    before, after = seen.vitals.rate(low.at, 0, gas.at), seen.rate_near(gas.at)
    if before is not None and after is not None and after.at > before.at:
        noise = rr_noise(seen.policy.noise, before.device and after.device)
        if direction(after.value - before.value, noise) != -1:
            said.append(say.changed("rr", before.value, before.at, after.value, after.at, noise))
    if arms.pf_comparable(low, gas, seen.policy) is None and low.pf_mmHg is not None and gas.pf_mmHg is not None:
        noise = pf_noise(seen.policy.noise, low.pf_mmHg)
        if direction(gas.pf_mmHg - low.pf_mmHg, noise) != 1:
            said.append(say.changed("pf", low.pf_mmHg, low.at, gas.pf_mmHg, gas.at, noise))
    return said


def rate_falling_worse_gas(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """Rate down beyond noise between two gases while pH fell or PaCO2 rose beyond noise: tiring."""
    points = []
    gases = [g for g in seen.gases if not g.off_support]
    for before, gas in pairwise(gases):
        if gas.at - before.at > rule.limits["within_h"] * HOUR:
            points.append(Point(gas.at, None))
            continue
        worse = _worse(seen, before, gas)
        if not worse:
            points.append(Point(gas.at, False))
            continue
        rr = _rate_change(seen, before, gas)
        if rr is None:
            points.append(Point(gas.at, None))
            continue
        told, slower = rr
        points.append(Point(gas.at, slower, (told, *worse, *say.gas_doubts(gas))))
    return from_points(points)


def _worse(seen: Observed, before: GasFigure, gas: GasFigure) -> list[Message]:
    said: list[Message] = []
    if before.ph is not None and gas.ph is not None:
        noise = ph_noise(seen.policy.noise)
        if direction(gas.ph - before.ph, noise) == -1:
            said.append(say.changed("ph", before.ph, before.at, gas.ph, gas.at, noise))
    if before.paco2_mmHg is not None and gas.paco2_mmHg is not None:
        noise = paco2_noise(seen.policy.noise, before.paco2_mmHg)
        if direction(gas.paco2_mmHg - before.paco2_mmHg, noise) == 1:
            said.append(say.changed("paco2", before.paco2_mmHg, before.at, gas.paco2_mmHg, gas.at, noise))
    return said


def _rate_change(seen: Observed, before: GasFigure, gas: GasFigure) -> tuple[Message, bool] | None:
    then, now = seen.vitals.rate(before.at, 0, gas.at), seen.rate_near(gas.at)
    if then is None or now is None or now.at <= then.at:
        return None
    noise = rr_noise(seen.policy.noise, then.device and now.device)
    told = say.changed("rr", then.value, then.at, now.value, now.at, noise)
    return told, direction(now.value - then.value, noise) == -1
