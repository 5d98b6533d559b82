"""A gas that disagrees with itself says so, and why it might; a venous one says what it rules out."""

import pytest

from core.judgement.gas_findings import gas_figures
from core.judgement.policy import shipped_policy
from core.record.settings import SettingsInForce
from core.record.support import support_time
from tests.support.log import episode

START = "00:50 rr 30\n01:00 mode bpap-st ipap 14 epap 5 fio2 40\n"


def the_gas(log):
    e = episode(START + log)
    settings = SettingsInForce(e)
    (figure,) = gas_figures(e.gases, settings, support_time(e, settings), shipped_policy())
    return figure


def keys(messages):
    return [m.key for m in messages]


def test_a_gas_that_agrees_needs_no_explanation():
    assert the_gas("02:00 ph 7.25 paco2 60 hco3 26").explanations == ()


@pytest.mark.parametrize(
    ("gas", "likeliest"),
    [
        ("ph 7.30 paco2 8.4 mmHg hco3 30", "consistency.kpa_taken_for_mmhg"),
        ("ph 7.23 paco2 76 hco3 24.9", "consistency.standard_bicarbonate"),
        ("ph 7.25 paco2 60 hco3 62", "consistency.digits_swapped"),
    ],
)
def test_the_likeliest_explanation_comes_first_and_a_misreading_always_last(gas, likeliest):
    figure = the_gas(f"02:00 {gas}")
    assert figure.consistent is False
    assert keys(figure.explanations)[0] == likeliest
    assert keys(figure.explanations)[-1] == "consistency.copying_slip"


@pytest.mark.parametrize(("sao2", "doubted"), [("88", False), ("84", False), ("83", True), ("94", True)])
def test_a_saturation_that_its_own_po2_contradicts_is_doubted_beyond_five_points(sao2, doubted):
    """PO2 65 at pH 7.25 goes with 88.2 %."""
    figure = the_gas(f"02:00 ph 7.25 paco2 60 pao2 65 sao2 {sao2}")
    assert figure.sao2_percent == float(sao2)
    assert ("gas.saturation_differs" in keys(figure.warnings)) is doubted


@pytest.mark.parametrize(
    ("log", "key"),
    [
        ("02:00 ph 7.36 paco2 44 site venous", "specimen.hypercapnia_ruled_out"),
        ("02:00 ph 7.36 paco2 45 site venous", "specimen.hypercapnia_not_ruled_out"),
        ("02:00 ph 7.36 site venous", "specimen.pco2_unknown"),
        ("01:30 septic_shock yes\n02:00 ph 7.36 paco2 40 site venous", "specimen.no_rule_out_in_shock"),
    ],
)
def test_a_venous_pco2_rules_out_only_below_45_and_never_in_shock(log, key):
    figure = the_gas(log)
    assert figure.rule_out.key == key
    assert figure.state is None
    assert figure.pf_mmHg is None


def test_that_shock_is_not_known_is_said():
    log = "01:30 septic_shock no\n02:00 ph 7.36 paco2 40 site venous"
    assert the_gas(log).rule_out.values["shock_known"] is False


@pytest.mark.parametrize("site", ["arterial", "capillary"])
def test_only_a_venous_gas_rules_out(site):
    assert the_gas(f"02:00 ph 7.36 paco2 40 site {site}").rule_out is None
