"""What a flag rests on: one message for each fact, with the values its sentence needs.

`KEYS` names every message key of markers, due items and the order of concern with its values; a test holds the
code to it. Pressures in mmHg beside the limit's kPa form, rates per minute, instants in names that end in `at`.
"""

from __future__ import annotations

from collections.abc import Mapping
from math import floor, isnan
from types import MappingProxyType
from typing import Final

from core.judgement.policy_sections import PressureLimit
from core.judgement.shapes import GasFigure
from core.judgement.vitals_near import Found
from core.physiology.constants import KPA_IN_MMHG
from core.record.instant import Instant
from core.record.message import Message, Value

BELOW, ABOVE, AT_MOST, AT_LEAST = "below", "above", "at or below", "at or above"

KEYS: Final[Mapping[str, tuple[str, ...]]] = MappingProxyType(
    {
        "evidence.value": ("quantity", "value", "relation", "limit", "limit_kpa", "at", "since", "text"),
        "evidence.change": (
            "quantity",
            "before",
            "before_at",
            "before_since",
            "after",
            "at",
            "since",
            "change",
            "noise",
            "direction",
        ),
        "evidence.above_usual": ("quantity", "value", "usual", "at"),
        "evidence.unchanged": ("quantity", "value", "before_at", "at"),
        "evidence.timing": ("anchor", "anchor_at", "minutes"),
        "evidence.sustained": ("quantity", "relation", "limit", "minutes", "since", "at", "median"),
        "evidence.twice": ("quantity", "first", "first_at", "second", "second_at", "low", "high"),
        "evidence.score": ("score", "points", "lowest", "highest", "limit", "at", "missing"),
        "evidence.failed_percent": ("score", "points", "percent"),
        "evidence.score_rise": ("score", "before", "before_at", "lowest", "highest", "at"),
        "evidence.not_trusted": ("quantity", "since", "at", "minutes"),
        "evidence.support": ("quantity", "value", "relation", "limit"),
        "evidence.no_reason_logged": (),
        "evidence.event": ("event", "at", "text"),
        "evidence.hours": ("what", "hours", "limit"),
        "evidence.share": ("percent", "limit", "minutes", "breaks"),
        "evidence.unknown": ("quantity",),
        "evidence.unknown_then": ("quantity", "value", "at"),
        "evidence.unknown_now": ("quantity", "value", "at"),
        "evidence.stale": ("at", "minutes"),
        "evidence.gas_doubt": ("doubt", "at"),
        "evidence.not_settled": ("gas_at", "because", "missing", "ph", "from_min", "to_min"),
        "evidence.off_support": ("at",),
        "evidence.not_steady": ("minutes", "back_on_at", "at"),
        "evidence.support_ended": ("at",),
        "evidence.range_then": ("low", "high", "since", "low_now", "high_now", "by"),
        "evidence.on_oxygen": ("fio2", "at"),
        "evidence.venous": ("at",),
        "evidence.after_beta_agonist": ("at", "text"),
        "evidence.think_of": ("what",),
        "evidence.support_ends": ("at",),
        "evidence.overdue": ("what", "until", "because"),
        "evidence.success": ("since", "hours"),
        "evidence.outside_population": ("population",),
        "evidence.ceiling": ("ceiling",),
        "due.gas_after_start": ("anchor_at",),
        "due.gas_reference": ("anchor_at",),
        "due.gas_after_change": ("anchor_at", "steps"),
        "due.gas_after_chain": ("anchor_at", "steps"),
        "due.gas_after_break": ("anchor_at",),
        "due.repeat_gas": ("gas_at", "ph", "state"),
        "due.repeat_gas_soon": ("gas_at", "ph", "why"),
        "due.repeat_gas_flag": ("gas_at", "marker", "since"),
        "due.confirm_arterially": ("gas_at", "ph"),
        "due.reassessment": ("anchor_at", "last_at"),
        "due.reassessment_flag": ("marker", "since", "last_at"),
        "due.skin_check": ("last_at",),
        "due.first_skin_check": ("of", "since_at"),
        "due.mask_check": ("marker", "since"),
        "due.oxygen_review": ("marker", "since"),
        "due.complete_score": ("score", "gas_at", "missing", "lowest", "highest", "limit"),
        "due.ceiling": ("started_at",),
        "due.break_end": ("break_at", "hours"),
        "due.probable_break": ("break_at", "end_at"),
        "due.spo2_recheck": ("spo2", "at", "low", "high"),
        "concern.flag": ("marker", "tier", "since", "more", "state", "unconfirmed"),
        "concern.overdue": ("what", "until"),
        "concern.due_soon": ("what", "until"),
        "concern.state": ("state", "gas_at", "ph", "support"),
        "concern.ended": ("ended_at", "by"),
    }
)


def value_is(
    quantity: str, value: float, relation: str, limit: float, at: Instant, text: str | None = None,
    limit_kpa: float | None = None, since: Instant | None = None,
) -> Message:  # fmt: skip
    """A value against its limit. `since`: the oldest sample of a median that ends at `at`; None for one value."""
    values: dict[str, Value] = {"quantity": quantity, "value": value, "relation": relation, "limit": limit,
              "limit_kpa": limit_kpa, "at": at, "since": since, "text": text}  # fmt: skip
    return Message("evidence.value", values)


