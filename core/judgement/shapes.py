"""Figures, as shapes: what is computed for an episode as of a moment. Views and commands add nothing.

Names carry units and are the JSON keys. Instants are int64 microseconds UTC. None means absent; `reasons`
beside it says why, by field name. NaN never leaves core: it becomes None with a reason.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from core.judgement.derived import FigureInput, OxygenationFigure, VentilationFigure
from core.judgement.response_shapes import ResponseFigure
from core.record.instant import MINUTE, Instant
from core.record.message import Message

Reasons = Mapping[str, Message]
NO_REASONS: Reasons = {}


@dataclass(frozen=True, slots=True)
class SupportFigure:
    """Settings in force and time on the mask."""

    mode: str | None = None
    ipap_cmH2O: float | None = None
    epap_cmH2O: float | None = None
    pressure_support_cmH2O: float | None = None
    fio2: float | None = None
    o2_flow_L_per_min: float | None = None
    rate_set_per_min: float | None = None
    ti_s: float | None = None
    interface: str | None = None
    since: Instant | None = None
    """Support started."""
    ended_at: Instant | None = None
    end_reason: str | None = None
    last_change_at: Instant | None = None
    hours_on_mask: float | None = None
    hours_on_mask_last_24h: float | None = None
    on_mask: bool = False
    break_since: Instant | None = None
    silent_since: Instant | None = None
    """The last entry or sample, where nothing has been logged for longer than the policy allows while support is
    taken to run: the hours since are presumed. None elsewhere."""
    hours_presumed: float | None = None
    """Of `hours_on_mask`, those since then."""
    hours_presumed_last_24h: float | None = None
    reasons: Reasons = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class GasFigure:
    """One blood gas with what is computed from it. `ph_text` keeps the precision as typed."""

    at: Instant
    site: str
    site_assumed: bool = False
    ph: float | None = None
    ph_text: str | None = None
    paco2_mmHg: float | None = None
    paco2_text: str | None = None
    """As typed, with its unit, e.g. "8.3 kPa"."""
    pao2_mmHg: float | None = None
    hco3_mmol_L: float | None = None
    hco3_calculated_mmol_L: float | None = None
    sbe_mmol_L: float | None = None
    be_mmol_L: float | None = None
    lactate_mmol_L: float | None = None
    fio2: float | None = None
    fio2_from: str | None = None
    """"gas", "setting" or "room air off support"."""
    pf_mmHg: float | None = None
    aa_gradient_mmHg: float | None = None
    consistent: bool | None = None
    """Reported actual bicarbonate agrees with pH and PCO2 within 2 mmol/L; None where not checkable."""
    state: str | None = None
    """"severe", "acidotic" or "resolved"; None where pH or site do not allow it."""
    hypercapnic: bool | None = None
    ph_above: float | None = None
    """The upper limit of pH where this one is above it, e.g. 7.45; None elsewhere."""
    off_support: bool = False
    """Drawn with the mask off, too soon after it went on again, or after support ended: it judges nothing."""
    back_on_at: Instant | None = None
    """When the mask had gone on again, where that was too short a time before; None where the mask was off."""
    support_ended: bool = False
    """Drawn after support had ended."""
    doubt: bool = False
    """Holds a value outside what is usual, confirmed or not, or values that cannot belong together: always shown."""
    unconfirmed: bool = False
    """Nobody confirmed a value that its verdict would rest on."""
    implausible: Message | None = None
    """Values that cannot belong together, confirmed or not; None where nothing speaks against them."""
    corrected: bool = False
    disputed: bool = False
    rivals: tuple[tuple[str, str], ...] = ()
    """By channel what else was recorded for its moment, as typed: two values of one gas differ."""
    reasons: Reasons = field(default_factory=dict)
    warnings: tuple[Message, ...] = ()
    ids: tuple[str, ...] = ()
    sao2_percent: float | None = None
    """Saturation as the analyser reports it, of this sample."""
    explanations: tuple[Message, ...] = ()
    """Where the bicarbonate does not belong to the gas: the usual explanations, likeliest first."""
    rule_out: Message | None = None
    """What a venous PCO2 says of arterial hypercapnia; None for other samples."""
    temperature: FigureInput | None = None
    """The patient's, nearest to the gas; None while the policy reports gases uncorrected (the default)."""

    @property
    def back_on_minutes(self) -> int | None:
        """For how many minutes the mask was on again, where that is why it is off support."""
        return None if self.back_on_at is None else (self.at - self.back_on_at) // MINUTE

    @property
    def is_blood_gas(self) -> bool:
        """Whether it holds anything that a gas is judged by: a lone lactate is no baseline and hides no state."""
        return not (self.ph is None and self.paco2_mmHg is None and self.pao2_mmHg is None)

    @property
    def in_doubt(self) -> bool:
        """Too doubtful to call anything better, or to end a flag."""
        return self.unconfirmed or self.implausible is not None or self.disputed


