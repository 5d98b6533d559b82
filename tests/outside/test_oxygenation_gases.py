"""Published gases and tables against the oxygenation formulas. Sources of the gases: see `gas_examples.csv`."""

import csv
from pathlib import Path

import numpy as np
import pytest

from core.physiology import (
    consistency,
    imputation,
    oxygenation,
    oxygenation_index,
    rox,
    saturation,
    temperature,
)
from core.physiology.definitions import Band, berlin, global_intubated_sf

with Path(__file__).with_name("gas_examples.csv").open(encoding="utf-8", newline="") as file:
    GASES = {row["id"]: row for row in csv.DictReader(file)}


def numbers(row: dict[str, str], *columns: str) -> list[float]:
    return [float(row[c]) for c in columns]


def having(*columns: str) -> list[str]:
    return [key for key, row in GASES.items() if all(row[c] for c in columns)]


@pytest.mark.parametrize("key", having("FiO2", "PAO2_simple_mmHg_R0.8_PB760"))
def test_alveolar_po2_in_both_forms(key: str) -> None:
    row = GASES[key]
    fio2, simple, full = numbers(row, "FiO2", "PAO2_simple_mmHg_R0.8_PB760", "PAO2_full_mmHg")
    in_kpa = key.startswith("AHRF")  # mmHg in the file is the rounded form of the source's kPa
    paco2 = float(row["pCO2_kPa"]) * 7.50062 if in_kpa else float(row["pCO2_mmHg"])
    assert oxygenation.alveolar_po2(fio2, paco2) == pytest.approx(simple, abs=0.06)
    assert oxygenation.alveolar_po2_full(fio2, paco2) == pytest.approx(full, abs=0.06)


@pytest.mark.parametrize("key", having("FiO2", "Aa_simple_mmHg"))
def test_gradient_in_both_forms(key: str) -> None:
    row = GASES[key]
    pao2, paco2, fio2, simple, full = numbers(row, "pO2_mmHg", "pCO2_mmHg", "FiO2", "Aa_simple_mmHg", "Aa_full_mmHg")
    assert oxygenation.aa_gradient(pao2, paco2, fio2) == pytest.approx(simple, abs=0.06)
    assert oxygenation.aa_gradient_full(pao2, paco2, fio2) == pytest.approx(full, abs=0.06)
    assert (consistency.gradient_doubt(pao2, paco2, fio2) is not None) is (key == "NEG-AIR")


@pytest.mark.parametrize("key", [k for k in having("FiO2", "Aa_reported_mmHg") if k != "EGAN-60"])
def test_published_gradient(key: str) -> None:
    """As printed; the sources round PIO2 to 150. EGAN-60 drops R at FiO2 >= 0.6, which is an error there."""
    row = GASES[key]
    pao2, paco2, fio2, printed = numbers(row, "pO2_mmHg", "pCO2_mmHg", "FiO2", "Aa_reported_mmHg")
    assert oxygenation.aa_gradient(pao2, paco2, fio2) == pytest.approx(printed, abs=0.6)


def test_r_is_kept_at_high_fio2() -> None:
    assert oxygenation.aa_gradient(90.0, 40.0, 0.6) == pytest.approx(287.8)


@pytest.mark.parametrize("key", having("FiO2", "PF_ratio_mmHg"))
def test_pf_ratio(key: str) -> None:
    pao2, fio2, printed = numbers(GASES[key], "pO2_mmHg", "FiO2", "PF_ratio_mmHg")
    assert oxygenation.pf_ratio(pao2, fio2) == pytest.approx(printed, abs=0.6)


def test_pf_at_altitude() -> None:
    """The 2012 definition corrects above 1000 m by PB / 760: at 1500 m (about 634 mmHg) P/F 240 counts as 200."""
    assert oxygenation.pf_ratio_at_altitude(96.0, 0.4, 634.0) == pytest.approx(200.2, abs=0.06)
    assert oxygenation.pf_ratio_at_altitude(96.0, 0.4, 760.0) == pytest.approx(240.0)


