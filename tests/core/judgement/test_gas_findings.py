"""What each gas says by itself: state, figures with reasons, consistency, off support."""

import pytest

from core.judgement.gas_findings import gas_figures, is_off_support
from core.judgement.policy import read_policy, shipped_policy, shipped_text
from core.record.settings import SettingsInForce
from core.record.support import support_time
from tests.support.log import episode, moment

START = "00:50 rr 30\n01:00 mode bpap-st ipap 14 epap 5 fio2 40\n"


def gases(log, policy=None):
    e = episode(log)
    settings = SettingsInForce(e)
    return gas_figures(e.gases, settings, support_time(e, settings), policy or shipped_policy())


@pytest.mark.parametrize(
    ("gas", "state"),
    [
        ("ph 7.24 paco2 70", "severe"), ("ph 7.249 paco2 70", "severe"), ("ph 7.25 paco2 70", "acidotic"),
        ("ph 7.34 paco2 60", "acidotic"), ("ph 7.349 paco2 60", "acidotic"), ("ph 7.35 paco2 60", "resolved"),
        ("ph 7.35", None), ("paco2 60", None), ("ph 7.20 paco2 70 site venous", None),
        ("ph 7.20 paco2 70 site capillary", "severe"),
    ],
)  # fmt: skip
def test_the_state_follows_the_ph_as_reported(gas, state):
    (figure,) = gases(START + f"02:00 {gas}")
    assert figure.state == state
    assert (figure.state is None) == ("state" in figure.reasons)


@pytest.mark.parametrize(
    ("gas", "above"),
    [("ph 7.45 paco2 40", None), ("ph 7.451 paco2 40", 7.45), ("ph 7.52 paco2 30 site venous", None)],
)
def test_a_ph_above_its_upper_limit_is_marked_while_the_state_stays(gas, above):
    (figure,) = gases(START + f"02:00 {gas}")
    assert figure.ph_above == above
    assert figure.state == (None if "venous" in gas else "resolved")


@pytest.mark.parametrize(
    ("paco2", "hypercapnic"),
    [("45", False), ("45.2", False), ("46", True), ("6.0 kPa", False), ("6.1 kPa", True)],
)
def test_hypercapnia_does_not_depend_on_the_unit(paco2, hypercapnic):
    (figure,) = gases(START + f"02:00 ph 7.30 paco2 {paco2}")
    assert figure.hypercapnic is hypercapnic


def test_oxygen_figures_need_an_arterial_sample_and_a_known_fio2():
    arterial, capillary, on_flow = gases(
        START + "02:00 ph 7.30 paco2 60 pao2 60 site arterial\n02:10 ph 7.30 paco2 60 pao2 60 site capillary\n"
        "03:00 o2 flow 4\n03:10 ph 7.30 paco2 60 pao2 60 site arterial"
    )
    assert arterial.pf_mmHg == pytest.approx(150.0)
    assert arterial.aa_gradient_mmHg == pytest.approx(0.4 * 713 - 60 / 0.8 - 60)
    assert capillary.pf_mmHg is None
    assert capillary.reasons["pf_mmHg"].key == "gas.needs_arterial"
    assert on_flow.pf_mmHg is None
    assert on_flow.reasons["pf_mmHg"].key == "undefined.fio2_unknown"


def test_the_gas_own_fio2_beats_the_setting_and_a_difference_asks():
    (figure,) = gases(START + "02:00 ph 7.30 paco2 60 pao2 60 gas fio2 50")
    assert (figure.fio2, figure.fio2_from) == (0.5, "gas")
    assert "gas.fio2_differs" in [w.key for w in figure.warnings]


def test_in_a_break_the_setting_says_nothing_about_oxygen():
    (figure,) = gases(START + "02:00 break start\n02:10 ph 7.30 paco2 60 pao2 60 site arterial")
    assert figure.fio2 is None
    assert figure.off_support


def test_a_gas_of_the_minute_in_which_the_mask_went_on_was_drawn_without_it():
    (figure,) = gases(START + "02:00 break start\n02:30 break end\n02:30 ph 7.30 paco2 60 pao2 60 site arterial")
    assert figure.pf_mmHg is None
    assert figure.off_support


