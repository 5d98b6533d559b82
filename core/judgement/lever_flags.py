"""What each marker is about, as levers see it: no lever may say that there is no need while a flag about what it acts
on is open.

A lever looks at the newest values, a flag at a spell of them, at gases drawn off support or at scores: where they
differ, the flag is named. It asks to be looked at; it does not say which way to turn the lever.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from types import MappingProxyType
from typing import Final

from core.judgement.flags import open_flags
from core.judgement.shapes import FlagFigure
from core.record.message import Message

_CO2: Final = ("time_on_mask", "pressure_support", "backup_rate", "inspiratory_time")
"""They move pH and PaCO2."""
_OXYGEN: Final = ("fio2", "epap")
_PRESSURES: Final = ("pressure_support", "epap")
_EFFORT: Final = ("secretions", "pressure_support")
"""A fast rate: asynchrony and secretions, or too little support."""
_TIRING: Final = ("secretions", *_CO2)
_DROWSY: Final = ("secretions",)
"""Sedation. Where CO2 is behind it, its own markers say so."""
_COMFORT: Final = ("mask", "secretions", "time_on_mask")
NONE: Final = ()

ACTS_ON: Final[Mapping[str, tuple[str, ...]]] = MappingProxyType({
    "acidosis_off_support": _CO2,
    "gain_lost": _CO2,
    "hdu_criterion": _CO2,
    "late_failure": _CO2,
    "no_gain_after_hours": _CO2,
    "paco2_rising": _CO2,
    "ph_720_725_twice": _CO2,
    "ph_below_715": _CO2,
    "ph_below_715_before_support": _CO2,
    "ph_below_720_on_support": _CO2,
    "ph_below_severe": _CO2,
    "ph_not_better": _CO2,
    "ph_not_better_settling": _CO2,
    "ph_not_better_severe": _CO2,
    "too_little_support": ("pressure_support",),
    "venous_ph_below_severe": _CO2,
    "fio2_need_rising": _OXYGEN,
    "hacor_8_or_more": _OXYGEN,
    "hacor_above_5": _OXYGEN,
    "hacor_above_5_later": _OXYGEN,
    "hacor_updated_above_10_5": _OXYGEN,
    "oxygen_gain_lost": _OXYGEN,
    "pao2_below_45": _OXYGEN,
    "pao2_below_45_on_highest_oxygen": _OXYGEN,
    "pao2_below_60": _OXYGEN,
    "pf_below_150_ards": _OXYGEN,
    "pf_low_at_1h": _OXYGEN,
    "sf_below_985": _OXYGEN,
    "spo2_below_range": _OXYGEN,
    "spo2_deep": _OXYGEN,
    "spo2_fall_after_pressure": ("fio2", *_PRESSURES),
    "over_oxygenation": ("fio2",),
    "over_oxygenation_far": ("fio2",),
    "spo2_above_range": ("fio2",),
    "rate_below_12_drowsy": _TIRING,
    "rate_falling_worse_gas": _TIRING,
    "rate_falling_worse_gcs": _TIRING,
    "rr_above_25": _EFFORT,
    "rr_above_30": _EFFORT,
    "rr_above_35": _EFFORT,
    "backup_takeover": ("secretions", "backup_rate"),
    "vt_high_hypoxaemic": ("pressure_support",),
    "apnoea": ("secretions", "backup_rate"),
    "gcs_below_11": _DROWSY,
    "gcs_below_8": _DROWSY,
    "gcs_fall": _DROWSY,
    "new_confusion": _DROWSY,
    "leak_large": ("mask",),
    "leak_over_limit": ("mask",),
    "vt_not_trusted": ("mask",),
    "agitation": ("mask", "secretions"),
    "intolerance": _COMFORT,
    "not_tolerated": _COMFORT,
    "vomiting": ("mask", "secretions"),
    "sbp_fall_after_pressure": _PRESSURES,
    "undrained_pneumothorax": _PRESSURES,
    "arrest": NONE,
    "gas_overdue": NONE,
    "lactate_above_2": NONE,
    "lactate_above_4": NONE,
    "lactate_rising": NONE,
    "news2_rise": NONE,
    "sbp_below_90": NONE,
    "skin_check_overdue": NONE,
    "weaning_ready": NONE,
})  # fmt: skip
"""The levers that act on what a marker is about; none where it is about no single lever. Every marker stands here."""


def flags_on(lever: str, flags: Iterable[FlagFigure]) -> tuple[Message, ...]:
    """The open flags about what a lever acts on, the strongest first; of several limits of one quantity that one."""
    named: dict[str, Message] = {}
    for f in open_flags(flags):
        if lever in ACTS_ON.get(f.marker, NONE):
            named.setdefault(_quantity(f.marker), Message("lever.flag_open", {"marker": f.marker, "since": f.since}))
    return tuple(named.values())


def _quantity(marker: str) -> str:
    """What markers of one quantity at several limits share: their name before the number.

    >>> _quantity("rr_above_35"), _quantity("rr_above_30"), _quantity("paco2_rising")
    ('rr_above', 'rr_above', 'paco2_rising')
    """
    return re.split(r"_\d", marker)[0]