@pytest.mark.parametrize("key", having("sat_Severinghaus_pct"))
def test_severinghaus_of_the_gases(key: str) -> None:
    pao2, printed = numbers(GASES[key], "pO2_mmHg", "sat_Severinghaus_pct")
    assert saturation.severinghaus_saturation(pao2) == pytest.approx(printed, abs=0.06)


@pytest.mark.parametrize("key", having("sat_Severinghaus_Bohr0.48_pct"))
def test_severinghaus_shifted_by_ph(key: str) -> None:
    """The coefficient 0.48 is from memory."""
    pao2, ph, printed = numbers(GASES[key], "pO2_mmHg", "pH", "sat_Severinghaus_Bohr0.48_pct")
    assert saturation.severinghaus_saturation_at_ph(pao2, ph) == pytest.approx(printed, abs=0.06)


def test_a_saturation_that_its_own_gas_contradicts_stands_out() -> None:
    """UW7 prints 85 % beside PO2 65 and pH 7.54; UW1 and MARTIN-B reproduce."""
    assert saturation.saturation_difference(85.0, 65.0, 7.54) == pytest.approx(-10.0, abs=0.1)
    assert abs(saturation.saturation_difference(88.0, 65.0, 7.25)) < 0.3
    assert abs(saturation.saturation_difference(85.0, 55.0, 7.32)) < 0.3


# Severinghaus 1979, table 1, as transcribed in a public repository (secondary source): PO2 mmHg, S %.
TABLE_1 = {
    10: 9.58, 20: 32.12, 26: 48.27, 28: 53.16, 30: 57.54, 40: 74.69, 50: 85.08, 60: 90.85, 70: 94.06,
    80: 95.84, 90: 96.88, 100: 97.49, 150: 98.77, 200: 99.20, 500: 99.72,
}  # fmt: skip
EQUATION = {
    10: 9.65, 20: 31.98, 30: 57.38, 40: 74.95, 50: 84.99, 60: 90.58, 70: 93.79, 80: 95.73, 90: 96.94,
    100: 97.75, 150: 99.32,
}  # fmt: skip


def test_severinghaus_against_its_published_points() -> None:
    """The paper claims +/-0.55 %; the largest deviation stands at 150 mmHg."""
    po2 = np.array(list(TABLE_1), dtype=float)
    off = np.asarray(saturation.severinghaus_saturation(po2)) - np.array(list(TABLE_1.values()))
    assert np.abs(off).max() <= 0.55
    assert po2[np.abs(off).argmax()] == 150.0
    assert np.abs(off).max() == pytest.approx(0.546, abs=0.006)


def test_severinghaus_equation_at_the_same_points() -> None:
    for po2, printed in EQUATION.items():
        assert saturation.severinghaus_saturation(float(po2)) == pytest.approx(printed, abs=0.006)


def test_p50() -> None:
    assert saturation.ellis_po2(50.0) == pytest.approx(26.86, abs=0.006)


@pytest.mark.parametrize(
    ("spo2", "mmHg", "kPa"),
    [
        (80, 44.3, 5.91), (85, 50.0, 6.67), (88, 54.7, 7.29), (90, 58.7, 7.82), (92, 63.8, 8.50),
        (94, 70.9, 9.45), (95, 75.7, 10.09), (96, 81.9, 10.92), (97, 90.6, 12.08),
    ],
)  # fmt: skip
def test_ellis_inversion(spo2: float, mmHg: float, kPa: float) -> None:
    """Constants from a secondary source; the row was computed apart from this code."""
    found = saturation.ellis_po2(spo2)
    assert found == pytest.approx(mmHg, abs=0.06)
    assert found / 7.50062 == pytest.approx(kPa, abs=0.006)


def test_inversion_round_trip() -> None:
    """Ellis' form is the exact inverse of Severinghaus' equation; his own approximation comes near."""
    po2 = np.linspace(12.0, 150.0, 300)
    back = np.asarray(saturation.ellis_po2(np.asarray(saturation.severinghaus_saturation(po2))))
    np.testing.assert_allclose(back, po2, rtol=1e-9)
    own = np.asarray(saturation.severinghaus_po2(np.asarray(saturation.severinghaus_saturation(po2))))
    near = (po2 > 20.0) & (po2 < 100.0)
    np.testing.assert_allclose(own[near], po2[near], rtol=0.05)


