"""The preview names each value with its unit, the moment, and pressure support before and after."""

import pytest

from app.operations.entry import Preview
from app.strip.preview_words import own_rate, preview_words
from app.words import Reader
from core.record.log_line import read_line
from core.record.message import Message
from core.record.settings import SettingsInForce
from tests.support.invented_ward import NOW, ZONE, at, failing, record_of

READER = Reader(ZONE, "mmHg")


def said(text, record=None, now=NOW):
    record = record or failing().record
    line = read_line(text, now=now, zone=ZONE, in_force=SettingsInForce(record).at)
    return preview_words(Preview(record.key, "Bed 7", line, line.questions), record, now, READER)


def test_settings_with_support_before_and_after():
    words = said("22/6 40")
    assert words.head == "Bed 7, now (05:30)"
    assert words.values == ("IPAP 22 cmH2O", "EPAP 6 cmH2O", "FiO2 40 %")
    assert "IPAP 20 to 22, pressure support 14 to 16 cmH2O." in words.effects
    assert words.questions == ()


def test_what_is_set_like_this_already_is_said_to_change_nothing():
    assert said("20/6 35").effects == ("Nothing changes: it is set like this already.",)
    assert not any("Nothing changes" in e for e in (*said("22/6 40").effects, *said("rr 20").effects))


def test_a_raised_epap_alone_says_that_it_lowers_support():
    expected = "Raising EPAP alone lowers pressure support: EPAP 6 to 8, pressure support 14 to 12 cmH2O."
    assert expected in said("epap 8").effects


def test_both_pressures_are_named_where_both_move():
    assert "IPAP 20 to 14, EPAP 6 to 7, pressure support 14 to 7 cmH2O." in said("14/7").effects
    assert "IPAP 20 to 22, EPAP 6 to 8, pressure support stays 14 cmH2O." in said("22/8").effects
    assert not any("alone" in e for e in (*said("14/7").effects, *said("22/8 40").effects))


def test_support_from_another_kind_begins_with_a_capital():
    record = record_of("E", [("20:00", {"label": "Bed 1"}), ("20:10", {"mode": "CPAP", "cpap": "8"})])
    told = said("bpap-st 14/6", record, at("21:00")).effects
    assert told[:2] == ("Pressure support 0 to 8 cmH2O.", "Expiratory pressure 8 to 6 cmH2O.")


def test_a_rate_below_the_own_rate_says_that_it_takes_no_effect():
    assert any("takes no effect" in e for e in said("br 16").effects)
    assert own_rate(failing().record, NOW) == 20


def test_ps_says_the_ipap_it_means():
    words = said("ps 12")
    assert "IPAP 18 cmH2O" in words.values
    assert any("IPAP 18" in e for e in words.effects)


def test_the_moment_is_told_when_it_is_not_now():
    assert said("04:50 rr 22").head == "Bed 7, 04:50"
    assert said("23:50 rr 22").head == "Bed 7, 27-Mar-2026 23:50"
    assert said("20m ago rr 22").head == "Bed 7, 05:10"


def test_laboratory_values_keep_what_was_typed_and_show_the_other_unit():
    words = said("ph 7,40 paco2 8.3 kPa")
    assert words.values == ("pH 7.40", "PaCO2 8.3 kPa (62 mmHg)")


def test_an_event_a_choice_and_words():
    assert said("gas sent").values == ("Gas sent",)
    assert said("note slept <b>well</b>").values == ("Note: slept <b>well</b>",)
    assert said("interface nasal").values == ("Interface nasal",)


def test_choices_and_calls_are_read_as_they_are_said():
    assert said("indication copd").values == ("Indication: COPD",)
    assert said("acvpu confusion dyspnoea 8").values == ("ACVPU: new confusion", "Dyspnoea 8 of 10")
    assert said("told registrar | busy").values == ("Told: registrar. Answer: busy",)


def test_a_gas_without_a_site_says_what_it_is_taken_for():
    assert "No sample site is named: taken as arterial, unless this gas has one already." in said("ph 7.3").effects
    assert not any("taken as" in e for e in said("ph 7.3 site venous").effects)


def test_unusual_values_are_asked_about():
    words = said("spo2 60")
    assert len(words.questions) == 1
    assert "60" in words.questions[0]


def test_support_that_begins_is_told():
    record = record_of("E", [("20:00", {"label": "Bed 1"})])
    words = said("bpap-st 14/5 28", record, at("21:00"))
    assert any("Pressure support 9 cmH2O" in e for e in words.effects)


@pytest.mark.parametrize("text", ["o2_flow 4", "cpap 10", "off", "ti 1.2", "12/5"])
def test_no_line_speaks_of_nan_or_none(text):
    words = said(text)
    told = " ".join((*words.values, *words.effects))
    assert "nan" not in told.lower()
    assert "None" not in told


def test_questions_of_the_operation_are_passed_on():
    line = read_line("rr 20", now=NOW, zone=ZONE, in_force=SettingsInForce(failing().record).at)
    words = preview_words(Preview("E", "Bed", line, (Message("gas.site_assumed"),)), None, NOW, READER)
    assert words.questions == ("Nobody said what was sampled: taken as arterial.",)
