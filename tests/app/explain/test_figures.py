"""Every figure that an episode can hold explains itself; none is left out without being named here."""

import re
from dataclasses import replace
from html import escape

import pytest

from app.explain.figures import explain_row, explain_score, explanations_of, score_in
from app.explain.html import html_of
from app.figures.groups import figure_groups
from app.figures.rows import FigureRow
from app.look.formats import unbroken
from app.look.theme import THEMES
from app.words import Reader
from core.figures.catalogue import CATALOGUE, figure
from core.judgement.shapes import EpisodeFigures, GasFigure, LeakFigure, RatioFigure
from core.record.instant import HOUR, MINUTE
from core.record.message import Message
from tests.support.sample_ward import sample_ward

ZONE = "Europe/London"
HOLES = re.compile(r"\bNone\b(?! (above|below|where))|\bnan\b|[{}]|\[\[|17746")
"""The last one begins every raw instant of that night."""

NOT_HELD = {
    # turned the other way round, or a second form of a rule: used inside, or on request
    "ph_from_bicarbonate", "paco2_from_bicarbonate", "ph_from_hydrogen_ion", "hydrogen_ion_from_gas", "be_zander",
    "ph_expected_acute_linear", "ph_expected_chronic_linear", "paco2_for_ph_acute", "paco2_for_ph_chronic",
    "sbe_expected_chronic", "aa_gradient_expected_quarter", "aa_gradient_expected_regression", "pf_at_altitude",
    # steps on the way to a figure that is shown
    "inspired_po2", "alveolar_po2", "alveolar_po2_full", "saturation_of_po2", "po2_of_saturation",
    "po2_of_saturation_severinghaus", "saturation_kelman", "po2_ph_slope", "po2_temperature_slope",
    "alveolar_ventilation_for_paco2", "paco2_of_alveolar_ventilation", "port_leak", "leaked_share",
    "paco2_steady", "paco2_steady_after_change", "paco2_after", "paco2_expected", "co2_half_time", "share_done",
    "device_median", "sustained", "mann_kendall", "hacor_failure", "global_band_intubated",
    # told as a warning or doubt of the gas or volume that it is about
    "saturation_difference", "pao2_sao2_check", "tidal_volume_trust",
}  # fmt: skip


def cases() -> list[tuple[str, EpisodeFigures]]:
    ward = sample_ward()
    richest = next(f for f in ward if f.ventilation.ventilatory_ratio.doubt is not None)
    return [("rich", richest), ("flow without FiO2", next(f for f in ward if f.support.fio2 is None)),
            ("every leak row", leaky(richest)), ("metabolic", metabolic(richest)),
            ("alkalosis", alkalosis(richest)), ("venous", venous(richest))]  # fmt: skip


def leaky(f: EpisodeFigures) -> EpisodeFigures:
    at = f.as_of - 2 * HOUR
    leak = LeakFigure(
        40.0, 1.5, 0.5, 2.5, 75.0, 30.0, "unintentional", {}, 44.0, f.as_of, at, at, 55.0, 38.0,
        ((at, at + 9 * MINUTE),), readings_typed=5, readings_typed_over=4,
    )  # fmt: skip
    return replace(f, leak=leak)


def metabolic(f: EpisodeFigures) -> EpisodeFigures:
    gas = GasFigure(f.as_of - HOUR, "arterial", ph=7.25, paco2_mmHg=28.0, pao2_mmHg=95.0, fio2=0.21,
                    hco3_calculated_mmol_L=12.1, sbe_mmol_L=-15.0, aa_gradient_mmHg=19.7, doubt=True)  # fmt: skip
    return replace(f, gases=(*f.gases, gas), profile={**f.profile, "age": 60.0})


def alkalosis(f: EpisodeFigures) -> EpisodeFigures:
    gas = GasFigure(f.as_of - HOUR, "arterial", ph=7.52, paco2_mmHg=46.0, hco3_calculated_mmol_L=36.5)
    return replace(f, gases=(*f.gases, gas))


def venous(f: EpisodeFigures) -> EpisodeFigures:
    told = Message("specimen.hypercapnia_ruled_out", {"pvco2": 42.0, "shock_known": False})
    gas = GasFigure(f.as_of - HOUR, "venous", ph=7.36, paco2_mmHg=42.0, rule_out=told)
    return replace(f, gases=(*f.gases, gas))


def rows() -> list[tuple[str, EpisodeFigures, FigureRow]]:
    reader = Reader(ZONE)
    return [(name, f, row) for name, f in cases() for g in figure_groups(f, reader) for row in g.rows]


def test_nothing_of_the_catalogue_is_left_out_unsaid():
    held = {row.key for _, _, row in rows()} | {key for _, f in cases() for key in f.scores}
    assert set(CATALOGUE) - held == NOT_HELD
    assert held <= set(CATALOGUE)