def on_oxygen(fio2: float, at: Instant) -> Message:
    """The FiO2 that a gas was drawn on, without a limit: it says how much the value means."""
    return Message("evidence.on_oxygen", {"fio2": fio2, "at": at})


def pressure_is(quantity: str, mmhg: float, relation: str, limit: PressureLimit, at: Instant) -> Message:
    """A gas pressure against its paired limit."""
    return value_is(quantity, mmhg, relation, limit.mmHg, at, None, limit.kpa)


def changed(
    quantity: str, before: float, before_at: Instant, after: float, at: Instant, noise: float | None = None,
    *, before_since: Instant | None = None, since: Instant | None = None,
) -> Message:  # fmt: skip
    """A value against an earlier one. `direction`: up, down or inside noise. One that is the same says only that.

    `before_since` and `since`: the oldest sample of each where it is a median; None for one value.
    """
    change = round(after - before, 6)
    if change == 0:
        return Message("evidence.unchanged", {"quantity": quantity, "value": after, "before_at": before_at, "at": at})
    inside = noise is not None and round(abs(change) - noise, 6) <= 0
    direction = "inside noise" if inside else "up" if change > 0 else "down"
    values: dict[str, Value] = {"quantity": quantity, "before": before, "before_at": before_at,
              "before_since": before_since, "after": after, "at": at, "since": since, "change": change,
              "noise": noise, "direction": direction}  # fmt: skip
    return Message("evidence.change", values)


def moved(quantity: str, before: Found, after: Found, noise: float | None = None) -> Message:
    """A rate or an SpO2 against an earlier one, each counted or a median of the device."""
    return changed(quantity, before.value, before.at, after.value, after.at, noise,
                   before_since=before.since, since=after.since)  # fmt: skip


def timing(anchor: str, anchor_at: Instant, minutes: float) -> Message:
    """How long after a start or change."""
    return Message("evidence.timing", {"anchor": anchor, "anchor_at": anchor_at, "minutes": minutes})


def sustained(
    quantity: str, relation: str, limit: float, minutes: float, since: Instant, at: Instant, median: float
) -> Message:
    """A crossing that lasted from `since`; `at` is its newest value, `median` that of its values."""
    values: dict[str, Value] = {"quantity": quantity, "relation": relation, "limit": limit, "minutes": minutes,
              "since": since, "at": at, "median": median}  # fmt: skip
    return Message("evidence.sustained", values)


def unknown(quantity: str) -> Message:
    """A value that would be needed and is not known."""
    return Message("evidence.unknown", {"quantity": quantity})


def one_sided(quantity: str, then: tuple[float, Instant] | None, now: tuple[float, Instant] | None) -> Message:
    """What cannot be compared: the baseline's value is not known, or that near the gas, or neither.

    `then` and `now`: the value and its moment, None where it is not known.
    """
    known = then if then is not None else now
    if known is None or (then is not None and now is not None):
        return unknown(quantity)
    key = "evidence.unknown_now" if then is not None else "evidence.unknown_then"
    return Message(key, {"quantity": quantity, "value": known[0], "at": known[1]})


def drawn(gas: GasFigure) -> tuple[Message, ...]:
    """How a gas off support was drawn: the mask off, just on again, or support over."""
    if gas.back_on_minutes is not None:
        told = {"minutes": gas.back_on_minutes, "back_on_at": gas.back_on_at, "at": gas.at}
        return (Message("evidence.not_steady", told),)
    if not gas.off_support:
        return ()
    return (Message("evidence.support_ended" if gas.support_ended else "evidence.off_support", {"at": gas.at}),)


def gas_doubts(gas: GasFigure) -> tuple[Message, ...]:
    """What makes a gas doubtful. A doubt is always shown."""
    named = (
        ("unconfirmed", gas.unconfirmed),
        ("unusual", gas.doubt and not (gas.unconfirmed or gas.implausible)),
        ("implausible", gas.implausible is not None),
        ("inconsistent", gas.consistent is False),
        ("corrected", gas.corrected),
        ("disputed", gas.disputed),
        ("site assumed", gas.site_assumed),
    )
    return tuple(Message("evidence.gas_doubt", {"doubt": d, "at": gas.at}) for d, true in named if true)


def is_below(mmhg: float, limit: PressureLimit) -> bool:
    """Whether a gas pressure is below a paired limit, in tenths of a kPa; NaN never is."""
    return tenths(mmhg) < round(limit.kpa * 10.0)


def is_above(mmhg: float, limit: PressureLimit) -> bool:
    """Whether a gas pressure is above a paired limit, in tenths of a kPa; NaN never is."""
    return tenths(mmhg) > round(limit.kpa * 10.0)


def tenths(mmhg: float) -> float:
    """Whole tenths of a kPa, half-up: `physiology.pressure.tenths_of_kpa` for one number, which markers ask often.

    >>> tenths(45.0), tenths(60.0)
    (60, 80)
    """
    return mmhg if isnan(mmhg) else floor(mmhg / KPA_IN_MMHG * 10.0 + 0.5 + 1e-9)
