"""Catalogue: ventilation, the trust in a tidal volume, the expected course of PaCO2, and the scores."""

from __future__ import annotations

from typing import Final

from core.figures.catalogue_entry import FigureEntry

_OUTSIDE = "tests/outside/test_ventilation_worked.py::"
_V = "core.physiology.ventilation."
_CO2 = "core.physiology.co2_course."
_MASK = "On a mask the tidal volume is modelled; its doubt travels with this figure."

_line = FigureEntry

VENTILATION: Final = (
    _line(
        "pbw", "Predicted body weight", "kg", "50 (male) or 45.5 (female) + 0.91 x (height cm - 152.4)",
        "ARDSNet (Devine)", "secondary",
        _V + "predicted_body_weight", _OUTSIDE + "test_predicted_body_weight",
        "None below 130 cm, or where the sex is not known.",
    ),
    _line(
        "vt_per_kg", "Tidal volume per kg", "mL/kg", "tidal volume / predicted body weight",
        "Carteaux, Crit Care Med 2016;44:282 (threshold 9.5 from memory)", "confirmed",
        _V + "tidal_volume_per_kg", _OUTSIDE + "test_predicted_body_weight", _MASK,
    ),
    _line(
        "minute_ventilation", "Minute ventilation", "L/min", "tidal volume x rate / 1000", "definition",
        "computed here", _V + "minute_ventilation", _OUTSIDE + "test_minute_and_alveolar_ventilation", _MASK,
    ),
    _line(
        "alveolar_ventilation", "Alveolar ventilation", "L/min", "(tidal volume - dead space) x rate / 1000",
        "definition", "computed here",
        _V + "alveolar_ventilation", _OUTSIDE + "test_minute_and_alveolar_ventilation",
        "Dead space is assumed. " + _MASK,
    ),
    _line(
        "alveolar_ventilation_for_paco2", "Alveolar ventilation for a PaCO2", "L/min", "0.863 x VCO2 / PaCO2",
        "alveolar ventilation equation", "secondary",
        _V + "alveolar_ventilation_for_paco2", _OUTSIDE + "test_alveolar_ventilation_equation",
        "CO2 production is assumed.",
    ),
    _line(
        "paco2_of_alveolar_ventilation", "PaCO2 of an alveolar ventilation", "mmHg", "0.863 x VCO2 / VA",
        "alveolar ventilation equation", "secondary",
        _V + "paco2_of_alveolar_ventilation", _OUTSIDE + "test_alveolar_ventilation_equation",
        "CO2 production is assumed.",
    ),
    _line(
        "minute_ventilation_for_paco2", "Minute ventilation for a wished PaCO2", "L/min", "MV x PaCO2 / wished",
        "alveolar ventilation equation at constant VCO2 and VD/VT", "secondary",
        _V + "minute_ventilation_for_paco2", _OUTSIDE + "test_ventilation_for_a_wished_paco2",
        "Weak on a mask (leak, work of breathing): never a setting.",
    ),
    _line(
        "ventilatory_ratio", "Ventilatory ratio", "", "MV mL/min x PaCO2 / (PBW x 100 x 37.5)",
        "Sinha, Br J Anaesth 2009;102:692", "confirmed",
        _V + "ventilatory_ratio", _OUTSIDE + "test_ventilatory_ratio",
        "Intubated; not validated in leak; misses changed mechanics. " + _MASK,
    ),
    _line(
        "rsbi", "Rapid shallow breathing index", "/min/L", "rate / tidal volume in L",
        "Yang and Tobin 1991; on mask support Berg, Respir Care 2012;57:1548", "confirmed",
        _V + "rapid_shallow_breathing_index", _OUTSIDE + "test_rapid_shallow_breathing_index",
        "Lower on support than in its source. " + _MASK,
    ),
    _line(
        "port_leak", "Leak of the exhalation port", "L/min", "k x sqrt(pressure)",
        "orifice model; k from bench work (Borel, Chest 2009;135:669)", "computed here",
        "core.physiology.tidal_volume_trust.port_leak", _OUTSIDE + "test_port_leak", "k is the mask's own.",
    ),
    _line(
        "leaked_share", "Share of the inspired volume that leaks", "",
        "leak x Ti / (tidal volume + leak x Ti)", "definition", "computed here",
        "core.physiology.tidal_volume_trust.leaked_share", _OUTSIDE + "test_leaked_share",
    ),
    _line(
        "tidal_volume_trust", "Whether a tidal volume can be trusted", "",
        "doubtful above 30 L/min of unintentional leak, or above half of the inspired volume",
        "no source found", "common practice",
        "core.physiology.tidal_volume_trust.trust",
        "tests/core/physiology/test_tidal_volume_trust.py::test_edges",
    ),
)  # fmt: skip

