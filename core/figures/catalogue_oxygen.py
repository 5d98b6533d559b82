"""Catalogue: oxygenation, saturation, ROX, definitions."""

from __future__ import annotations

from typing import Final

from core.figures.catalogue_entry import FigureEntry

_OUTSIDE = "tests/outside/test_oxygenation_gases.py::"
_OX = "core.physiology.oxygenation."
_SAT = "core.physiology.saturation."
_IMP = "core.physiology.imputation."
_SEVERINGHAUS = "Severinghaus, J Appl Physiol 1979;46:599"
_HIGH_FLOW = "Validated in high-flow nasal oxygen, not in mask ventilation."
_NEEDS_FIO2 = "None where FiO2 is not known."

_line = FigureEntry

OXYGENATION: Final = (
    _line(
        "inspired_po2", "Inspired PO2", "mmHg", "FiO2 x (PB - 47)", "alveolar gas equation", "confirmed",
        _OX + "inspired_po2", _OUTSIDE + "test_inspired_po2_on_air_is_about_20_kpa", _NEEDS_FIO2,
    ),
    _line(
        "alveolar_po2", "Alveolar PO2, simple form", "mmHg", "FiO2 x (760 - 47) - PaCO2 / 0.8",
        "alveolar gas equation, as in the published worked gases", "confirmed",
        _OX + "alveolar_po2", _OUTSIDE + "test_alveolar_po2_in_both_forms", _NEEDS_FIO2,
    ),
    _line(
        "alveolar_po2_full", "Alveolar PO2, full form", "mmHg",
        "FiO2 x (760 - 47) - PaCO2 x (FiO2 + (1 - FiO2) / 0.8)", "Cochrane review CD010841", "confirmed",
        _OX + "alveolar_po2_full", _OUTSIDE + "test_alveolar_po2_in_both_forms", _NEEDS_FIO2,
    ),
    _line(
        "aa_gradient", "A-a gradient, simple form", "mmHg", "alveolar PO2 (simple) - PaO2",
        "published worked gases", "confirmed",
        _OX + "aa_gradient", _OUTSIDE + "test_published_gradient", "Negative: FiO2 or a pressure is wrong.",
    ),
    _line(
        "aa_gradient_full", "A-a gradient, full form", "mmHg", "alveolar PO2 (full) - PaO2",
        "Cochrane review CD010841", "confirmed",
        _OX + "aa_gradient_full", _OUTSIDE + "test_gradient_in_both_forms",
        "Negative: FiO2 or a pressure is wrong.",
    ),
    _line(
        "aa_gradient_expected", "A-a gradient expected for age", "mmHg", "age / 4 + 4",
        "published rule", "secondary",
        _OX + "aa_gradient_expected", _OUTSIDE + "test_age_expected_gradient_at_60", "On air only.",
    ),
    _line(
        "aa_gradient_expected_quarter", "A-a gradient expected for age, second rule", "mmHg", "(age + 10) / 4",
        "published rule", "secondary",
        _OX + "aa_gradient_expected_quarter", _OUTSIDE + "test_age_expected_gradient_at_60", "On air only.",
    ),
    _line(
        "aa_gradient_expected_regression", "A-a gradient expected for age, regression", "mmHg",
        "2.5 + 0.21 x age", "published regression", "secondary",
        _OX + "aa_gradient_expected_regression", _OUTSIDE + "test_age_expected_gradient_at_60", "On air only.",
    ),
    _line(
        "pf", "P/F", "mmHg", "PaO2 / FiO2", "Berlin definition 2012", "confirmed",
        _OX + "pf_ratio", _OUTSIDE + "test_pf_ratio", "Arterial only. " + _NEEDS_FIO2,
    ),
    _line(
        "pf_at_altitude", "P/F, corrected for altitude", "mmHg", "PaO2 / FiO2 x PB / 760",
        "Berlin definition 2012 (above 1000 m)", "confirmed",
        _OX + "pf_ratio_at_altitude", _OUTSIDE + "test_pf_at_altitude", _NEEDS_FIO2,
    ),
    _line(
        "sf", "S/F", "", "SpO2 % / FiO2", "Rice, Chest 2007;132:410", "confirmed",
        _OX + "sf_ratio", _OUTSIDE + "test_imputed_pf", "None above SpO2 97 %. " + _NEEDS_FIO2,
    ),
    _line(
        "pf_imputed", "P/F imputed, non-linear (the one shown)", "mmHg", "Ellis' PO2 of SpO2 / FiO2",
        "Brown, Chest 2016;150:307; Crit Care Med 2017;45:1317", "confirmed",
        _IMP + "imputed_pf_nonlinear", _OUTSIDE + "test_imputed_pf",
        "None above SpO2 97 %; the three methods disagree by a severity class.",
    ),
    _line(
        "pf_imputed_linear", "P/F imputed, linear", "mmHg", "(S/F - 64) / 0.84", "Rice, Chest 2007;132:410",
        "confirmed", _IMP + "imputed_pf_linear", _OUTSIDE + "test_imputed_pf", "None above SpO2 97 %.",
    ),
    _line(
        "pf_imputed_loglinear", "P/F imputed, log-linear", "mmHg", "log10 P/F = 0.48 + 0.78 x log10 S/F",
        "Pandharipande 2009", "secondary",
        _IMP + "imputed_pf_loglinear", _OUTSIDE + "test_imputed_pf", "None above SpO2 97 %.",
    ),
    _line(
        "oxygenation_index", "Oxygenation index", "", "mean airway pressure x FiO2 x 100 / PaO2",
        "Chen, J Clin Med 2018;7:205", "confirmed",
        "core.physiology.oxygenation_index.oxygenation_index", _OUTSIDE + "test_oxygenation_indices",
        "No adult cut-off on a mask.",
    ),
    _line(
        "oxygen_saturation_index", "Oxygen saturation index", "", "mean airway pressure x FiO2 x 100 / SpO2",
        "Chen, J Clin Med 2018;7:205", "confirmed",
        "core.physiology.oxygenation_index.oxygen_saturation_index", _OUTSIDE + "test_oxygenation_indices",
        "No adult cut-off on a mask; none above SpO2 97 %.",
    ),
    _line(
        "mean_airway_pressure", "Mean airway pressure of bilevel support", "cmH2O",
        "EPAP + (IPAP - EPAP) x Ti x rate / 60", "square wave, no leak", "computed here",
        "core.physiology.oxygenation_index.mean_airway_pressure", _OUTSIDE + "test_oxygenation_indices",
    ),
    _line(
        "rox", "ROX", "", "(SpO2 % / FiO2) / respiratory rate", "Roca, AJRCCM 2019;199:1368", "confirmed",
        "core.physiology.rox.rox", _OUTSIDE + "test_rox_family", _HIGH_FLOW,
    ),
    _line(
        "rox_hr", "ROX-HR", "", "ROX / heart rate x 100", "Goh, J Intensive Care 2020;8:41", "confirmed",
        "core.physiology.rox.rox_hr", _OUTSIDE + "test_rox_family", _HIGH_FLOW,
    ),
    _line(
        "mrox", "mROX", "", "(PaO2 / FiO2) / respiratory rate", "BMC Pulm Med 2022 (n = 75)", "confirmed",
        "core.physiology.rox.mrox", _OUTSIDE + "test_rox_family", _HIGH_FLOW,
    ),
    _line(
        "berlin_band", "Oxygenation band, Berlin 2012", "", "P/F 300, 200, 100 at PEEP or CPAP of 5 or more",
        "ARDS Definition Task Force 2012", "confirmed",
        "core.physiology.definitions.berlin", _OUTSIDE + "test_berlin_edges",
        "Oxygenation only; timing, imaging and origin are for a clinician.",
    ),
    _line(
        "global_band", "Oxygenation criterion, global definition, not intubated", "",
        "P/F <= 300, or S/F <= 315 at SpO2 <= 97 %; PEEP >= 5 or high flow >= 30 L/min",
        "Matthay, AJRCCM 2024;209:37", "confirmed",
        "core.physiology.definitions.global_not_intubated",
        "tests/core/physiology/test_definitions.py::test_edges", "No severity grade without intubation.",
    ),
    _line(
        "global_band_intubated", "Oxygenation band by S/F, global definition, intubated", "",
        "S/F 315, 235, 148 at SpO2 <= 97 %", "Matthay, AJRCCM 2024;209:37", "confirmed",
        "core.physiology.definitions.global_intubated_sf", _OUTSIDE + "test_global_intubated_edges",
    ),
)  # fmt: skip

