"""What became of a change, as shapes: its steps, the gases judged against it, and what they say together.

Names and units as in `core.judgement.shapes`.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from core.record.instant import Instant
from core.record.message import Message


@dataclass(frozen=True, slots=True)
class Step:
    """One change inside an anchor. `before`/`after` in canonical units or words."""

    at: Instant
    channel: str
    before: float | str | None
    after: float | str | None


@dataclass(frozen=True, slots=True)
class SinceStart:
    """A gas against the baseline of the start, so that a slow drift cannot hide."""

    delta_ph: float | None = None
    delta_paco2_mmHg: float | None = None
    delta_pf_mmHg: float | None = None
    verdict: str | None = None
    gain_lost: bool = False
    """Of pH or of P/F; the reasons `gain_lost` and `oxygen_gain_lost` say which, from what and when."""
    reasons: Mapping[str, Message] = field(default_factory=dict)
    ph_lost: bool | None = None
    """The gain in pH and PaCO2 is lost; None where the gas does not hold what it takes to tell."""
    pf_lost: bool | None = None
    """The same of P/F."""


@dataclass(frozen=True, slots=True)
class JudgedGas:
    """A gas judged against an anchor.

    `timing`: early (1-29 min), in_window (30-120), late. `verdict`, `co2_arm`, `oxygen_arm`: better, worse,
    mixed, no clear change, over-correction; None with `why` when not judged. `attributable` is False when a
    later anchor lies between: `also_changed` says what.
    """

    at: Instant
    minutes: float
    timing: str
    delta_ph: float | None = None
    delta_paco2_mmHg: float | None = None
    delta_pf_mmHg: float | None = None
    verdict: str | None = None
    co2_arm: str | None = None
    oxygen_arm: str | None = None
    state: str | None = None
    attributable: bool = True
    since_start: SinceStart = field(default_factory=SinceStart)
    also_changed: tuple[Step, ...] = ()
    why: tuple[Message, ...] = ()
    """What was compared, by how much, against which noise; or why not judged."""
    co2_at_issue: bool = True
    """Whether CO2 was or is at issue: acute hypercapnia at the baseline or in this gas. Elsewhere a PaCO2 that moves
    is told as moving, never as CO2 better or worse."""
    ph: float | None = None
    """The gas's own values, at which the differences end."""
    paco2_mmHg: float | None = None
    pf_mmHg: float | None = None


@dataclass(frozen=True, slots=True)
class CourseValue:
    """pH and PaCO2 at a fixed minute after an anchor, with its basis. Shown, never judged by."""

    ph: float | None = None
    ph_low: float | None = None
    ph_high: float | None = None
    paco2_mmHg: float | None = None
    paco2_low_mmHg: float | None = None
    paco2_high_mmHg: float | None = None
    basis: Message | None = None


@dataclass(frozen=True, slots=True)
class ResponseFigure:
    """What an anchor did. `headline`: a verdict, "not yet known" or "not judged" (with `why`)."""

    anchor_at: Instant
    anchor: str
    """"start", "change", "interface" or "break_end"."""
    first_at: Instant
    steps: tuple[Step, ...] = ()
    effects: tuple[str, ...] = ()
    """Which of "co2" and "oxygen" it can act on."""
    window_from: Instant = 0
    window_to: Instant = 0
    baseline_at: Instant | None = None
    baseline_ph: float | None = None
    baseline_paco2_mmHg: float | None = None
    baseline_pf_mmHg: float | None = None
    baseline_early: bool = False
    co2_arm_active: bool = False
    oxygen_arm_active: bool = False
    headline: str = "not yet known"
    headline_gas_at: Instant | None = None
    state: str | None = None
    why: tuple[Message, ...] = ()
    gases: tuple[JudgedGas, ...] = ()
    at_minutes: Mapping[str, CourseValue] = field(default_factory=dict)
    superseded_at: Instant | None = None
    """The next anchor's first step, where there is one."""
    gain_lost: bool = False
    """The headline's gas fell back from the best gas since the start, beyond noise: never "better" alone."""
    in_doubt: bool = False
    """The headline's gas, or its baseline, holds a doubtful value: said wherever the headline stands."""
