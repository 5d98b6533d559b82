"""What gases say of a marker, and which of them say nothing: what is missing or in doubt ends no flag.

A gas ends a flag only where it holds what the marker reads and nobody has to doubt it. Where the newest gas does not
settle an open flag, the flag stands and says so; how old its own values are is said by `evidence.stale`.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import replace
from types import MappingProxyType
from typing import Final

from core.judgement.markers.evidence import gas_doubts
from core.judgement.markers.observed import Observed
from core.judgement.markers.spells import Point, Spell, from_points
from core.judgement.shapes import GasFigure
from core.record.message import Message, Value

_PH, _BOTH, _PAO2, _PF, _LACTATE = ("ph",), ("ph", "paco2"), ("pao2",), ("pf",), ("lactate",)
NEEDS: Final[Mapping[str, tuple[str, ...]]] = MappingProxyType(
    {
        "ph_below_715": _PH, "ph_below_720_on_support": _PH, "ph_720_725_twice": _PH, "ph_below_severe": _PH,
        "venous_ph_below_severe": _PH, "acidosis_off_support": _PH, "ph_below_715_before_support": _PH,
        "ph_not_better_severe": _PH, "ph_not_better": _PH, "ph_not_better_settling": _PH, "hdu_criterion": _PH,
        "late_failure": _PH, "too_little_support": _PH,
        "no_gain_after_hours": _BOTH, "gain_lost": _BOTH, "rate_falling_worse_gas": _BOTH, "paco2_rising": ("paco2",),
        "pao2_below_60": _PAO2, "pao2_below_45": _PAO2, "pao2_below_45_on_highest_oxygen": _PAO2,
        "pf_low_at_1h": _PF, "pf_below_150_ards": _PF, "oxygen_gain_lost": _PF,
        "hacor_above_5": _PF, "hacor_above_5_later": _PF, "hacor_8_or_more": _PF, "hacor_updated_above_10_5": _PF,
        "lactate_above_2": _LACTATE, "lactate_above_4": _LACTATE, "lactate_rising": _LACTATE,
    }
)  # fmt: skip
"""What a gas must hold to answer a marker that gases judge. One without it leaves an open flag open."""
ANY_SAMPLE: Final = frozenset({"lactate_above_2", "lactate_above_4", "lactate_rising", "venous_ph_below_severe"})
"""Markers that a venous sample answers too."""
AT_ONE_TO_TWO_HOURS: Final = frozenset(
    {"ph_not_better_severe", "ph_not_better", "ph_not_better_settling", "hdu_criterion"}
)
"""Markers that ask whether pH has risen 1-2 h after a start or a change."""
SCORED_AT_ONE_TO_TWO_HOURS: Final = frozenset({"hacor_above_5", "hacor_updated_above_10_5"})
_FIELDS: Final = {"ph": "ph", "paco2": "paco2_mmHg", "pao2": "pao2_mmHg", "pf": "pf_mmHg",
                  "lactate": "lactate_mmol_L"}  # fmt: skip


def from_gases(seen: Observed, points: Iterable[Point]) -> list[Spell]:
    """Spells of a marker that is judged at gases: a gas in doubt may begin one and ends none."""
    doubtful = seen.doubtful_gases
    if not doubtful:
        return from_points(points)
    return from_points(replace(p, met=None) if p.met is False and p.at in doubtful else p for p in points)


def compared_doubts(seen: Observed, gas: GasFigure) -> tuple[Message, ...]:
    """What weakens a gas in a comparison with another: its own doubts, and that it is early, so not steady.

    A relapse in an early gas is told all the same (rules of judgement 1.1 and 1.5): it must not wait for the window.
    """
    told = (Message("evidence.gas_doubt", {"doubt": "early", "at": gas.at}),) if is_early(seen, gas) else ()
    return (*told, *gas_doubts(gas))


def is_early(seen: Observed, gas: GasFigure) -> bool:
    """Whether a gas was drawn before the response window of the change that it judges."""
    return any(a.judged.timing == "early" for a in seen.attributed.get(gas.at, ()))


def lacking(gas: GasFigure, needs: Iterable[str]) -> tuple[str, ...]:
    """Which of the values that a marker needs a gas does not hold."""
    return tuple(q for q in needs if getattr(gas, _FIELDS[q]) is None)


def not_settled(seen: Observed, marker: str, evidence: Iterable[Message]) -> Message | None:
    """Why the newest gas, newer than those an open flag rests on, left the flag as it was; None where none is newer.

    `because`: missing, venous, doubtful, off support, outside (a score that is not made for what the gas shows), or
    no answer (it lies outside what the marker asks).
    """
    needs = NEEDS.get(marker)
    gas = seen.newest_sample if needs == _LACTATE else seen.newest_gas
    if needs is None or gas is None:
        return None
    moments = {g.at for g in seen.ctx.samples}
    rested = [at for m in evidence for k in ("at", "second_at") if (at := m.values.get(k)) in moments]
    if gas.at in rested or not rested:
        return None
    score = seen.ctx.hacor_at_gases.get(gas.at) if marker.startswith("hacor") else None
    missing = score.missing if score is not None else lacking(gas, needs)
    venous = gas.site == "venous" and marker not in ANY_SAMPLE
    outside = score is not None and score.population == "outside" and "population" not in score.reasons
    because = (
        "venous" if venous else "outside" if outside
        else "missing" if missing else "doubtful" if gas.in_doubt
        else "off support" if gas.off_support else _no_answer(seen, marker, gas)
    )  # fmt: skip
    from_min, to_min = _hours(seen, marker, because)
    values: dict[str, Value] = {"gas_at": gas.at, "because": because,
              "missing": ", ".join(missing) if because == "missing" else None, "ph": gas.ph,
              "from_min": from_min, "to_min": to_min}  # fmt: skip
    return Message("evidence.not_settled", values)


def _hours(seen: Observed, marker: str, because: str) -> tuple[float | None, float | None]:
    """The minutes after a start or change in which a marker judges, where they are why a gas gave no answer."""
    if because == "other hours":
        rules = seen.policy.response
        return rules.one_to_two_hours_from_min.value, rules.one_to_two_hours_to_min.value
    limits = seen.policy.markers[marker].limits if because == "score hours" else {}
    return limits.get("from_min"), limits.get("to_min")


def _no_answer(seen: Observed, marker: str, gas: GasFigure) -> str:
    """Why a gas that lacks nothing neither meets nor ends a flag, where one can tell: drawn too early, or outside the
    hours after a start or change that the marker judges."""
    if marker in AT_ONE_TO_TWO_HOURS:
        return "early" if is_early(seen, gas) else "other hours"
    return "score hours" if marker in SCORED_AT_ONE_TO_TWO_HOURS else "no answer"
