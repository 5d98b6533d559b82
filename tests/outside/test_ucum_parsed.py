"""UCUM codes as a parser of UCUM reads them (ucumvert, on pint): grammar and factor of every code we take or write.

Source: The Unified Code for Units of Measure (ucum.org), as the library ucumvert carries its grammar and units. In
`test_ucum_factors.py` the names beside the codes were written by hand; here nothing is.
"""

from __future__ import annotations

import pytest

from core.record.channels import CHANNELS
from storage.codes import UNITS, ucum_of, unit_of_ucum

ucumvert = pytest.importorskip("ucumvert")
UREG = ucumvert.PintUcumRegistry()
LOGARITHMIC = {"[pH]"}
"""A special unit of UCUM that pint does not have: pH, the logarithm of a concentration."""
PAIRS = sorted(
    (c.key, code) for c in CHANNELS.values() for code in UNITS
    if code not in LOGARITHMIC and c.unit not in ("pH", "points") and unit_of_ucum(c, code)
)  # fmt: skip


@pytest.mark.parametrize("code", sorted(set(UNITS) - LOGARITHMIC))
def test_every_code_is_ucum(code: str) -> None:
    UREG.from_ucum(code)


def test_codes_we_write_are_ones_we_take() -> None:
    written = {ucum_of(unit.name) for c in CHANNELS.values() for unit in c.units} - {""}
    assert written <= set(UNITS)
    assert len(PAIRS) > 60


@pytest.mark.parametrize(("key", "code"), PAIRS)
def test_factor(key: str, code: str) -> None:
    channel = CHANNELS[key]
    unit = unit_of_ucum(channel, code)
    assert unit is not None
    canonical = UREG.from_ucum(ucum_of(channel.unit) or "1")
    for typed in (1.0, 36.6, 250.0):
        expected = UREG.Quantity(typed, UREG.from_ucum(code).units).to(canonical.units).magnitude
        assert unit.to_canonical(typed) == pytest.approx(expected, rel=2e-5)


@pytest.mark.parametrize("code", ["{breaths}/min", "{beats}/min", "{counts}/min", "/min{counted}"])
def test_remarks_in_braces_change_nothing(code: str) -> None:
    assert UREG.from_ucum(code).to("1/min").magnitude == pytest.approx(1.0)
    found = unit_of_ucum(CHANNELS["rr"], code)
    assert found is not None
    assert found.name == "/min"


@pytest.mark.parametrize("code", ["mm(Hg)", "mmHG", "kPA", "cmH2O", "l/Min", "degC"])
def test_what_is_no_ucum_is_taken_by_neither(code: str) -> None:
    with pytest.raises(Exception):  # noqa: B017, PT011 - the parser has several of its own
        UREG.from_ucum(code)
    assert all(unit_of_ucum(c, code) is None for c in CHANNELS.values())
