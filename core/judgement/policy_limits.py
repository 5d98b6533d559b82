"""Values that a policy cannot have: windows that end before they begin, limits in the wrong order, numbers that no
quantity takes, pressures whose two forms are not the same."""

from __future__ import annotations

from collections.abc import Iterator
from typing import Any

import msgspec

from core.judgement.policy import Policy
from core.judgement.policy_sections import DueRule, Limit, MarkerRule, PressureLimit
from core.record.message import Message, Value
from core.record.units import MMHG_PER_KPA

Fault = tuple[str, str, Message]

ASCENDING = (
    ("response.window_from_min", "response.window_to_min"),
    ("response.chain_gap_min", "response.chain_span_min"),
    ("response.one_hour_from_min", "response.one_hour_to_min"),
    ("response.one_to_two_hours_from_min", "response.one_to_two_hours_to_min"),
    ("state.severe_below_ph", "state.acidotic_below_ph"),
    ("state.acidotic_below_ph", "state.alkalotic_above_ph"),
    ("oxygen.target_low", "oxygen.target_high"),
    ("oxygen.risk_target_low", "oxygen.risk_target_high"),
    ("leak.unintentional_limit_L_per_min", "leak.act_limit_L_per_min"),
)
"""Pairs of which the first must be below the second."""
WITHIN_RULES = (("from_min", "to_min"), ("ph_low", "ph_high"), ("sbp", "clear"))
NOT_ABOVE_RULES = (("minutes", "of_minutes"),)

RANGES = {
    "ph": (6.5, 8.0), "ph_low": (6.5, 8.0), "ph_high": (6.5, 8.0), "gcs": (3, 15), "rr": (4, 80), "sbp": (40, 200),
    "clear": (40, 250), "fio2": (0.0, 1.0), "pf": (20, 700), "sf": (20, 500), "percent": (0, 100), "ipap": (2, 60),
    "triggered_percent": (0, 100), "lactate": (0, 40), "minutes": (1, 240), "of_minutes": (1, 240),
    "ml_per_kg": (2, 30), "rise": (0.0, 20.0), "points": (0, 30), "rr_least": (4, 40),
}  # fmt: skip
"""By name of a marker's number: what it can be."""


def impossible(policy: Policy) -> Iterator[Fault]:
    """Every impossible value of a policy whose shape is right."""
    for first, second in ASCENDING:
        low, high = _limit(policy, first), _limit(policy, second)
        if low >= high:
            yield second, "error", _order(first, low, second, high)
    if policy.leak.over_minutes.value > policy.leak.of_minutes.value:
        yield "leak.of_minutes", "error", _order("leak.over_minutes", policy.leak.over_minutes.value,
                                                 "leak.of_minutes", policy.leak.of_minutes.value)  # fmt: skip
    yield from _sections(policy)
    for key, rule in policy.markers.items():
        yield from _rule(f"markers.{key}", rule)
    for key, due in policy.due.items():
        yield from _due(f"due.{key}", due)


def _limit(policy: Policy, path: str) -> float:
    found: Any = policy
    for name in path.split("."):
        found = getattr(found, name)
    return float(found.value)


def _order(first: str, low: float, second: str, high: float) -> Message:
    values: dict[str, Value] = {"first": first, "low": low, "second": second, "high": high}
    return Message("policy.wrong_order", values)


def _outside(path: str, value: float, low: float, high: float) -> Message:
    return Message("policy.out_of_range", {"path": path, "value": value, "low": low, "high": high})


def _sections(policy: Policy) -> Iterator[Fault]:
    """Limits outside the rules: none is negative, a pressure's two forms agree, a pH is a pH."""
    for section in msgspec.structs.fields(Policy):
        found = getattr(policy, section.name)
        if not isinstance(found, msgspec.Struct):
            continue
        for field in msgspec.structs.fields(found):
            limit, path = getattr(found, field.name), f"{section.name}.{field.name}"
            if not isinstance(limit, Limit):
                continue
            if limit.value < 0:
                yield path, "error", _outside(path, limit.value, 0.0, float("inf"))
            if limit.kpa is not None and field.name != "paco2_mmHg":
                yield from _forms(path, limit.value, limit.kpa)
            if field.name.endswith("_ph") and not 6.5 <= limit.value <= 8.0:
                yield path, "error", _outside(path, limit.value, 6.5, 8.0)


def _forms(path: str, mmhg: float, kpa: float) -> Iterator[Fault]:
    """Printed kPa limits are rounded to a tenth: both forms may differ by half of that."""
    if abs(mmhg / MMHG_PER_KPA - kpa) > 0.05 + 1e-9:
        values: dict[str, Value] = {"path": path, "mmHg": mmhg, "kpa": kpa, "would_be": round(mmhg / MMHG_PER_KPA, 1)}
        yield path, "error", Message("policy.forms_differ", values)


def _rule(path: str, rule: MarkerRule) -> Iterator[Fault]:
    for name, value in rule.limits.items():
        low, high = RANGES.get(name, (0.0, float("inf")))
        if not low <= value <= high:
            yield f"{path}.limits", "error", _outside(f"{path}.limits.{name}", value, low, high)
    for first, second in WITHIN_RULES:
        yield from _pair(path, rule, first, second, equal=False)
    for first, second in NOT_ABOVE_RULES:
        yield from _pair(path, rule, first, second, equal=True)
    for name, limit in rule.pressures.items():
        yield from _pressure(f"{path}.pressures.{name}", limit)
    for name, minutes in (("gap_min", rule.gap_min), ("stale_min", rule.stale_min)):
        if minutes < 0:
            yield f"{path}.{name}", "error", _outside(f"{path}.{name}", minutes, 0.0, float("inf"))


def _pair(path: str, rule: MarkerRule, first: str, second: str, *, equal: bool) -> Iterator[Fault]:
    if first in rule.limits and second in rule.limits:
        low, high = rule.limits[first], rule.limits[second]
        if low > high or (low == high and not equal):
            yield f"{path}.limits", "error", _order(first, low, second, high)


def _pressure(path: str, limit: PressureLimit) -> Iterator[Fault]:
    if not 5 <= limit.mmHg <= 700:
        yield path, "error", _outside(path, limit.mmHg, 5, 700)
    yield from _forms(path, limit.mmHg, limit.kpa)


def _due(path: str, rule: DueRule) -> Iterator[Fault]:
    if rule.from_min > rule.until_min:
        yield f"{path}.until_min", "error", _order("from_min", rule.from_min, "until_min", rule.until_min)
    for name, value in (("from_min", rule.from_min), ("soon_min", rule.soon_min), *rule.limits.items()):
        if value < 0:
            yield f"{path}.{name}", "error", _outside(f"{path}.{name}", value, 0.0, float("inf"))
