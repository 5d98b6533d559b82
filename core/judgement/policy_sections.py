"""The sections of a policy, as types. A number that judges is a `Limit` and names its source."""

from __future__ import annotations

from typing import Literal

import msgspec

Sure = Literal["confirmed", "secondary", "from memory", "computed here", "common practice"]
Tier = Literal["remark", "concern", "escalate"]


class Limit(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    """One number of the policy. `kpa` is the printed kPa form of a pressure given in mmHg."""

    value: float
    source: str
    sure: Sure
    kpa: float | None = None


class _Section(msgspec.Struct, frozen=True, forbid_unknown_fields=True, kw_only=True):
    pass


class ResponseRules(_Section, frozen=True, forbid_unknown_fields=True, kw_only=True):
    """When a gas judges an anchor. Minutes unless the name says otherwise."""

    window_from_min: Limit
    window_to_min: Limit
    chain_gap_min: Limit
    chain_span_min: Limit
    undone_within_min: Limit
    baseline_age_start_h: Limit
    baseline_age_change_h: Limit
    break_is_anchor_min: Limit
    off_support_after_break_min: Limit
    one_hour_from_min: Limit
    one_hour_to_min: Limit
    one_to_two_hours_from_min: Limit
    one_to_two_hours_to_min: Limit
    restart_within_h: Limit


class Noise(_Section, frozen=True, forbid_unknown_fields=True, kw_only=True):
    """Changes between two values that measurement alone can make, 95 %."""

    ph: Limit
    paco2_mmHg: Limit
    paco2_fraction: Limit
    pao2_fraction: Limit
    rr_counted: Limit
    rr_device: Limit
    spo2: Limit


class StateRules(_Section, frozen=True, forbid_unknown_fields=True, kw_only=True):
    """States of a gas and the two kinds of failure."""

    severe_below_ph: Limit
    acidotic_below_ph: Limit
    alkalotic_above_ph: Limit
    hypercapnia_mmHg: Limit
    hypoxaemia_pf_mmHg: Limit
    consistent_within_mmol_L: Limit
    bicarbonate_least_mmol_L: Limit = Limit(8.0, "A bicarbonate by pH and PCO2 hardly ever seen", "common practice")
    bicarbonate_most_mmol_L: Limit = Limit(60.0, "A bicarbonate by pH and PCO2 hardly ever seen", "common practice")
    reported_bicarbonate: Literal["actual", "standard"]
    temperature_correction: bool = False
    """Show gases at the patient's temperature beside the values as measured at 37 degC, which alone judge."""


class OxygenRules(_Section, frozen=True, forbid_unknown_fields=True, kw_only=True):
    """Targets, and when oxygen figures are known."""

    target_low: Limit
    target_high: Limit
    risk_target_low: Limit
    risk_target_high: Limit
    no_sf_above_spo2: Limit
    fio2_same_within: Limit
    steady_fio2_min: Limit


class Freshness(_Section, frozen=True, forbid_unknown_fields=True, kw_only=True):
    """How far an input may lie from the moment it is used for, in minutes.

    Each input of a score has its own; `vitals_min` is for vitals that verdicts and markers set beside a gas.
    """

    vitals_min: Limit
    hr_min: Limit
    rr_min: Limit
    spo2_min: Limit
    sbp_min: Limit
    temp_min: Limit
    gcs_min: Limit
    acvpu_min: Limit
    silence_h: Limit = Limit(12.0, "Support that nobody has written about for so long is presumed", "common practice")
    """Hours without any entry or sample after which time on the mask is presumed, no longer known."""

    def of(self, channel: str) -> float:
        """The minutes allowed for one input of a score; KeyError for a channel that no score takes."""
        limits = {
            "hr": self.hr_min, "rr": self.rr_min, "spo2": self.spo2_min, "sbp": self.sbp_min,
            "temp": self.temp_min, "gcs": self.gcs_min, "acvpu": self.acvpu_min,
        }  # fmt: skip
        return limits[channel].value


class TrendRules(_Section, frozen=True, forbid_unknown_fields=True, kw_only=True):
    """Spans for robust slopes."""

    span_h: Limit
    device_median_min: Limit
    few_points: Limit
    confidence: Limit


class LeakRules(_Section, frozen=True, forbid_unknown_fields=True, kw_only=True):
    """Leak limits by its definition. A total leak's limit adds the port's own leak at the mean pressure."""

    unintentional_limit_L_per_min: Limit
    act_limit_L_per_min: Limit
    port_L_per_min_per_sqrt_cmH2O: Limit
    over_minutes: Limit
    of_minutes: Limit
    device_ceiling_L_per_min: Limit
    no_breath_min: Limit
    doubt_tidal_volume_above_L_per_min: Limit


class ScoreRules(_Section, frozen=True, forbid_unknown_fields=True, kw_only=True):
    """Which scores are on."""

    hacor_updated: bool


class Levers(_Section, frozen=True, forbid_unknown_fields=True, kw_only=True):
    """Limits of settings that a qualified person reviews before going past."""

    review_ipap_cmH2O: Limit
    review_epap_cmH2O: Limit
    vt_ml_per_kg: Limit
    port_clears_from_cmH2O: Limit
    mask_share_low: Limit
    rate_in_reach_per_min: Limit
    review_ti_s: Limit
    epap_pf_mmHg: Limit


class StartClocks(_Section, frozen=True, forbid_unknown_fields=True, kw_only=True):
    """Times to the start of support that shift figures are audited by, in minutes; nothing is judged by them."""

    gas_to_start_min: Limit
    decision_to_start_min: Limit
    arrival_to_start_min: Limit


class EntryRules(_Section, frozen=True, forbid_unknown_fields=True, kw_only=True):
    """When a gas at entry is so unlike the nearest of this patient that it is asked about; it judges nothing."""

    unlike_ph_by: Limit
    unlike_paco2_by_mmHg: Limit
    unlike_bicarbonate_by_mmol_L: Limit
    unlike_within_h: Limit


class PressureLimit(msgspec.Struct, frozen=True, forbid_unknown_fields=True):
    """A gas pressure in both printed forms, e.g. 45 mmHg and 6.0 kPa. The kPa form decides, in tenths."""

    mmHg: float
    kpa: float


Population = Literal[
    "any",
    "on support",
    "acute hypercapnia",
    "hypercapnic copd",
    "hypoxaemic, not hypercapnic",
    "moderate ards",
    "hypercapnic risk",
    "not neuromuscular or obesity hypoventilation",
]
"""Whom a marker was validated in, or is meant for; `markers.population` decides who is inside."""


class MarkerRule(_Section, frozen=True, forbid_unknown_fields=True, kw_only=True):
    """One marker: whether it is on, how strong, in which group, whom it was validated in, and its numbers.

    `outside`: what happens outside the population: silent, or a remark that says so. `gap_min`: met again within
    so many minutes is the same flag. `stale_min`: what an open flag rests on is stale when older, and says so.
    `sure`: how sure the limit of the source is. `detail_sure`: how sure the numbers are that the source does not
    give (for how long, within which window, what clears it); None where it gives them all.
    `limits` are plain numbers (their names carry the unit), `pressures` gas pressures in both forms.
    """

    on: bool = True
    tier: Tier
    group: str
    population: Population
    outside: Literal["silent", "remark"] = "silent"
    gap_min: float = 0.0
    stale_min: float = 360.0
    source: str
    sure: Sure
    detail_sure: Sure | None = None
    limits: dict[str, float] = {}
    pressures: dict[str, PressureLimit] = {}


class DueRule(_Section, frozen=True, forbid_unknown_fields=True, kw_only=True):
    """One due item: from and until in minutes after what brings it, and when it counts as soon."""

    on: bool = True
    from_min: float
    until_min: float
    soon_min: float = 15.0
    source: str
    sure: Sure
    limits: dict[str, float] = {}