@dataclass(frozen=True, slots=True)
class RatioFigure:
    """P/F, S/F or ROX: the newest value and its robust slope per hour with interval."""

    latest: float | None = None
    at: Instant | None = None
    slope_per_h: float | None = None
    slope_low: float | None = None
    slope_high: float | None = None
    n: int = 0
    span_from: Instant | None = None
    caveat: Message | None = None
    reasons: Reasons = field(default_factory=dict)
    inputs: Mapping[str, FigureInput] = field(default_factory=dict)
    """What the newest value was made from."""
    median_of: tuple[Instant, Instant] | None = None
    """The first and the last of the device's samples whose median the newest value is; None for a single value."""


@dataclass(frozen=True, slots=True)
class LeakFigure:
    """Leak over the chosen span, on 15-min medians."""

    median_L_per_min: float | None = None
    slope_L_per_min_per_h: float | None = None
    slope_low: float | None = None
    slope_high: float | None = None
    minutes_over_limit: float | None = None
    limit_L_per_min: float | None = None
    definition: str | None = None
    reasons: Reasons = field(default_factory=dict)
    latest_L_per_min: float | None = None
    """The median of the 15 min up to the newest device sample, or the newest logged value where it is newer."""
    latest_at: Instant | None = None
    over_since: Instant | None = None
    """Over the limit, sustained, since then and still."""
    adjusted_at: Instant | None = None
    """The newest mask adjustment or change, with the medians of the quarters of an hour before and after it."""
    before_adjustment_L_per_min: float | None = None
    after_adjustment_L_per_min: float | None = None
    probable_breaks: tuple[tuple[Instant, Instant | None], ...] = ()
    """Unlogged breaks that the device's values suggest: start, and end or None while it goes on."""
    median_of: tuple[Instant, Instant] | None = None
    """The first and the last value whose median `median_L_per_min` is; None for a single value."""
    latest_median_of: tuple[Instant, Instant] | None = None
    """The first and the last sample of the newest median; None for a single value."""
    counted: tuple[Instant, Instant] | None = None
    """From when until when the time over the limit was counted: never told without it."""
    minutes_sampled: float | None = None
    """How many minutes of it the device's samples cover; None where there are none: then no minutes are told."""
    readings_typed: int = 0
    """Readings that people typed, of which nobody knows how long they lasted, and how many of them were over."""
    readings_typed_over: int = 0

    @property
    def sampled_in_part(self) -> bool:
        """Whether the device's samples leave more than a quarter of the counted span in the dark."""
        if self.minutes_sampled is None or self.counted is None:
            return False
        return self.minutes_sampled < 0.75 * (self.counted[1] - self.counted[0]) / MINUTE


@dataclass(frozen=True, slots=True)
class ScoreInput:
    """One input of a score: its value, when it was, the points it gave (None where missing).

    `median_of`: the first and the last of the device's samples whose median it is; None for a single value.
    """

    value: float | str | None = None
    at: Instant | None = None
    points: float | None = None
    median_of: tuple[Instant, Instant] | None = None
    reason: Message | None = None
    """Why it is missing though an older value was logged."""


@dataclass(frozen=True, slots=True)
class ScoreFigure:
    """A score. `points` is None when an input is missing; `lowest`/`highest` bound it then."""

    points: float | None = None
    lowest: float | None = None
    highest: float | None = None
    at: Instant | None = None
    missing: tuple[str, ...] = ()
    inputs: Mapping[str, ScoreInput] = field(default_factory=dict)
    population: str | None = None
    """"inside" or "outside" the population it was validated in."""
    enabled: bool = True
    caveat: Message | None = None
    reasons: Reasons = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class FlagFigure:
    """A marker that is or was met. `state`: raised, seen, settled, no longer met."""

    flag_id: str
    marker: str
    group: str
    tier: str
    since: Instant
    evidence: tuple[Message, ...]
    source: str
    sure: str
    policy: str
    ended_at: Instant | None = None
    state: str = "raised"
    strongest: bool = True
    """False where a stronger flag of the same group stands: it is shown under that one."""
    outside_population: bool = False
    seen_by: str | None = None
    seen_at: Instant | None = None
    settled_by: str | None = None
    settled_at: Instant | None = None
    settled_why: str | None = None
    undone_by_correction: bool = False
    detail_sure: str = ""
    """How sure durations, windows and the like are, which the source does not give; "" where it gives them all."""


@dataclass(frozen=True, slots=True)
class DueFigure:
    """Something that should be done by a time. `state`: open, soon, overdue, awaiting result, done."""

    what: str
    because: Message
    due_from: Instant
    due_until: Instant
    state: str
    done_by: str | None = None
    done_at: Instant | None = None
    anchor_at: Instant | None = None


