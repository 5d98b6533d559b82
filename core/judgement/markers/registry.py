"""Every marker by its key: the function that finds its spells, and the channels it reads.

To add a marker: write its function, add a line here and its rule to `policy.toml`; the tests of the registry hold
both to each other.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import Final

from core.judgement.markers import (
    acidosis,
    breathing,
    circulation,
    co2,
    consciousness,
    contraindications,
    mask,
    news2_course,
    not_better,
    oxygenation,
    saturation,
    scores,
    tidal_volume,
    timing,
    tolerance,
)
from core.judgement.markers.observed import Observed
from core.judgement.markers.spells import Spell
from core.judgement.policy_sections import MarkerRule

Find = Callable[[Observed, MarkerRule], Iterable[Spell]]
GAS: Final = frozenset({"ph", "paco2", "pao2", "site", "gas_fio2"})
SUPPORT: Final = frozenset(
    {"mode", "ipap", "epap", "cpap", "fio2", "o2_flow", "rate_set", "ti", "interface", "started_at", "ended_at",
     "mask_on", "mask_off", "break_start", "break_end", "stopped", "intubated", "arrest"}
)  # fmt: skip
RANGE: Final = frozenset({"spo2", "target_spo2_low", "target_spo2_high", "indication", "paco2"})
RATE: Final = frozenset({"rr", "rr_total"})
RISK_FACTS: Final = frozenset({"sofa", "pneumonia", "pulmonary_ards", "immunosuppression", "septic_shock"})
LEAK: Final = frozenset({"leak", "leak_definition", "rr_total", "vte", "mv"})


@dataclass(frozen=True, slots=True)
class Marker:
    """One marker. `channels` are what it reads; `after_end`: it outlives the end of support.
    `judges_population`: it asks at each gas itself; else the population is asked where a spell begins."""

    key: str
    find: Find
    channels: frozenset[str]
    after_end: bool = False
    judges_population: bool = False


def _of(find: Find, channels: frozenset[str], after_end: bool = False, asks: bool = False) -> Marker:
    return Marker(find.__name__, find, channels, after_end, asks)


JUDGED: Final = GAS | SUPPORT | RATE | {"spo2"}
_ALL = (
    _of(circulation.arrest, frozenset({"arrest", "mask_on"}) | SUPPORT, after_end=True),
    _of(acidosis.ph_below_715, GAS | SUPPORT),
    _of(acidosis.ph_below_720_on_support, GAS | SUPPORT),
    _of(acidosis.ph_720_725_twice, GAS | SUPPORT),
    _of(not_better.ph_not_better_severe, JUDGED | {"gcs"}),
    _of(not_better.no_gain_after_hours, JUDGED | {"support_reason", "indication"}),
    _of(not_better.late_failure, GAS | SUPPORT),
    _of(consciousness.gcs_below_8, frozenset({"gcs"})),
    _of(contraindications.apnoea, frozenset({"apnoea"}) | SUPPORT),
    _of(consciousness.rate_below_12_drowsy, frozenset({"rr", "gcs", "acvpu"})),
    _of(co2.rate_falling_worse_gas, JUDGED),
    _of(oxygenation.pao2_below_45_on_highest_oxygen, GAS | SUPPORT),
    _of(scores.hacor_8_or_more, JUDGED | {"gcs", "hr", "indication"}, asks=True),
    _of(scores.hacor_above_5, JUDGED | {"gcs", "hr", "indication"}, asks=True),
    _of(oxygenation.pf_low_at_1h, GAS | SUPPORT | {"indication"}, asks=True),
    _of(circulation.spo2_fall_after_pressure, RANGE | SUPPORT | LEAK),
    _of(contraindications.undrained_pneumothorax, frozenset({"pneumothorax"})),
    _of(acidosis.ph_below_severe, GAS | SUPPORT),
    _of(acidosis.venous_ph_below_severe, GAS),
    _of(not_better.hdu_criterion, JUDGED | {"gcs"}),
    _of(not_better.ph_not_better, JUDGED | {"gcs"}),
    _of(co2.paco2_rising, JUDGED | {"usual_paco2"}),
    _of(not_better.gain_lost, JUDGED),
    _of(not_better.oxygen_gain_lost, JUDGED),
    _of(acidosis.acidosis_off_support, GAS | SUPPORT),
    _of(not_better.too_little_support, GAS | SUPPORT | {"support_reason", "indication"}, asks=True),
    _of(acidosis.ph_below_715_before_support, GAS | SUPPORT),
    _of(consciousness.gcs_below_11, frozenset({"gcs"})),
    _of(consciousness.gcs_fall, frozenset({"gcs"})),
    _of(consciousness.new_confusion, frozenset({"acvpu"})),
    _of(consciousness.rate_falling_worse_gcs, frozenset({"rr", "gcs"})),
    _of(breathing.rr_above_35, RATE | SUPPORT | LEAK),
    _of(breathing.rr_above_30, RATE | SUPPORT | LEAK),
    _of(breathing.backup_takeover, JUDGED | LEAK | {"spont_percent", "gcs", "indication"}, asks=True),
    _of(tidal_volume.vt_high_hypoxaemic, JUDGED | LEAK | {"height", "sex", "indication"}, asks=True),
    _of(oxygenation.pao2_below_45, GAS),
    _of(saturation.spo2_deep, RANGE),
    _of(oxygenation.pf_below_150_ards, GAS | SUPPORT | {"indication", "pulmonary_ards"}, asks=True),
    _of(oxygenation.sf_below_985, GAS | SUPPORT | RANGE | LEAK, asks=True),
    _of(oxygenation.fio2_need_rising, SUPPORT | RANGE),
    _of(scores.hacor_above_5_later, JUDGED | {"gcs", "hr", "indication"}, asks=True),
    _of(scores.hacor_updated_above_10_5, JUDGED | RISK_FACTS | {"gcs", "hr", "indication"}, asks=True),
    _of(saturation.spo2_below_range, RANGE),
    _of(saturation.over_oxygenation_far, RANGE | SUPPORT),
    _of(circulation.sbp_below_90, frozenset({"sbp"})),
    _of(circulation.lactate_above_4, GAS | {"lactate", "drug"}),
    _of(circulation.sbp_fall_after_pressure, SUPPORT | {"sbp"}),
    _of(circulation.lactate_rising, GAS | {"lactate", "drug"}),
    _of(mask.leak_large, LEAK | SUPPORT),
    _of(mask.leak_over_limit, LEAK | SUPPORT),
    _of(tolerance.intolerance, GAS | SUPPORT),
    _of(tolerance.not_tolerated, frozenset({"comfort"})),
    _of(contraindications.vomiting, frozenset({"vomiting"}) | SUPPORT),
    _of(contraindications.agitation, frozenset({"agitation"}) | SUPPORT),
    _of(timing.gas_overdue, JUDGED | {"gas_sent", "ceiling_of_care", "indication", "target_spo2_high"}),
    _of(not_better.ph_not_better_settling, JUDGED | {"gcs"}),
    _of(breathing.rr_above_25, RATE | SUPPORT | LEAK),
    _of(news2_course.news2_rise, frozenset({"rr", "spo2", "hr", "sbp", "temp", "acvpu", "spo2_scale"}) | SUPPORT),
    _of(oxygenation.pao2_below_60, GAS),
    _of(saturation.over_oxygenation, RANGE | SUPPORT),
    _of(saturation.spo2_above_range, RANGE | SUPPORT),
    _of(circulation.lactate_above_2, GAS | {"lactate", "drug"}),
    _of(tidal_volume.vt_not_trusted, LEAK | SUPPORT),
    _of(timing.skin_check_overdue, SUPPORT | {"skin_check"}),
    _of(tolerance.weaning_ready, JUDGED | RANGE),
)
MARKERS: Final[Mapping[str, Marker]] = MappingProxyType({m.key: m for m in _ALL})
"""In order of strength: of two flags of one group and tier, the earlier one here is the stronger."""

ABSOLUTE: Final = frozenset(
    {"ph_below_severe", "venous_ph_below_severe", "acidosis_off_support", "pao2_below_60", "pao2_below_45",
     "pao2_below_45_on_highest_oxygen", "gcs_below_8", "gcs_below_11"}
)  # fmt: skip
"""Markers of one value by itself (rules of judgement 6.1): they fire on what comes after support was stopped, too."""

ORDER: Final[Mapping[str, int]] = MappingProxyType({m.key: i for i, m in enumerate(_ALL)})


GROUPS: Final = ("acidosis", "oxygen", "consciousness", "breathing", "circulation", "mask", "contraindication",
                 "timing", "weaning")  # fmt: skip
"""What flags are about; the name of each stands in `group.<key>`."""


def marker_keys() -> tuple[str, ...]:
    """The key of every marker; its name stands in `marker.<key>`."""
    return tuple(MARKERS)