@pytest.mark.parametrize(("clock", "minutes"), [("02:20", None), ("02:30", None), ("02:35", 5), ("03:00", 30)])
def test_a_gas_soon_after_the_mask_went_on_again_says_so_and_is_drawn_on_what_is_set(clock, minutes):
    (figure,) = gases(START + f"02:00 break start\n02:30 break end\n{clock} ph 7.30 paco2 60 pao2 60 site arterial")
    assert figure.off_support
    assert not figure.support_ended
    assert figure.back_on_minutes == minutes
    assert (figure.fio2_from == "setting") is (minutes is not None)


def test_a_gas_after_the_end_says_that_support_had_ended():
    log = START + "02:00 break start\n02:30 break end\n02:40 stopped\n02:50 ph 7.30 paco2 60"
    (figure,) = gases(log)
    assert (figure.off_support, figure.support_ended, figure.back_on_at) == (True, True, None)


def test_on_steady_support_there_is_nothing_of_a_break_to_say():
    (figure,) = gases(START + "02:00 break start\n02:30 break end\n03:01 ph 7.30 paco2 60")
    assert (figure.off_support, figure.support_ended, figure.back_on_at) == (False, False, None)


def test_after_the_end_the_setting_says_nothing_about_oxygen():
    log = START + "02:00 ph 7.30 paco2 60 pao2 60 site arterial\n02:00 stopped\n02:40 ph 7.36 paco2 50 pao2 60"
    last_on, after = gases(log)
    assert last_on.pf_mmHg == 150  # of the minute in which support ended: drawn before
    assert after.pf_mmHg is None
    assert after.reasons["pf_mmHg"].key == "undefined.fio2_unknown"


def test_a_bicarbonate_that_cannot_belong_to_the_gas_is_named():
    (right,) = gases(START + "02:00 ph 7.31 paco2 50 hco3 25")
    (wrong,) = gases(START + "02:00 ph 7.31 paco2 50 hco3 31")
    assert right.consistent is True
    assert wrong.consistent is False
    assert "gas.inconsistent" in [w.key for w in wrong.warnings]


def test_standard_bicarbonate_is_not_checked():
    text = shipped_text().replace('reported_bicarbonate = "actual"', 'reported_bicarbonate = "standard"')
    (figure,) = gases(START + "02:00 ph 7.31 paco2 50 hco3 31", read_policy(text))
    assert figure.consistent is None
    assert figure.reasons["consistent"].key == "gas.bicarbonate_is_standard"


def test_an_impossible_gradient_says_the_fio2_cannot_be_right():
    (figure,) = gases("01:00 mode bpap-st ipap 14 epap 5 fio2 21\n02:00 ph 7.22 paco2 92 pao2 60 site arterial")
    assert "gas.negative_gradient" in [w.key for w in figure.warnings]


@pytest.mark.parametrize(
    ("at", "off"),
    [("00:30", False), ("01:30", False), ("02:00", False), ("02:01", True), ("02:29", True), ("03:00", True),
     ("03:01", False), ("05:00", False), ("05:01", True)],
)  # fmt: skip
def test_off_support_is_in_a_break_and_thirty_minutes_after_it_and_after_the_end(at, off):
    e = episode(START + "02:00 break start\n02:30 break end\n05:00 stopped")
    assert is_off_support(moment(at), support_time(e, SettingsInForce(e)), shipped_policy()) is off


def test_a_gas_of_the_minute_in_which_the_mask_came_off_was_drawn_before_it():
    log = START + "02:00 ph 7.30 paco2 60 pao2 60 site arterial\n02:00 mask off flow 2"
    (figure,) = gases(log)
    assert not figure.off_support
    assert figure.fio2 == 0.4  # the oxygen of the mask, not that of the break
    assert figure.fio2_from == "setting"


def test_a_gas_of_the_minute_of_a_new_fio2_was_drawn_on_the_one_before():
    (figure,) = gases(START + "02:00 ph 7.30 paco2 60 pao2 56 site arterial\n02:00 fio2 60")
    assert (figure.fio2, round(figure.pf_mmHg)) == (0.4, 140)
    (unknown,) = gases(START + "01:30 flow 4\n02:00 ph 7.30 paco2 60 pao2 56 site arterial\n02:00 fio2 60")
    assert unknown.pf_mmHg is None


def test_the_first_fio2_ever_is_that_of_a_gas_of_its_minute():
    (figure,) = gases("02:00 fio2 40\n02:00 ph 7.30 paco2 60 pao2 56 site arterial")
    assert figure.fio2 == 0.4