@dataclass(frozen=True, slots=True)
class LeverFigure:
    """Something a qualified person might change: why, the present value, what limits it."""

    key: str
    can_act: bool
    why: tuple[Message, ...] = ()
    present: Message | None = None
    limits: tuple[Message, ...] = ()
    flags: tuple[Message, ...] = ()
    """The open flags about what it acts on, the strongest first: with one of them nobody is told that there is no
    need."""


@dataclass(frozen=True, slots=True)
class ExpectedCO2:
    """PaCO2 to expect after the latest anchor from the ventilation delivered, against what was observed."""

    t: tuple[Instant, ...] = ()
    expected_mmHg: tuple[float, ...] = ()
    low_mmHg: tuple[float, ...] = ()
    high_mmHg: tuple[float, ...] = ()
    observed_at: Instant | None = None
    observed_minus_expected_mmHg: float | None = None
    explanations: tuple[Message, ...] = ()
    assumptions: tuple[Message, ...] = ()
    reasons: Reasons = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Concern:
    """Why an episode is sorted where it is: `rank` 0 is seen first among equals by `order`."""

    rank: int
    """0 escalate, 1 concern, 2 overdue, 3 remark, 4 due soon, 5 quiet, 6 ended."""
    order: float = 0.0
    why: Message | None = None


@dataclass(frozen=True, slots=True)
class NowFigure:
    """How the patient stands, in one place, so that no view can make its own and hide a relapse."""

    state: str | None = None
    """Of the newest arterial or capillary gas with a pH: "severe", "acidotic" or "resolved"."""
    ever_acidotic: bool = False
    """Any arterial or capillary gas of the record was; else "resolved" would tell of what never was."""
    oxygen_failure: bool = False
    """The newest arterial P/F on support is at or below 300 and the newest gas is not acutely hypercapnic."""
    oxygen_failed_before: bool = False
    """The P/F is still at or below 300 in a patient who failed by oxygen alone before CO2 rose too: it stays told."""
    pf_mmHg: float | None = None
    """The newest arterial P/F on support."""
    pf_at: Instant | None = None
    """Its gas, which need not be the newest: it is never shown under another gas's time."""
    headline: str | None = None
    """Of the newest gas that gives one; None without any response."""
    headline_at: Instant | None = None
    """The gas it rests on; None while it waits for one."""
    gain_lost: bool = False
    since_start: str | None = None
    """The newest judging gas against the baseline of the start; None where it cannot be compared."""
    since_start_gain_lost: bool = False
    off_mask_since: Instant | None = None
    last_logged_at: Instant | None = None
    """The newest sample or entry about the patient; facts of the profile and words on flags do not count."""
    spo2_target_low: float | None = None
    spo2_target_high: float | None = None
    """The range in % that SpO2 is judged against: as prescribed, else as the risk calls for."""
    spo2_target_prescribed: bool = False
    spo2_target_since: Instant | None = None
    """When the range became another one since the record began; None where it has always been what it is."""
    spo2_target_before: tuple[float, float] | None = None
    """The range before that; None where it has always been what it is."""
    spo2_target_by_gas: bool = False
    """Nobody prescribed that change: a gas showed hypercapnic risk."""


@dataclass(frozen=True, slots=True)
class EpisodeFigures:
    """Everything computed for one episode as of one moment."""

    episode: str
    as_of: Instant
    label: str = ""
    zone: str = "UTC"
    profile: Mapping[str, float | str | None] = field(default_factory=dict)
    support: SupportFigure = field(default_factory=SupportFigure)
    responses: tuple[ResponseFigure, ...] = ()
    gases: tuple[GasFigure, ...] = ()
    pf: RatioFigure = field(default_factory=RatioFigure)
    sf: RatioFigure = field(default_factory=RatioFigure)
    rox: RatioFigure = field(default_factory=RatioFigure)
    trends: Mapping[str, RatioFigure] = field(default_factory=dict)
    leak: LeakFigure = field(default_factory=LeakFigure)
    scores: Mapping[str, ScoreFigure] = field(default_factory=dict)
    flags: tuple[FlagFigure, ...] = ()
    due: tuple[DueFigure, ...] = ()
    levers: tuple[LeverFigure, ...] = ()
    expected_co2: ExpectedCO2 | None = None
    oxygenation: OxygenationFigure = field(default_factory=OxygenationFigure)
    ventilation: VentilationFigure = field(default_factory=VentilationFigure)
    concern: Concern = field(default_factory=lambda: Concern(5))
    now: NowFigure = field(default_factory=NowFigure)
    warnings: tuple[Message, ...] = ()
    policy_hash: str = ""
