"""UCUM codes against a general units library (pint): each code means the unit that we take it for.

Source of codes: The Unified Code for Units of Measure (ucum.org). Pint's names are written beside each code by hand.
"""

from __future__ import annotations

import pint
import pytest

from core.record.channels import CHANNELS
from storage.codes import UNITS, unit_of_ucum

UREG = pint.UnitRegistry()
BY_CODE = {
    "mm[Hg]": "mmHg",
    "kPa": "kPa",
    "cm[H2O]": "cmH2O",
    "hPa": "hPa",
    "mbar": "millibar",
    "%": "percent",
    "1": "dimensionless",
    "/min": "1/minute",
    "L/min": "liter/minute",
    "l/min": "liter/minute",
    "mL/min": "milliliter/minute",
    "ml/min": "milliliter/minute",
    "mL": "milliliter",
    "ml": "milliliter",
    "L": "liter",
    "l": "liter",
    "mmol/L": "millimole/liter",
    "mmol/l": "millimole/liter",
    "s": "second",
    "ms": "millisecond",
    "cm": "centimeter",
    "m": "meter",
    "kg": "kilogram",
    "[lb_av]": "pound",
    "Cel": "degC",
    "[degF]": "degF",
    "g/L": "gram/liter",
    "g/l": "gram/liter",
    "g/dL": "gram/deciliter",
    "g/dl": "gram/deciliter",
    "a": "year",
}
WITHOUT = {"[pH]", "{score}", "meq/L", "nmol/L", "nmol/l"}
"""No unit of pint: a logarithm, a count, and ions of one charge; nmol/L of H+ becomes pH by a logarithm."""
PAIRS = sorted(
    (c.key, code)
    for c in CHANNELS.values()
    for code in BY_CODE
    if unit_of_ucum(c, code) and c.unit not in ("pH", "points")
)


def test_every_code_is_covered() -> None:
    assert set(UNITS) == set(BY_CODE) | WITHOUT
    assert len(PAIRS) > 60


@pytest.mark.parametrize(("key", "code"), PAIRS)
def test_factor(key: str, code: str) -> None:
    channel = CHANNELS[key]
    unit = unit_of_ucum(channel, code)
    assert unit is not None
    canonical = next(c for c, name in UNITS.items() if name == channel.unit)
    for typed in (1.0, 36.6, 250.0):
        expected = UREG.Quantity(typed, BY_CODE[code]).to(BY_CODE[canonical]).magnitude
        assert unit.to_canonical(typed) == pytest.approx(expected, rel=2e-5)


@pytest.mark.parametrize("code", ["mm(Hg)", "mmhg", "KPA", "cmH2O", "psi", "MM[HG]", "ML", "mmol", "{breaths}"])
def test_what_is_no_code_of_a_unit_is_not_taken(code: str) -> None:
    """UCUM's case-sensitive codes count; a look-alike is no code."""
    assert unit_of_ucum(CHANNELS["paco2"], code) is None


def test_remarks_in_braces_are_no_units() -> None:
    for code in ("{breaths}/min", "/min", "{counts}/min"):
        found = unit_of_ucum(CHANNELS["rr"], code)
        assert found is not None
        assert found.name == "/min"
