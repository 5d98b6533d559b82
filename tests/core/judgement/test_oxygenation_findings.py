"""Oxygenation beside the ratios: when each figure is taken, what it is made from, and why it is absent."""

from dataclasses import fields

import pytest

from core.figures.catalogue import CATALOGUE
from core.figures.episode_figures import episode_figures
from core.judgement.policy import shipped_policy
from tests.support.log import device, episode, moment

START = "00:50 rr 20\n01:00 mode bpap-st ipap 18 epap 6 fio2 50 ti 1.0 backup 14\n"
SPO2 = "02:50 spo2 90 rr 20 hr 110\n"
GAS = "02:50 ph 7.35 paco2 45 pao2 60 site arterial\n"


def oxygenation(log, *samples, as_of="03:00"):
    return episode_figures(episode(log, samples=samples), moment(as_of), shipped_policy()).oxygenation


def test_three_methods_and_the_one_shown_is_named():
    """SpO2 92 on 0.50: 128, 143 and 176 mmHg by the three published methods."""
    o = oxygenation(START + "02:50 spo2 92\n")
    shown = (o.pf_imputed_mmHg, o.pf_imputed_linear_mmHg, o.pf_imputed_loglinear_mmHg)
    assert [round(f.value) for f in shown] == [128, 143, 176]
    assert [f.caveats[0].values["method"] for f in shown] == ["non-linear", "linear", "log-linear"]
    assert o.pf_imputed_mmHg.at == moment("02:50")
    assert o.pf_imputed_mmHg.inputs["spo2"].value == 92.0
    assert o.pf_imputed_mmHg.inputs["fio2"].value == 0.5


@pytest.mark.parametrize(
    ("log", "key"),
    [
        ("02:50 spo2 98 rr 20 hr 90\n", "trend.spo2_above_ceiling"),
        ("02:40 o2 flow 6\n02:50 spo2 92 rr 20 hr 90\n", "trend.fio2_not_known"),
        ("02:50 hr 90\n", "trend.no_values"),
    ],
)
def test_no_imputed_ratio_above_97_without_fio2_or_without_spo2(log, key):
    o = oxygenation(START + log)
    for figure in (o.pf_imputed_mmHg, o.pf_imputed_linear_mmHg, o.pf_imputed_loglinear_mmHg,
                   o.oxygen_saturation_index):  # fmt: skip
        assert figure.value is None
        assert figure.reason.key == key


def test_indices_with_the_mean_pressure_of_bilevel_support():
    """18/6, 1.0 s at 20/min: 10 cmH2O. OI 10 x 0.5 x 100 / 60 = 8.3, OSI 10 x 0.5 x 100 / 90 = 5.6 (Chen 2018)."""
    o = oxygenation(START + SPO2 + GAS)
    assert o.mean_airway_pressure_cmH2O.value == pytest.approx(10.0)
    assert o.oxygenation_index.value == pytest.approx(8.333, abs=0.001)
    assert o.oxygen_saturation_index.value == pytest.approx(5.556, abs=0.001)
    assert o.oxygenation_index.caveats[0].key == "caveat.no_adult_cut_off_on_mask"
    assert o.oxygenation_index.inputs["paw_mean"].value == pytest.approx(10.0)


@pytest.mark.parametrize(
    ("change", "pressure", "key"),
    [
        ("01:30 mode cpap cpap 9\n", 9.0, None),
        ("01:30 mode volume-assured\n", None, "oxygenation.no_fixed_pressure"),
        ("01:30 ti 3.0\n", None, "undefined.breath_longer_than_cycle"),
        ("02:45 break_start\n", None, "oxygenation.off_support"),
    ],
)
def test_no_mean_pressure_is_guessed(change, pressure, key):
    found = oxygenation(START + change + SPO2).mean_airway_pressure_cmH2O
    assert found.value == pressure
    assert (found.reason.key if found.reason else None) == key


def test_without_an_inspiratory_time_there_is_no_mean_pressure_and_no_index():
    o = oxygenation(START.replace("ti 1.0 ", "") + SPO2 + GAS)
    for figure in (o.mean_airway_pressure_cmH2O, o.oxygenation_index, o.oxygen_saturation_index):
        assert figure.value is None
        assert figure.reason.values["input"] == "ti"