def test_severinghaus_slopes() -> None:
    """At PO2 26.6 the pH slope is 1 - 2.2; the temperature slope is 0.071 where haemoglobin is unsaturated."""
    assert saturation.severinghaus_ph_slope(26.6) == pytest.approx(-1.2)
    assert saturation.severinghaus_temperature_slope(20.0) == pytest.approx(0.071, abs=0.0005)
    assert saturation.severinghaus_temperature_slope(600.0) == pytest.approx(0.013 + 0.058 / 5.33, abs=0.001)


@pytest.mark.parametrize(("po2", "printed"), [(40, 74.12), (60, 91.06), (100, 97.49)])
def test_kelman(po2: float, printed: float) -> None:
    """Kelman, J Appl Physiol 1966;21:1375; constants as in three public codes."""
    assert saturation.kelman_saturation(float(po2)) == pytest.approx(printed, abs=0.006)


def test_full_minus_simple() -> None:
    """PaCO2 x FiO2 x (1 - R) / R: 3.2 mmHg at PaCO2 60 on air."""
    gap = oxygenation.alveolar_po2_full(0.21, 60.0) - oxygenation.alveolar_po2(0.21, 60.0)
    assert gap == pytest.approx(60.0 * 0.21 * 0.2 / 0.8)
    assert gap == pytest.approx(3.2, abs=0.06)


def test_inspired_po2_on_air_is_about_20_kpa() -> None:
    assert oxygenation.inspired_po2(0.21) / 7.50062 == pytest.approx(20.0, abs=0.1)


def test_age_expected_gradient_at_60() -> None:
    """Three published lines (secondary sources) for 60 years on air: 19, 17.5, 15.1."""
    assert oxygenation.aa_gradient_expected(60.0, 0.21) == 19.0
    assert oxygenation.aa_gradient_expected_quarter(60.0, 0.21) == 17.5
    assert oxygenation.aa_gradient_expected_regression(60.0, 0.21) == pytest.approx(15.1)


@pytest.mark.parametrize(
    ("spo2", "fio2", "sf", "nonlinear", "linear", "loglinear"),
    [(88, 0.35, 251, 156, 223, 225), (92, 0.50, 184, 128, 143, 176)],
)
def test_imputed_pf(spo2: float, fio2: float, sf: int, nonlinear: int, linear: int, loglinear: int) -> None:
    """Brown 2016, Rice 2007, Pandharipande 2009 (secondary source): worked apart from this code."""
    assert round(oxygenation.sf_ratio(spo2, fio2)) == sf
    assert round(imputation.imputed_pf_nonlinear(spo2, fio2)) == nonlinear
    assert round(imputation.imputed_pf_linear(spo2, fio2)) == linear
    assert round(imputation.imputed_pf_loglinear(spo2, fio2)) == loglinear


def test_the_printed_line_is_not_the_printed_cut_offs() -> None:
    """Rice 2007: the line gives 232 and 316, the published cut-offs are 235 and 315."""
    assert pytest.approx(232) == 64 + 0.84 * 200
    assert pytest.approx(316) == 64 + 0.84 * 300
    assert (imputation.SF_FOR_PF_200, imputation.SF_FOR_PF_300) == (235.0, 315.0)


@pytest.mark.parametrize(
    "figure", [oxygenation.sf_ratio, *imputation.METHODS.values()], ids=lambda f: getattr(f, "__name__", "")
)
def test_nothing_is_imputed_above_97(figure: object) -> None:
    """All sources agree."""
    assert callable(figure)
    assert np.isfinite(figure(97.0, 0.3))
    assert np.isnan(figure(97.1, 0.3))
    assert np.isnan(figure(98.0, 0.3))


