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
    co2,
    consciousness,
    mask,
    not_better,
    oxygenation,
    saturation,
    scores,
    timing,
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
LEAK: Final = frozenset({"leak", "leak_definition", "rr_total", "vte", "mv"})


@dataclass(frozen=True, slots=True)
class Marker:
    """One marker. `channels` are what it reads; `after_end`: it outlives the end of support."""

    key: str
    find: Find
    channels: frozenset[str]
    after_end: bool = False


def _of(find: Find, channels: frozenset[str], after_end: bool = False) -> Marker:
    return Marker(find.__name__, find, channels, after_end)


_JUDGED = GAS | SUPPORT | RATE | {"spo2"}
_ALL = (
    _of(acidosis.ph_below_715, GAS | SUPPORT),
    _of(acidosis.ph_below_720_on_support, GAS | SUPPORT),
    _of(acidosis.ph_720_725_twice, GAS | SUPPORT),
    _of(not_better.ph_not_better_severe, _JUDGED | {"gcs"}),
    _of(acidosis.ph_below_715_before_support, GAS | SUPPORT),
    _of(acidosis.ph_below_severe, GAS | SUPPORT),
    _of(not_better.hdu_criterion, _JUDGED | {"gcs"}),
    _of(not_better.ph_not_better, _JUDGED | {"gcs"}),
    _of(co2.paco2_rising, _JUDGED | {"usual_paco2"}),
    _of(not_better.ph_not_better_settling, _JUDGED | {"gcs"}),
    _of(oxygenation.pf_low_at_1h, GAS | SUPPORT | {"indication"}),
    _of(scores.hacor_above_5, _JUDGED | {"gcs", "hr", "indication"}),
    _of(saturation.spo2_deep, RANGE),
    _of(saturation.spo2_below_range, RANGE),
    _of(saturation.over_oxygenation, RANGE | SUPPORT),
    _of(saturation.spo2_above_range, RANGE | SUPPORT),
    _of(consciousness.gcs_fall, frozenset({"gcs"})),
    _of(mask.leak_large, LEAK | SUPPORT),
    _of(mask.leak_over_limit, LEAK | SUPPORT),
    _of(timing.gas_overdue, _JUDGED | {"gas_sent", "ceiling_of_care", "indication", "target_spo2_high"}),
    _of(timing.skin_check_overdue, SUPPORT | {"skin_check"}),
)
MARKERS: Final[Mapping[str, Marker]] = MappingProxyType({m.key: m for m in _ALL})
"""In order of strength: of two flags of one group and tier, the earlier one here is the stronger."""

ORDER: Final[Mapping[str, int]] = MappingProxyType({m.key: i for i, m in enumerate(_ALL)})


def marker_keys() -> tuple[str, ...]:
    """The key of every marker; its name stands in `marker.<key>`."""
    return tuple(MARKERS)
