"""A gas in plain words: its class with the reasoning, what is expected of it, and what it may not be read for."""

from dataclasses import fields

import pytest

from core.figures.catalogue import CATALOGUE
from core.judgement.derived import DerivedFigure
from core.judgement.gas_findings import gas_figures
from core.judgement.gas_reading import read
from core.judgement.policy import read_policy, shipped_policy, shipped_text
from core.record.settings import SettingsInForce
from core.record.support import support_time
from tests.support.log import episode

ON_AIR = "01:00 mode bpap-st ipap 14 epap 5 fio2 21\n"
START = "00:50 rr 30\n01:00 mode bpap-st ipap 14 epap 5 fio2 40\n"


def reading(gas, age=None, policy=None, start=START):
    e = episode(f"{start}02:00 {gas}")
    settings = SettingsInForce(e)
    (figure,) = gas_figures(e.gases, settings, support_time(e, settings), policy or shipped_policy())
    return read(figure, age)


@pytest.mark.parametrize(
    ("gas", "key", "second"),
    [
        ("ph 7.25 paco2 60", "acute_respiratory_acidosis", "none"),
        ("ph 7.37 paco2 57", "chronic_respiratory_acidosis", "none"),
        ("ph 7.22 paco2 80", "acute_on_chronic_respiratory_acidosis", "none"),
        ("ph 7.08 paco2 80", "acute_respiratory_acidosis", "metabolic_acidosis"),
        ("ph 7.28 paco2 26", "metabolic_acidosis", "none"),
    ],
)
def test_a_gas_is_named_with_its_reasoning(gas, key, second):
    """Classes as the worked gases of the University of Washington, Doyle and Winters' rule have them."""
    found = reading(gas)
    assert found.classification.key == f"gas_class.{key}"
    assert found.classification.values["second"] == second
    assert [s.key for s in found.steps][:2] == ["reason.ph", "reason.paco2"]
    assert len(found.steps) >= 3


def test_what_is_expected_of_an_acute_and_a_chronic_80():
    found = reading("ph 7.22 paco2 80")
    assert found.hydrogen_ion_nmol_L.value == pytest.approx(60.3, abs=0.05)
    assert found.sbe_siggaard_mmol_L.value == pytest.approx(4.94, abs=0.01)
    assert (found.hco3_expected_acute_mmol_L.value, found.hco3_expected_chronic_mmol_L.value) == (28.0, 38.0)
    assert found.ph_expected_acute.value == pytest.approx(7.16, abs=0.005)
    assert found.ph_expected_chronic.value == pytest.approx(7.29, abs=0.005)
    assert found.usual_paco2_estimate_mmHg.value == pytest.approx(40 + (32.38 - 24) / 0.35, abs=0.05)
    assert found.usual_paco2_estimate_mmHg.caveats[0].key == "caveat.usual_paco2_is_a_guess"
    assert found.hco3_expected_chronic_mmol_L.inputs["paco2"].value == 80.0


def test_winters_only_of_a_metabolic_disturbance():
    found = reading("ph 7.28 paco2 26").paco2_expected_metabolic_mmHg
    assert found.value == pytest.approx(26, abs=0.2)
    assert found.key == "paco2_expected_metabolic_acidosis"
    assert reading("ph 7.22 paco2 80").paco2_expected_metabolic_mmHg.reason.key == "gas.not_metabolic"


def test_a_venous_gas_is_not_read_by_arterial_rules():
    found = reading("ph 7.30 paco2 60 pao2 35 site venous")
    assert found.classification is None
    assert found.classification_reason.key == "specimen.venous_is_not_arterial"
    assert found.steps == ()
    for figure in (found.hco3_expected_acute_mmol_L, found.usual_paco2_estimate_mmHg, found.aa_gradient_full_mmHg,
                   found.paco2_expected_metabolic_mmHg):  # fmt: skip
        assert figure.value is None
        assert figure.reason.key == "specimen.venous_is_not_arterial"
    assert found.hydrogen_ion_nmol_L.value == pytest.approx(50.1, abs=0.05)


def test_a_capillary_gas_is_read_for_ph_and_pco2_but_not_for_po2():
    found = reading("ph 7.22 paco2 80 pao2 50 site capillary", 60, start=ON_AIR)
    assert found.classification.key == "gas_class.acute_on_chronic_respiratory_acidosis"
    assert found.aa_gradient_full_mmHg.reason.key == "specimen.capillary_is_not_arterial"
    assert found.aa_gradient_expected_mmHg.reason.key == "specimen.capillary_is_not_arterial"


def test_the_gradient_expected_for_age_is_for_room_air_only_and_names_the_other_rules():
    found = reading("ph 7.40 paco2 40 pao2 80", 60, start=ON_AIR).aa_gradient_expected_mmHg
    assert found.value == 19.0
    assert found.caveats[0].values == {"quarter": 17.5, "regression": pytest.approx(15.1)}
    assert reading("ph 7.40 paco2 40 pao2 80", 60).aa_gradient_expected_mmHg.reason.key == "undefined.air_only"
    no_age = reading("ph 7.40 paco2 40 pao2 80", None, start=ON_AIR).aa_gradient_expected_mmHg
    assert no_age.reason.values["input"] == "age"


def test_gases_are_corrected_for_no_temperature_unless_the_ward_says_so():
    log = "ph 7.30 paco2 60 pao2 60"
    start = START + "01:50 temp 39\n"
    off = reading(log, start=start)
    assert off.ph_at_temperature.reason.key == "gas.temperature_correction_off"
    ward = read_policy(shipped_text().replace("temperature_correction = false", "temperature_correction = true"))
    on = reading(log, policy=ward, start=start)
    assert on.ph_at_temperature.value == pytest.approx(7.271, abs=0.0005)
    assert on.paco2_at_temperature_mmHg.value == pytest.approx(65.5, abs=0.05)
    assert on.ph_at_temperature.inputs["temp"].value == 39.0
    assert on.classification == off.classification
    without = reading(log, policy=ward)
    assert without.ph_at_temperature.reason.values["input"] == "temp"


def test_every_figure_has_its_line_in_the_catalogue_and_every_null_its_reason():
    for gas in (
        "ph 7.22 paco2 80 pao2 60", "ph 7.28 paco2 26", "paco2 60", "ph 7.30", "pao2 60", "ph 7.3 site venous",
    ):  # fmt: skip
        found = reading(gas)
        for f in fields(found):
            figure = getattr(found, f.name)
            if isinstance(figure, DerivedFigure):
                assert figure.key in CATALOGUE
                assert (figure.value is None) == (figure.reason is not None)