def test_rox_family() -> None:
    """Computed apart from this code; ROX by Roca 2019, ROX-HR by Goh 2020, mROX by BMC Pulm Med 2022."""
    assert rox.rox(92.0, 0.60, 28.0) == pytest.approx(5.48, abs=0.006)
    assert rox.rox_hr(92.0, 0.60, 28.0, 110.0) == pytest.approx(4.98, abs=0.006)
    assert rox.mrox(65.0, 0.60, 28.0) == pytest.approx(3.87, abs=0.006)
    assert rox.rox(96.0, 0.40, 24.0) == pytest.approx(10.0)


@pytest.mark.parametrize(
    ("index", "hours", "reading"),
    [
        (4.88, 2, "low_risk"), (4.87, 2, "grey_zone"), (2.85, 2, "grey_zone"), (2.84, 2, "failure_likely"),
        (3.47, 6, "grey_zone"), (3.46, 6, "failure_likely"), (3.85, 12, "grey_zone"),
        (3.84, 12, "failure_likely"), (3.84, 11.9, "grey_zone"), (9.0, 1.9, "too_early"),
    ],
)  # fmt: skip
def test_rox_cut_offs(index: float, hours: float, reading: str) -> None:
    """Roca, AJRCCM 2019;199:1368: every edge."""
    assert rox.rox_reading(index, hours).key == f"rox.{reading}"


def test_oxygenation_indices() -> None:
    """Chen, J Clin Med 2018;7:205: worked apart from this code."""
    assert oxygenation_index.oxygenation_index(12.0, 0.5, 60.0) == pytest.approx(10.0)
    assert oxygenation_index.oxygen_saturation_index(12.0, 0.5, 90.0) == pytest.approx(6.67, abs=0.006)
    assert oxygenation_index.mean_airway_pressure(18.0, 6.0, 1.0, 20.0) == pytest.approx(10.0)


def test_berlin_edges() -> None:
    """Berlin 2012: mild 200 < P/F <= 300, moderate 100 < P/F <= 200, severe <= 100; PEEP >= 5."""
    ratios = [300.0, 300.1, 200.1, 200.0, 100.1, 100.0]
    bands = [Band.MILD, Band.NOT_MET, Band.MILD, Band.MODERATE, Band.MODERATE, Band.SEVERE]
    assert berlin(ratios, 5.0).tolist() == bands
    assert berlin(150.0, 4.9) == Band.NOT_MET
    assert berlin(150.0, None) == Band.NOT_KNOWN
    assert berlin(None, 6.0) == Band.NOT_KNOWN
    kpa = np.array([39.9, 26.6, 13.3]) * 7.50062
    assert berlin(kpa, 5.0).tolist() == [Band.MILD, Band.MODERATE, Band.SEVERE]


def test_global_intubated_edges() -> None:
    """Matthay, AJRCCM 2024;209:37: mild 235-315, moderate 148-235, severe <= 148, at SpO2 <= 97 %."""
    ratios = [315.0, 315.1, 235.1, 235.0, 148.1, 148.0]
    bands = [Band.MILD, Band.NOT_MET, Band.MILD, Band.MODERATE, Band.MODERATE, Band.SEVERE]
    assert global_intubated_sf(ratios, 97.0).tolist() == bands
    assert global_intubated_sf(200.0, 97.1) == Band.NOT_KNOWN


def test_temperature_correction() -> None:
    """39 degC: pH 7.30 -> 7.271 and PCO2 60 -> 65.5; the table method prints -0.030, x1.08, x1.145."""
    assert temperature.ph_at_temperature(7.30, 39.0) == pytest.approx(7.271, abs=0.0006)
    assert temperature.paco2_at_temperature(60.0, 39.0) == pytest.approx(65.5, abs=0.06)
    assert temperature.ph_at_temperature(7.30, 39.0) - 7.30 == pytest.approx(-0.030, abs=0.001)
    assert temperature.paco2_at_temperature(60.0, 39.0) / 60.0 == pytest.approx(1.08, abs=0.015)
    assert temperature.pao2_at_temperature(60.0, 39.0) / 60.0 == pytest.approx(1.145, abs=0.01)
    assert temperature.ON_BY_DEFAULT is False