@pytest.mark.parametrize("unit", ["mmHg", "kPa"])
@pytest.mark.parametrize("key", sorted(set(CATALOGUE) - NOT_HELD))
def test_a_figure_explains_itself(key, unit):
    reader, entry = Reader(ZONE, unit), figure(key)
    found = [explain_row(r, reader, f.as_of) for _, f in cases() for g in figure_groups(f, reader)
             for r in g.rows if r.key == key]  # fmt: skip
    found += [explain_score(key, score_in(f, key), reader, f.as_of) for _, f in cases() if key in f.scores]
    assert found
    for explanation in found:
        assert explanation.formula == entry.formula
        assert explanation.source == entry.source
        assert explanation.sure == entry.certainty
        assert entry.doubt == "" or any(entry.doubt.rstrip(".") in note for note in explanation.notes)
        text = explanation.as_text()
        assert not HOLES.search(text), text
        assert "no value" not in explanation.title or explanation.reason
        for theme in THEMES.values():
            assert escape(unbroken(entry.formula)) in html_of(explanation, theme)


def test_every_value_has_a_unit_or_is_a_pure_number_and_every_gap_a_reason():
    for name, _, row in rows():
        unit = CATALOGUE[row.key].unit
        if row.is_known and unit not in ("", "pH") and row.key not in ("hco3_difference",):
            assert any(c.isalpha() or c == "%" for c in row.value), (name, row)
        assert row.is_known or row.why, (name, row)
        assert row.value == "" or row.why == ""


def test_the_doubt_of_a_volume_travels_with_every_figure_made_from_it():
    _, rich = cases()[0]
    made = {row.key: row for g in figure_groups(rich, Reader(ZONE)) for row in g.rows if row.doubt}
    assert {"ventilatory_ratio", "minute_ventilation_for_paco2"} <= set(made)
    found = explain_row(made["ventilatory_ratio"], Reader(ZONE), rich.as_of)
    assert found.doubt.startswith("Tidal volume doubtful")
    assert found.doubt in found.as_text()


def test_the_doubt_of_a_gas_travels_with_every_figure_made_from_it():
    f = metabolic(sample_ward()[0])
    by_key = {row.key: row for g in figure_groups(f, Reader(ZONE)) for row in g.rows}
    for key in ("gas_class", "hco3_calculated", "aa_gradient", "hydrogen_ion", "ph_expected_acute"):
        assert "marked doubtful" in by_key[key].doubt, key
    assert by_key["vt_per_kg"].doubt == ""


def test_a_metabolic_acidosis_on_air_has_winters_and_the_gradient_of_its_age():
    f = metabolic(sample_ward()[0])
    by_key = {row.key: row for g in figure_groups(f, Reader(ZONE)) for row in g.rows}
    assert by_key["gas_class"].value.startswith("Metabolic acidosis")
    assert by_key["paco2_expected_metabolic_acidosis"].value == "26 mmHg"  # 1.5 x 12.1 + 8
    assert by_key["aa_gradient_expected"].value == "19 mmHg"  # 60 / 4 + 4
    assert any("15" in n for n in by_key["aa_gradient_expected"].notes)  # 2.5 + 0.21 x 60


def test_kpa_says_in_which_unit_the_formula_counts():
    f = metabolic(sample_ward()[0])
    found = explanations_of(f, Reader(ZONE, "kPa"))["gas", "Actual bicarbonate, calculated"]
    assert ("PaCO2", "3.7 kPa (28 mmHg)", "28-Mar-2026 04:30") in found.inputs
    assert any("mmHg; 1 kPa is 7.5 mmHg" in n for n in found.notes)
    plain = explanations_of(f, Reader(ZONE))["gas", "Actual bicarbonate, calculated"]
    assert not any("kPa" in n for n in plain.notes)


def test_a_score_lists_value_points_and_time_and_says_for_whom():
    f = next(f for f in sample_ward() if f.scores["hacor"].points == 8 and f.profile["indication"] == "copd")
    found = explain_score("hacor", score_in(f, "hacor"), Reader(ZONE), f.as_of)
    assert found.title == "HACOR (2017): 8 points"
    assert ("Heart rate", "129/min, 1 point", "28-Mar-2026 04:05") in found.inputs
    assert "outside the population" in found.population
    assert "acute hypercapnia" in found.population
    rox = explain_score("rox", score_in(f, "rox"), Reader(ZONE), f.as_of)
    assert {name for name, _, _ in rox.inputs} == {"SpO2", "FiO2", "Respiratory rate"}
    chart = explain_score("copd_failure", score_in(f, "copd_failure"), Reader(ZONE), f.as_of)
    assert chart.title.endswith("risk class: between no axis adverse and the worst corner")
    assert ("APACHE II", "missing", "") in chart.inputs
    assert any("step 2 on its axis" in value for _, value, _ in chart.inputs)


def test_what_is_expected_is_not_made_into_text_to_paste():
    _, rich = cases()[0]
    found = explanations_of(rich, Reader(ZONE))
    assert not found["course", "PaCO2 expected"].may_be_copied
    assert found["oxygenation", "P/F"].may_be_copied


def test_a_ratio_without_values_says_why():
    bare = EpisodeFigures("x", 0, rox=RatioFigure(reasons={"latest": Message("trend.no_values")}))
    by_name = {(g.key, r.name): r for g in figure_groups(bare, Reader(ZONE)) for r in g.rows}
    assert by_name["oxygenation", "ROX"].why == "No values"
    assert all(r.why for r in by_name.values() if not r.is_known)
