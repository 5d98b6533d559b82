"""Conversions at the border and in the formulas against a general units library (pint)."""

import pint
import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.physiology import acid_base, constants
from core.physiology.pressure import tenths_of_kpa
from core.record.channels import CHANNELS

UREG = pint.UnitRegistry()
PINT_NAMES = {
    "mmHg": "mmHg", "kPa": "kPa", "cmH2O": "cmH2O", "hPa": "hPa", "L/min": "L/min", "mL/min": "mL/min",
    "mL": "mL", "L": "L", "s": "s", "ms": "ms", "cm": "cm", "m": "m", "kg": "kg", "lb": "lb",
    "g/L": "g/L", "g/dL": "g/dL", "degC": "degC", "degF": "degF", "fraction": "dimensionless", "%": "percent",
}  # fmt: skip
PAIRS = sorted(
    {
        (channel.key, unit.name)
        for channel in CHANNELS.values()
        for unit in channel.units[1:]
        if channel.unit in PINT_NAMES and unit.name in PINT_NAMES
    }
)


def test_most_conversions_are_covered() -> None:
    assert len(PAIRS) >= 15
    left = {u.name for c in CHANNELS.values() for u in c.units[1:]} - set(PINT_NAMES)
    assert left <= {"nmol/L"}, "a new unit needs its line in PINT_NAMES"


@pytest.mark.parametrize(("key", "name"), PAIRS)
@given(typed=st.floats(0.01, 500.0))
def test_conversion(key: str, name: str, typed: float) -> None:
    channel = CHANNELS[key]
    unit = channel.unit_named(name)
    expected = UREG.Quantity(typed, PINT_NAMES[name]).to(PINT_NAMES[channel.unit]).magnitude
    assert unit.to_canonical(typed) == pytest.approx(expected, rel=2e-5, abs=1e-9)
    assert unit.from_canonical(unit.to_canonical(typed)) == pytest.approx(typed, rel=1e-9)


def test_kpa_constant() -> None:
    assert UREG.Quantity(1.0, "kPa").to("mmHg").magnitude == pytest.approx(constants.KPA_IN_MMHG, rel=1e-6)


def test_solubility_in_kpa() -> None:
    """0.0307 mmol/L/mmHg is 0.230 mmol/L/kPa; bedside 0.03 is 0.225."""
    per_kpa = UREG.Quantity(constants.CO2_SOLUBILITY, "mmol/L/mmHg").to("mmol/L/kPa").magnitude
    assert per_kpa == pytest.approx(0.230, abs=0.0005)
    bedside = UREG.Quantity(constants.CO2_SOLUBILITY_BEDSIDE, "mmol/L/mmHg").to("mmol/L/kPa").magnitude
    assert bedside == pytest.approx(0.225, abs=0.0005)


def test_alveolar_constant_in_kpa() -> None:
    """0.863 with mmHg is 0.1151 with kPa."""
    found = UREG.Quantity(constants.CO2_EQUATION, "mmHg").to("kPa").magnitude
    assert found == pytest.approx(0.1151, abs=0.00005)


@given(ph=st.floats(6.5, 8.0))
def test_hydrogen_ion_is_ten_to_the_minus_ph(ph: float) -> None:
    molar = UREG.Quantity(10.0**-ph, "mol/L").to("nmol/L").magnitude
    assert acid_base.hydrogen_ion(ph) == pytest.approx(molar, rel=1e-9)
    assert acid_base.ph_from_hydrogen_ion(molar) == pytest.approx(ph, abs=1e-9)


@pytest.mark.parametrize(("mmHg", "kPa"), [(45.0, 6.0), (49.0, 6.5), (60.0, 8.0)])
def test_paired_limits_are_one_limit(mmHg: float, kPa: float) -> None:
    """Both printed forms of a limit fall on the same tenth of a kPa."""
    in_mmhg = UREG.Quantity(kPa, "kPa").to("mmHg").magnitude
    assert float(tenths_of_kpa(mmHg)) == float(tenths_of_kpa(in_mmhg)) == round(kPa * 10)
