"""Who is inside the population that a marker was validated in or is meant for. What is not known is outside."""

from __future__ import annotations

from collections.abc import Iterable

from core.judgement import arms
from core.judgement.markers.observed import Observed
from core.judgement.shapes import GasFigure
from core.record.channels import HYPERCAPNIC_RISK
from core.record.instant import Instant

_RATE_IS_THE_AIM = frozenset({"neuromuscular", "obesity hypoventilation"})


def inside(seen: Observed, population: str, at: Instant) -> bool:
    """Whether the patient is inside a population at a moment, by the newest gas, the indication and the support."""
    gases = seen.gases_until(at)
    indication = seen.ctx.indication
    match population:
        case "any":
            return True
        case "on support":
            return _support_runs(seen, at)
        case "acute hypercapnia":
            return _acutely_hypercapnic(seen, gases) is True
        case "hypercapnic copd":
            return indication == "copd" and _newest(g.hypercapnic for g in reversed(gases)) is True
        case "hypoxaemic, not hypercapnic":
            return _hypoxaemic(seen, gases, at)
        case "moderate ards":
            return _moderate_ards(seen, gases)
        case "hypercapnic risk":
            return seen.risk_since is not None or seen.ctx.hypercapnic_risk
        case "not neuromuscular or obesity hypoventilation":
            return indication not in _RATE_IS_THE_AIM
    raise ValueError(f"population {population!r} is not known")


def _support_runs(seen: Observed, at: Instant) -> bool:
    """Support has begun and not ended; a break of it belongs to it."""
    start, end = seen.support.start, seen.support.end
    return start is not None and start <= at and (end is None or at <= end)


def _on_support(seen: Observed, at: Instant) -> bool:
    return seen.support.on_support(at)


def _newest(answers: Iterable[bool | None]) -> bool | None:
    """The newest answer that there is: a gas that lacks a value takes nobody out of a population."""
    return next((a for a in answers if a is not None), None)


def _acutely_hypercapnic(seen: Observed, gases: tuple[GasFigure, ...]) -> bool | None:
    """By the newest gas that tells: pH below 7.35 with PaCO2 above 45, or one of both ruled out."""

    def told(gas: GasFigure) -> bool | None:
        acidotic = None if gas.ph is None else gas.ph < seen.policy.state.acidotic_below_ph.value
        if acidotic is False or gas.hypercapnic is False:
            return False
        return True if acidotic and gas.hypercapnic else None

    return _newest(told(g) for g in reversed(gases))


def _with_pf(gases: tuple[GasFigure, ...]) -> GasFigure | None:
    return next((g for g in reversed(gases) if g.pf_mmHg is not None), None)


def _hypoxaemic(seen: Observed, gases: tuple[GasFigure, ...], at: Instant) -> bool:
    """Hypoxaemic failure on the mask that is not acutely hypercapnic, now or at the start.

    A pH or a PaCO2 that rules acute hypercapnia out must be known.
    """
    gas = _with_pf(gases)
    if gas is None or not arms.hypoxaemia(gas, seen.policy) or seen.ctx.indication in HYPERCAPNIC_RISK:
        return False
    ruled_out = _acutely_hypercapnic(seen, gases) is False
    start = seen.start_baseline
    began_hypercapnic = start is not None and arms.acute_hypercapnia(start, seen.policy)
    on_mask = _on_support(seen, at) and seen.settings.at(at).mode != "high-flow nasal"
    return ruled_out and not began_hypercapnic and on_mask


def _moderate_ards(seen: Observed, gases: tuple[GasFigure, ...]) -> bool:
    """ARDS by indication or as logged, P/F at most 200 on support."""
    ards = seen.ctx.indication == "ards" or seen.episode.latest_text("pulmonary_ards") == "yes"
    gas = _with_pf(gases)
    return ards and gas is not None and (gas.pf_mmHg or 0.0) <= 200 and seen.drawn_on_support(gas)
