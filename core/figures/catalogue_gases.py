"""Catalogue: acid-base, compensation and consistency."""

from __future__ import annotations

from typing import Final

from core.figures.catalogue_entry import FigureEntry

_OUTSIDE = "tests/outside/test_acid_base_gases.py::"
_AB = "core.physiology.acid_base."
_COMP = "core.physiology.compensation."
_ROUND_TRIP = "tests/core/physiology/test_compensation.py::"

_line = FigureEntry

ACID_BASE: Final = (
    _line(
        "hco3_calculated", "Actual bicarbonate, calculated", "mmol/L", "0.0307 x PCO2 x 10^(pH - 6.1)",
        "Henderson-Hasselbalch; constants as CLSI C46 (NCCLS)", "confirmed",
        _AB + "bicarbonate", _OUTSIDE + "test_bicarbonate",
        "Bedside arithmetic with 0.03 gives 0.6-0.7 mmol/L less.",
    ),
    _line(
        "ph_from_bicarbonate", "pH of PCO2 and bicarbonate", "pH", "6.1 + log10(HCO3 / (0.0307 x PCO2))",
        "Henderson-Hasselbalch", "confirmed",
        _AB + "ph_from_bicarbonate", _OUTSIDE + "test_compensation_examples",
    ),
    _line(
        "paco2_from_bicarbonate", "PCO2 of pH and bicarbonate", "mmHg", "HCO3 / (0.0307 x 10^(pH - 6.1))",
        "Henderson-Hasselbalch", "confirmed",
        _AB + "paco2_from_bicarbonate", _ROUND_TRIP + "test_henderson_hasselbalch_turns_both_ways",
    ),
    _line(
        "hydrogen_ion", "Hydrogen ion", "nmol/L", "10^(9 - pH)", "definition of pH", "computed here",
        _AB + "hydrogen_ion", _OUTSIDE + "test_hydrogen_ion",
    ),
    _line(
        "ph_from_hydrogen_ion", "pH of a hydrogen ion concentration", "pH", "9 - log10(H+)", "definition of pH",
        "computed here", _AB + "ph_from_hydrogen_ion",
        "tests/outside/test_units_pint.py::test_hydrogen_ion_is_ten_to_the_minus_ph",
    ),
    _line(
        "hydrogen_ion_from_gas", "Hydrogen ion of PCO2 and bicarbonate", "nmol/L",
        "24.4 x PCO2 / HCO3", "Henderson; k from 0.0307", "computed here",
        _AB + "hydrogen_ion_from_gas", _OUTSIDE + "test_hydrogen_constants",
    ),
    _line(
        "sbe", "Standard base excess (C46)", "mmol/L", "HCO3 - 24.8 + 16.2 x (pH - 7.40)",
        "CLSI C46 (NCCLS), Siggaard-Andersen extracellular form", "confirmed",
        _AB + "standard_base_excess", _OUTSIDE + "test_standard_base_excess",
    ),
    _line(
        "sbe_siggaard", "Standard base excess, simplified form", "mmol/L",
        "0.93 x (HCO3 - 24.4 + 14.83 x (pH - 7.40))", "Siggaard-Andersen", "from memory",
        _AB + "standard_base_excess_siggaard", _OUTSIDE + "test_reference_table",
        "Up to 0.65 mmol/L apart from the C46 form.",
    ),
    _line(
        "be_zander", "Base excess of whole blood (Zander)", "mmol/L",
        "(1 - 0.0143 Hb)(0.0304 PCO2 10^(pH - 6.1) - 24.26 + (9.5 + 1.63 Hb)(pH - 7.4)) - 0.2 Hb (1 - sO2)",
        "Lang and Zander, Clin Chem Lab Med 2002;40:404", "confirmed",
        _AB + "base_excess_zander", _OUTSIDE + "test_reference_table",
        "Hb in g/dL in the formula; taking Hb / 3 for a standard base excess is from memory.",
    ),
)  # fmt: skip