@pytest.mark.parametrize(
    ("pao2", "band"), [("151", "not met"), ("150", "mild"), ("100", "moderate"), ("50", "severe")]
)
def test_bands_of_the_2012_definition(pao2, band):
    """P/F 300, 200 and 100 belong to the worse band; on FiO2 0.50."""
    o = oxygenation(START + f"02:50 ph 7.35 paco2 45 pao2 {pao2} site arterial\n")
    assert o.berlin_2012.value == band
    assert [c.key for c in o.berlin_2012.caveats][1] == "caveat.berlin_grades_on_mask"


def test_below_5_cmH2O_the_criterion_is_not_met_and_without_a_pressure_it_is_not_known():
    gas = "02:50 ph 7.35 paco2 45 pao2 60 site arterial\n"
    assert oxygenation(START + "01:30 epap 4\n" + gas).berlin_2012.value == "not met"
    high_flow = "00:50 rr 20\n01:00 mode high-flow nasal fio2 50 flow 45\n"
    assert oxygenation(high_flow + gas).berlin_2012.reason.key == "oxygenation.needs_a_pressure"
    assert oxygenation("00:55 ph 7.35 paco2 45 pao2 60 site arterial\n" + START).berlin_2012.value is None


@pytest.mark.parametrize(
    ("log", "band", "made_from"),
    [
        (START + "02:50 spo2 92\n", "met", {"sf", "spo2"}),
        (START.replace("50 ti", "25 ti") + "02:50 spo2 92\n", "not met", {"sf", "spo2"}),
        (START + GAS, "met", {"pf"}),
        (START + "01:30 epap 4\n" + SPO2, "not met", {"sf", "spo2"}),
        (START + SPO2 + GAS, "met", {"pf", "sf", "spo2"}),
        (START + "01:40 ph 7.35 paco2 45 pao2 60 site arterial\n" + SPO2, "met", {"sf", "spo2"}),
        ("00:50 rr 20\n01:00 mode high-flow nasal fio2 50 flow 45\n" + SPO2, "met", {"sf", "spo2"}),
        ("00:50 rr 20\n01:00 mode high-flow nasal fio2 50 flow 25\n" + SPO2, "not met", {"sf", "spo2"}),
    ],
)
def test_the_global_criterion_takes_the_newer_ratio_or_both(log, band, made_from):
    found = oxygenation(log).global_2023
    assert found.value == band
    assert set(found.inputs) & {"pf", "sf", "spo2"} == made_from


def test_rox_hr_and_mrox_say_where_they_were_validated():
    """ROX of 92 % on 0.60 at 28/min with a heart rate of 110: ROX-HR 4.98; PaO2 65: mROX 3.87."""
    log = START.replace("fio2 50", "fio2 60") + "02:50 spo2 92 rr 28 hr 110\n"
    o = oxygenation(log + "02:50 ph 7.3 paco2 50 pao2 65 site arterial\n")
    assert o.rox_hr.value == pytest.approx(4.98, abs=0.005)
    assert o.mrox.value == pytest.approx(3.87, abs=0.005)
    for figure in (o.rox_hr, o.mrox):
        assert figure.caveats[0].key == "caveat.validated_in_high_flow"
    assert o.mrox.inputs["rr"].at == moment("02:50")


def test_a_heart_rate_from_before_a_change_is_not_taken():
    late = START + "02:40 hr 110\n02:45 fio2 60\n02:50 spo2 92 rr 28\n"
    assert oxygenation(late).rox_hr.reason.values["input"] == "hr"


@pytest.mark.parametrize("site", ["venous", "capillary"])
def test_only_an_arterial_po2_counts(site):
    o = oxygenation(START + f"02:50 ph 7.35 paco2 45 pao2 60 site {site}\n")
    for figure in (o.oxygenation_index, o.mrox, o.berlin_2012):
        assert figure.reason.key == "oxygenation.no_arterial_gas"


def test_every_figure_has_its_line_in_the_catalogue_and_every_null_its_reason():
    minutes = device("spo2", "02:00", [91.0] * 60)
    for log, samples in ((START, ()), (START + SPO2 + GAS, ()), (START, (minutes,)), ("00:50 rr 20\n", ())):
        o = oxygenation(log, *samples)
        for f in fields(o):
            figure = getattr(o, f.name)
            assert figure.key in CATALOGUE
            assert (figure.value is None) == (figure.reason is not None), f.name