_EXPECTED = "Expected, never measured; no marker, score or handover uses it."
COURSE: Final = (
    _line(
        "paco2_steady", "PaCO2 at steady state", "mmHg", "0.863 x VCO2 / VA", "alveolar ventilation equation",
        "secondary", _CO2 + "steady_paco2", _OUTSIDE + "test_alveolar_ventilation_equation", _EXPECTED,
    ),
    _line(
        "paco2_steady_after_change", "PaCO2 at steady state after a change", "mmHg", "PaCO2 x VA / VA after",
        "alveolar ventilation equation at constant VCO2", "secondary",
        _CO2 + "steady_paco2_after_change",
        "tests/core/physiology/test_co2_course.py::"
        "test_the_steady_state_is_that_of_the_alveolar_ventilation_equation",
        _EXPECTED,
    ),
    _line(
        "paco2_after", "PaCO2 some minutes after a step", "mmHg", "steady + (start - steady) x 2^(-t / half-time)",
        "mass balance of one CO2 store", "computed here",
        _CO2 + "paco2_after", _OUTSIDE + "test_the_closed_form_solves_the_mass_balance", _EXPECTED,
    ),
    _line(
        "paco2_expected", "PaCO2 expected after a step", "mmHg",
        "half-time 3.5 min falling, 16 min rising; band 3-16 and 4-24 min, steady state +/-10 %",
        "Farhi and Rahn 1955 (dogs, 4 min); Nunn (16 min); Taskar, Chest 1995", "from memory",
        _CO2 + "expected_paco2", _OUTSIDE + "test_a_fall_from_80_to_60", _EXPECTED,
    ),
    _line(
        "co2_half_time", "Half-time of a CO2 store", "min", "ln 2 x 0.863 x store x weight / VA",
        "mass balance; store 1.5 mL/kg/mmHg, Farhi and Rahn 1955 (dogs)", "computed here",
        _CO2 + "half_time_of_store", _OUTSIDE + "test_the_closed_form_solves_the_mass_balance", _EXPECTED,
    ),
    _line(
        "share_done", "Share of a step that is done", "", "1 - 2^(-t / half-time)",
        "mass balance of one CO2 store", "computed here",
        _CO2 + "share_done", _OUTSIDE + "test_share_of_a_step_that_is_done", _EXPECTED,
    ),
)  # fmt: skip

SCORES: Final = (
    _line(
        "hacor", "HACOR (2017)", "points", "points of heart rate, pH, GCS, P/F and respiratory rate, 0-25",
        "Duan, Intensive Care Med 2017;43:192-199; doi 10.1007/s00134-016-4601-3", "secondary",
        "core.judgement.scores.hacor", "tests/outside/test_hacor_table.py::test_every_edge",
        "Hypoxaemic failure that is not acutely hypercapnic; read at 1 h, cut-off above 5.",
    ),
    _line(
        "hacor_failure", "Failure at a HACOR, in its source", "%", "table by points at 1 h",
        "Duan, Intensive Care Med 2017;43:192-199", "secondary",
        "core.judgement.scores.failure_percent", "tests/outside/test_hacor_table.py::test_failure_by_points",
    ),
    _line(
        "hacor_updated", "Updated HACOR (2022)", "points",
        "HACOR + 0.5 SOFA; pneumonia 2.5; cardiogenic oedema -4; pulmonary ARDS 3; immunosuppression 1.5; "
        "septic shock 2.5",
        "Duan, Crit Care 2022;26:196", "from memory",
        "core.judgement.scores.hacor_updated", "tests/outside/test_hacor_table.py::test_updated_worked",
        "Off until the ward switches it on: its added points are from memory.",
    ),
    _line(
        "news2", "NEWS2", "points", "points of seven observations, SpO2 scale 1 or 2, 0-20",
        "Royal College of Physicians 2017", "confirmed",
        "core.judgement.scores.news2", "tests/outside/test_news2_chart.py::test_worked_cases",
        "Scale 2 only where a clinician recorded it.",
    ),
    _line(
        "copd_failure", "COPD failure chart, risk class", "",
        "axes pH, rate, GCS, APACHE II; no axis adverse, between, or the worst corner",
        "Confalonieri, Eur Respir J 2005;25:348", "from memory",
        "core.judgement.scores.copd_failure",
        "tests/outside/test_scores_copd_failure.py::test_every_edge_of_every_axis",
        "Axes from memory; the cells' percentages are not given.",
    ),
)  # fmt: skip
