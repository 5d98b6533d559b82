"""Units at the border: what may be typed, and how it becomes the canonical unit of a channel.

Factors are exact by definition (SI) or from the source named beside them; the raw text, unit and decimals
as entered are kept by the entry, so that a conversion never hides what was typed.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass

MMHG_PER_KPA = 7.50062
"""1 kPa = 7.50062 mmHg (conventional millimetre of mercury, 133.322387 Pa; ISO 80000-4)."""
CMH2O_PER_KPA = 10.1972
"""1 kPa = 10.1972 cmH2O (conventional water, 98.0665 Pa)."""


@dataclass(frozen=True, slots=True)
class Unit:
    """A unit that a channel accepts: how it is spelled and how it becomes canonical, and back."""

    name: str
    to_canonical: Callable[[float], float]
    from_canonical: Callable[[float], float]
    spellings: tuple[str, ...] = ()


_WRITTEN = {
    "degC": "\N{DEGREE SIGN}C", "degF": "\N{DEGREE SIGN}F", "pH": "", "points": "", "fraction": "", "y": "years",
}  # fmt: skip


def written(unit: str) -> str:
    """A unit as people write it; none behind a pH, points or a fraction.

    >>> written("degC"), written("points"), written("mmHg")
    ('°C', '', 'mmHg')
    """
    return _WRITTEN.get(unit, unit)


def same(name: str, *spellings: str) -> Unit:
    """The canonical unit itself."""
    return Unit(name, float, float, spellings)


def scaled(name: str, factor: float, *spellings: str) -> Unit:
    """A unit of which one is `factor` canonical units.

    >>> round(scaled("kPa", MMHG_PER_KPA).to_canonical(6.0), 2)
    45.0
    """
    return Unit(name, lambda x: x * factor, lambda x: x / factor, spellings)


def _ph_from_nmol(h: float) -> float:
    from math import log10

    return 9.0 - log10(h) if h > 0 else float("nan")


def _nmol_from_ph(ph: float) -> float:
    return float(10.0 ** (9.0 - ph))


CMH2O = (same("cmH2O", "cmh2o", "cm h2o", "cmh20"), scaled("hPa", CMH2O_PER_KPA / 10.0, "hpa", "mbar"))
MMHG_GAS = (same("mmHg", "mmhg", "torr"), scaled("kPa", MMHG_PER_KPA, "kpa"))
MMHG_BLOOD = (same("mmHg", "mmhg"),)
FRACTION = (same("fraction", ""), scaled("%", 0.01, "percent", "pct"))
PERCENT = (same("%", "percent", "pct", ""),)
PER_MIN = (same("/min", "bpm", "per min", "1/min", "min-1", ""),)
L_PER_MIN = (same("L/min", "l/min", "lpm", "l"), scaled("mL/min", 0.001, "ml/min"))
ML = (same("mL", "ml"), scaled("L", 1000.0, "l"))
MMOL_L = (same("mmol/L", "mmol/l", "meq/l", ""),)
PH = (same("pH", "ph", ""), Unit("nmol/L", _ph_from_nmol, _nmol_from_ph, ("nmol/l", "nmol")))
SECONDS = (same("s", "sec", ""), scaled("ms", 0.001))
CENTIMETRE = (same("cm", ""), scaled("m", 100.0))
KILOGRAM = (same("kg", ""), scaled("lb", 0.45359237, "lbs"))
CELSIUS = (
    same("degC", "c", "°c", "cel", ""),
    Unit("degF", lambda f: (f - 32.0) / 1.8, lambda c: c * 1.8 + 32.0, ("f", "°f")),
)
G_L = (same("g/L", "g/l"), scaled("g/dL", 10.0, "g/dl"))
YEARS = (same("y", "years", "yr", ""),)
POINTS = (same("points", "", "score", "{score}"),)