SATURATION: Final = (
    _line(
        "saturation_of_po2", "Saturation of a PO2 (Severinghaus)", "%", "100 / (23400 / (P^3 + 150 P) + 1)",
        _SEVERINGHAUS, "confirmed",
        _SAT + "severinghaus_saturation", _OUTSIDE + "test_severinghaus_against_its_published_points",
        "Within 0.55 % of its table; pH 7.40, 37 degC.",
    ),
    _line(
        "saturation_of_po2_at_ph", "Saturation of a PO2, shifted by pH", "%",
        "Severinghaus of P x 10^(0.48 x (pH - 7.40))", _SEVERINGHAUS + "; Bohr coefficient", "from memory",
        _SAT + "severinghaus_saturation_at_ph", _OUTSIDE + "test_severinghaus_shifted_by_ph",
    ),
    _line(
        "po2_of_saturation", "PO2 of a saturation (Ellis)", "mmHg",
        "(b + a)^(1/3) - (b - a)^(1/3), a = 11700 / (1/S - 1), b = sqrt(50^3 + a^2)",
        "Ellis; inverse of Severinghaus' equation", "secondary",
        _SAT + "ellis_po2", _OUTSIDE + "test_ellis_inversion",
    ),
    _line(
        "po2_of_saturation_severinghaus", "PO2 of a saturation (Severinghaus' approximation)", "mmHg",
        "exp(0.385 ln(1 / (1/S - 1)) + 3.32 - 1 / (72 S) - S^6 / 6)", _SEVERINGHAUS, "confirmed",
        _SAT + "severinghaus_po2", _OUTSIDE + "test_inversion_round_trip",
    ),
    _line(
        "saturation_kelman", "Saturation of a PO2 (Kelman)", "%",
        "quartic in x = P x 10^(0.024 (37 - T) + 0.40 (pH - 7.40) + 0.06 log10(40 / PCO2))",
        "Kelman, J Appl Physiol 1966;21:1375; shift exponents from memory", "from memory",
        _SAT + "kelman_saturation", _OUTSIDE + "test_kelman", "From PO2 10 mmHg.",
    ),
    _line(
        "po2_ph_slope", "d ln PO2 / d pH at constant saturation", "", "(P / 26.6)^0.184 - 2.2",
        _SEVERINGHAUS, "confirmed", _SAT + "severinghaus_ph_slope", _OUTSIDE + "test_severinghaus_slopes",
    ),
    _line(
        "po2_temperature_slope", "d ln PO2 / dT", "1/degC", "0.058 / ((0.243 P / 100)^3.88 + 1) + 0.013",
        _SEVERINGHAUS, "confirmed",
        _SAT + "severinghaus_temperature_slope", _OUTSIDE + "test_severinghaus_slopes",
    ),
    _line(
        "saturation_difference", "Reported minus expected saturation", "%",
        "saturation - Severinghaus shifted by pH", _SEVERINGHAUS + "; 5 points common practice",
        "common practice", _SAT + "saturation_difference",
        _OUTSIDE + "test_a_saturation_that_its_own_gas_contradicts_stands_out",
    ),
)  # fmt: skip