COMPENSATION: Final = (
    _line(
        "hco3_expected_acute", "Bicarbonate expected, acute", "mmol/L",
        "24 + 0.1 x (PaCO2 - 40) above 40; 0.2 below", "textbook rules in print", "confirmed",
        _COMP + "expected_hco3_acute", _OUTSIDE + "test_compensation",
    ),
    _line(
        "hco3_expected_chronic", "Bicarbonate expected, chronic", "mmol/L",
        "24 + 0.35 x (PaCO2 - 40) above 40; 0.4 below", "textbook rules in print", "confirmed",
        _COMP + "expected_hco3_chronic", _OUTSIDE + "test_compensation", "Sources print 0.25-0.5 above 40.",
    ),
    _line(
        "ph_expected_acute", "pH expected, acute", "pH", "Henderson-Hasselbalch of the expected bicarbonate",
        "textbook rules in print", "computed here",
        _COMP + "expected_ph_acute", _OUTSIDE + "test_compensation",
    ),
    _line(
        "ph_expected_chronic", "pH expected, chronic", "pH", "Henderson-Hasselbalch of the expected bicarbonate",
        "textbook rules in print", "computed here",
        _COMP + "expected_ph_chronic", _OUTSIDE + "test_compensation",
    ),
    _line(
        "ph_expected_acute_linear", "pH expected, acute, bedside rule", "pH", "7.40 - 0.008 x (PaCO2 - 40)",
        "textbook rules in print", "confirmed",
        _COMP + "expected_ph_acute_linear", _OUTSIDE + "test_compensation_examples",
    ),
    _line(
        "ph_expected_chronic_linear", "pH expected, chronic, bedside rule", "pH", "7.40 - 0.003 x (PaCO2 - 40)",
        "textbook rules in print", "confirmed",
        _COMP + "expected_ph_chronic_linear", _OUTSIDE + "test_compensation_examples", "Hypercapnia only.",
    ),
    _line(
        "paco2_for_ph_acute", "PaCO2 that would explain this pH alone, acute", "mmHg",
        "acute rule and Henderson-Hasselbalch, solved for PaCO2", "textbook rules in print", "computed here",
        _COMP + "paco2_for_ph_acute", _ROUND_TRIP + "test_the_reverse_undoes_the_rule",
    ),
    _line(
        "paco2_for_ph_chronic", "PaCO2 that would explain this pH alone, chronic", "mmHg",
        "chronic rule and Henderson-Hasselbalch, solved for PaCO2", "textbook rules in print", "computed here",
        _COMP + "paco2_for_ph_chronic", _ROUND_TRIP + "test_the_reverse_undoes_the_rule",
    ),
    _line(
        "paco2_expected_metabolic_acidosis", "PCO2 expected of a metabolic acidosis (Winters)", "mmHg",
        "1.5 x HCO3 + 8, +/-2", "Winters' formula in print", "confirmed",
        _COMP + "expected_paco2_metabolic_acidosis", _OUTSIDE + "test_compensation_examples",
    ),
    _line(
        "paco2_expected_metabolic_alkalosis", "PCO2 expected of a metabolic alkalosis", "mmHg",
        "0.7 x (HCO3 - 24) + 40, +/-2", "textbook rules in print", "confirmed",
        _COMP + "expected_paco2_metabolic_alkalosis", _OUTSIDE + "test_metabolic_alkalosis_rule",
    ),
    _line(
        "sbe_expected_chronic", "Standard base excess expected, chronic", "mmol/L", "0.4 x (PaCO2 - 40)",
        "Schlichtig 1998", "from memory",
        _COMP + "expected_sbe_chronic", _OUTSIDE + "test_base_excess_rule_of_chronic_hypercapnia",
        "Series in COPD are steeper, about 0.5.",
    ),
    _line(
        "usual_paco2_estimate", "Usual PaCO2, estimated", "mmHg", "40 + (HCO3 - 24) / 0.35",
        "chronic rule read backwards", "computed here",
        _COMP + "usual_paco2_estimate", _OUTSIDE + "test_usual_paco2_is_the_chronic_rule_read_backwards",
        "A heuristic: shown, never judged by; spoilt by diuretics and metabolic disturbance.",
    ),
    _line(
        "gas_class", "The gas in plain words", "", "rules of compensation, within 2 mmol/L and 2 mmHg",
        "compensation rules; the bands between are common practice", "common practice",
        "core.physiology.classification.classify", _OUTSIDE + "test_published_interpretation",
        "Describes; no marker is judged by it.",
    ),
    _line(
        "hco3_difference", "Reported minus calculated bicarbonate", "mmol/L", "HCO3 - 0.0307 PCO2 10^(pH - 6.1)",
        "Henderson-Hasselbalch; tolerance 2 mmol/L common practice", "common practice",
        "core.physiology.consistency.bicarbonate_difference", _OUTSIDE + "test_reported_minus_calculated",
        "Actual bicarbonate only.",
    ),
    _line(
        "venous_rule_out", "Venous PCO2 rules out hypercapnia", "", "venous PCO2 below 45 mmHg (6.0 kPa)",
        "sensitivity and negative predictive value 100 %, n = 529", "confirmed",
        "core.physiology.specimen.venous_rule_out",
        "tests/core/physiology/test_specimen.py::test_the_rule_out_is_below_45_and_6_0_alike",
        "Not a substitute value; not in shock.",
    ),
    _line(
        "ph_at_temperature", "pH at the patient's temperature", "pH", "pH - 0.0147 x (T - 37)",
        "analyser handbooks in print", "secondary",
        "core.physiology.temperature.ph_at_temperature",
        "tests/outside/test_oxygenation_gases.py::test_temperature_correction", "Off by default (alpha-stat).",
    ),
    _line(
        "paco2_at_temperature", "PCO2 at the patient's temperature", "mmHg", "PCO2 x 10^(0.019 x (T - 37))",
        "analyser handbooks in print (0.021 on some; Bradley 1956 0.0185)", "secondary",
        "core.physiology.temperature.paco2_at_temperature",
        "tests/outside/test_oxygenation_gases.py::test_temperature_correction", "Off by default (alpha-stat).",
    ),
    _line(
        "pao2_at_temperature", "PO2 at the patient's temperature", "mmHg",
        "PO2 x exp((0.058 / ((0.243 PO2 / 100)^3.88 + 1) + 0.013) x (T - 37))",
        "Severinghaus, J Appl Physiol 1979;46:599", "confirmed",
        "core.physiology.temperature.pao2_at_temperature",
        "tests/outside/test_oxygenation_gases.py::test_temperature_correction", "Off by default.",
    ),
)  # fmt: skip
