"""Where each input of a formula makes sense, by the input's name. The channel registry is the source.

One name means one quantity in one unit in the whole room: `paco2` is always mmHg, `fio2` always a fraction.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, replace
from types import MappingProxyType

from core.physiology.constants import SPO2_CEILING
from core.record.channels import CHANNELS


@dataclass(frozen=True, slots=True)
class Domain:
    """The closed range `low`..`high` of an input or a result, and the message keys of what lies outside."""

    unit: str
    low: float
    high: float
    too_low: str = "undefined.outside"
    too_high: str = "undefined.outside"
    missing: str = "undefined.missing"

    def holds(self, value: float) -> bool:
        """Whether a value lies inside; NaN never does."""
        return self.low <= value <= self.high


def of_channel(key: str) -> Domain:
    """The hard limits of a channel, with the slack that its intake allows for a unit's rounding.

    >>> of_channel("paco2").holds(250.0), of_channel("paco2").holds(251.0)
    (True, False)
    """
    found = CHANNELS[key]
    if found.hard is None:
        raise ValueError(f"channel {key!r} has no hard limits, so it cannot bound a formula")
    low, high = found.hard
    slack = 1e-9 * max(1.0, abs(high))
    return Domain(found.unit, low - slack, high + slack)


PRESSURE_CO2 = of_channel("paco2")
FIO2 = replace(of_channel("fio2"), missing="undefined.fio2_unknown")
ON_AIR = replace(FIO2, low=0.205, high=0.215, too_low="undefined.air_only", too_high="undefined.air_only")
SPO2_BELOW_CEILING = replace(of_channel("spo2"), high=SPO2_CEILING, too_high="undefined.spo2_above_97")
BREATHING = replace(of_channel("rr"), low=1.0, too_low="undefined.no_breaths")
MEASURED_VOLUME = replace(of_channel("vte"), low=1.0, too_low="undefined.no_volume")
ADULT_HEIGHT = replace(of_channel("height"), low=130.0, too_low="undefined.height_below_formula")
UNSATURATED = Domain("%", 0.1, 99.9, too_high="undefined.fully_saturated")

_CHANNEL_NAMES = (
    "ph", "paco2", "pao2", "hco3", "spo2", "sao2", "hb", "age", "temp", "hr",
    "mv", "leak", "ti", "ipap", "epap", "weight",
)  # fmt: skip

DOMAINS: Mapping[str, Domain] = MappingProxyType(
    {
        **{name: of_channel(name) for name in _CHANNEL_NAMES},
        "fio2": FIO2,
        "rr": BREATHING,
        "vte": MEASURED_VOLUME,
        "height": ADULT_HEIGHT,
        "pvco2": PRESSURE_CO2,
        "wished_paco2": PRESSURE_CO2,
        "start_paco2": PRESSURE_CO2,
        "steady_paco2": Domain("mmHg", 1.0, 1000.0),
        "solubility": Domain("mmol/L/mmHg", 0.029, 0.0315),
        "barometric": Domain("mmHg", 350.0, 900.0),
        "rq": Domain("", 0.6, 1.3),
        "hydrogen_ion": Domain("nmol/L", 9.99, 317.0),
        "store": Domain("mL/kg/mmHg", 0.1, 10.0),
        "expected_gain": Domain("mmol/L/mmHg", 0.0, 1.0),
        "paw_mean": Domain("cmH2O", 0.0, 60.0),
        "pf": Domain("mmHg", 1.0, 5000.0, missing="undefined.pf_unknown"),
        "sf": Domain("", 1.0, 500.0, missing="undefined.sf_unknown"),
        "pbw": Domain("kg", 20.0, 160.0, missing="undefined.pbw_unknown"),
        "base_pbw": Domain("kg", 40.0, 60.0, missing="undefined.sex_unknown"),
        "vco2": Domain("mL/min", 20.0, 2000.0),
        "va": Domain("L/min", 0.1, 80.0),
        "va_after": Domain("L/min", 0.1, 80.0),
        "dead_space": Domain("mL", 0.0, 1000.0),
        "minutes": Domain("min", 0.0, 100_000.0),
        "half_time": Domain("min", 0.1, 1000.0),
        "pressure": Domain("cmH2O", 0.0, 60.0),
        "port_constant": Domain("L/min per sqrt(cmH2O)", 0.0, 30.0, missing="undefined.port_unknown"),
    }
)
