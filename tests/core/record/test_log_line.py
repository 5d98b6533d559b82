"""The line's grammar: what it reads, what it asks, what it refuses."""

from contextlib import suppress
from math import nan

import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.record.instant import MINUTE, iso, parse
from core.record.log_line import read_line
from core.record.message import RecordError
from core.record.settings import Settings

NOW = parse("2026-03-28T02:10:00+00:00")
BILEVEL = Settings("BPAP-ST", 14.0, 5.0, nan, 0.35, nan, 14.0, nan, None)
NOTHING = Settings(None, nan, nan, nan, nan, nan, nan, nan, None)
ON_CPAP = Settings("CPAP", nan, nan, 8.0, 0.4, nan, nan, nan, None)


def read(text, in_force=BILEVEL):
    return read_line(text, now=NOW, zone="Europe/London", in_force=in_force)


def values(text, in_force=BILEVEL):
    return {r.channel.key: r.value for r in read(text, in_force).readings}


@pytest.mark.parametrize(
    ("text", "expected"),
    [
        ("16/6 35", {"ipap": 16.0, "epap": 6.0, "fio2": 0.35}),
        ("16 6", {"ipap": 16.0, "epap": 6.0}),
        ("ipap 16 epap 6 fio2 35%", {"ipap": 16.0, "epap": 6.0, "fio2": 0.35}),
        ("ipap 16,5", {"ipap": 16.5}),
        ("ps 10 epap 5", {"ipap": 15.0, "epap": 5.0}),
        ("ps 12", {"ipap": 17.0}),
        ("rr 28 spo2 91 bp 118/64", {"rr": 28.0, "spo2": 91.0, "sbp": 118.0, "dbp": 64.0}),
        ("gas sent", {"gas_sent": None}),
        ("mask off", {"mask_off": None}),
        ("told registrar | will come", {"told": "registrar | will come"}),
        ("note tired at 16/6", {"note": "tired at 16/6"}),
        ("mode pressure control", {"mode": "pressure control"}),
        ("bpap-s", {"mode": "BPAP-S"}),
        ("cpap", {"mode": "CPAP"}),
        ("o2 flow 3", {"o2_flow": 3.0}),
        ("o2 35%", {"fio2": 0.35}),
        ("o2 35", {"fio2": 0.35}),
        ("o2 4 l", {"o2_flow": 4.0}),
        ("o2 4l/min", {"o2_flow": 4.0}),
        ("cpap 10 40", {"cpap": 10.0, "mode": "CPAP", "fio2": 0.4}),
        ("cpap 10 40% rr 22", {"cpap": 10.0, "mode": "CPAP", "fio2": 0.4, "rr": 22.0}),
        ("rr28 spo291", {"rr": 28.0, "spo2": 91.0}),
        ("ipap16 epap6 fio235", {"ipap": 16.0, "epap": 6.0, "fio2": 0.35}),
        ("bp118/64", {"sbp": 118.0, "dbp": 64.0}),
        (
            "ps12",
            {
                "ipap": 17.0,
            },
        ),
        ("/16/6 35", {"ipap": 16.0, "epap": 6.0, "fio2": 0.35}),
        ("/ rr 28", {"rr": 28.0}),
        ("ceiling of care no intubation", {"ceiling_of_care": "no intubation"}),
        ("backup rate 16", {"rate_set": 16.0}), ("respiratory rate 22", {"rr": 22.0}),
        ("spo2:91", {"spo2": 91.0}), ("spo2: 91 rr = 22", {"spo2": 91.0, "rr": 22.0}),
        ("note: tired", {"note": "tired"}), ("site: venous ph:7.31", {"site": "venous", "ph": 7.31}),
        ("18 / 6", {"ipap": 18.0, "epap": 6.0}), ("18/ 6 40", {"ipap": 18.0, "epap": 6.0, "fio2": 0.4}),
        ("bp 118 / 64", {"sbp": 118.0, "dbp": 64.0}), ("16 /6 35", {"ipap": 16.0, "epap": 6.0, "fio2": 0.35}),
        ("hfnc fio2 60%", {"mode": "high-flow nasal", "fio2": 0.6}), ("hfnc", {"mode": "high-flow nasal"}),
        ("high-flow nasal", {"mode": "high-flow nasal"}), ("high flow", {"mode": "high-flow nasal"}),
        ("High flow nasal o2_flow 50", {"mode": "high-flow nasal", "o2_flow": 50.0}),
        ("pressure support 12", {"ipap": 17.0}), ("pressure control 18/6", {
            "mode": "pressure control", "ipap": 18.0, "epap": 6.0}), ("vomited", {"vomiting": None}),
    ],
)  # fmt: skip
def test_lines_are_read(text, expected):
    assert values(text) == expected


def test_a_gas_in_kilopascal_keeps_what_was_typed():
    line = read("ph 7,26 paco2 8.3 kPa")
    assert [(r.channel.key, r.raw, r.raw_unit) for r in line.readings] == [
        ("ph", "7,26", "pH"),
        ("paco2", "8.3", "kPa"),
    ]


def test_a_gas_pressure_without_a_unit_is_in_the_wards():
    line = read_line("ph 7.26 paco2 8.3 pao2 8", now=NOW, zone="UTC", in_force=BILEVEL, gas_unit="kPa")
    assert [(r.channel.key, r.raw_unit) for r in line.readings] == [("ph", "pH"), ("paco2", "kPa"), ("pao2", "kPa")]
    said = read_line("paco2 62 mmHg bp 120/70", now=NOW, zone="UTC", in_force=BILEVEL, gas_unit="kPa")
    assert [r.raw_unit for r in said.readings] == ["mmHg", "mmHg", "mmHg"]


@pytest.mark.parametrize(
    ("line", "ward", "units", "told"),
    [
        ("ph 7,31 paco2 9,2 pao2 8,1 kpa", "mmHg", ["kPa", "kPa"], True),
        ("paco2 4.1 pao2 8.1kPa", "mmHg", ["kPa", "kPa"], True),  # 4.1 mmHg would be refused
        ("paco2 9.2 kpa ph 7.31 pao2 8.1", "mmHg", ["kPa", "kPa"], True),
        ("paco2 62 mmhg pao2 58", "kPa", ["mmHg", "mmHg"], True),
        ("paco2 9.2 kpa pao2 61 mmhg", "mmHg", ["kPa", "mmHg"], False),
        ("paco2 62 pao2 58", "mmHg", ["mmHg", "mmHg"], False),
        ("paco2 8.2 pao2 8.1 kpa", "kPa", ["kPa", "kPa"], True),
    ],
)
def test_a_unit_behind_one_pressure_of_a_gas_counts_for_all_without_one(line, ward, units, told):
    read = read_line(line, now=NOW, zone="UTC", in_force=BILEVEL, gas_unit=ward)
    assert [r.raw_unit for r in read.readings if r.channel.key != "ph"] == units
    assert ("line.gas_unit" in [n.key for n in read.notes]) is told


def test_the_usual_paco2_is_no_part_of_the_gas():
    read = read_line("paco2 9.2 kpa usual paco2 50", now=NOW, zone="UTC", in_force=BILEVEL)
    assert [r.raw_unit for r in read.readings] == ["kPa", "mmHg"]


def test_a_refusal_blames_the_word_that_is_wrong():
    with pytest.raises(RecordError) as told:
        read("mask offrr 28")
    assert told.value.message.values["word"] == "mask offrr"
    assert "mask off" in told.value.message.values["accepted"]


def test_one_pressure_makes_the_mode_cpap_and_says_so():
    line = read("cpap 8")
    assert {r.channel.key: r.value for r in line.readings} == {"cpap": 8.0, "mode": "CPAP"}
    assert [n.key for n in line.notes] == ["line.mode_becomes"]
    assert (line.support_before, line.support_after) == (9.0, 0.0)


def test_the_support_before_and_after_is_shown():
    line = read("ipap 18")
    assert (line.support_before, line.support_after) == (9.0, 13.0)


def test_times_are_read():
    assert iso(read("01:40 rr 20").at) == "2026-03-28T01:40:00+00:00"
    assert iso(read("yesterday 23:40 rr 20").at) == "2026-03-27T23:40:00+00:00"
    assert read("20m ago rr 20").at == NOW - 20 * MINUTE
    assert read("1h ago rr 20").at == NOW - 60 * MINUTE
    assert read("rr 20").at == NOW


@pytest.mark.parametrize(
    ("text", "at", "expected"),
    [
        ("mask off 20m ago", "2026-03-28T01:50:00+00:00", {"mask_off": None}),
        ("mask off 20 min ago", "2026-03-28T01:50:00+00:00", {"mask_off": None}),
        ("mask on at 01:20", "2026-03-28T01:20:00+00:00", {"mask_on": None}),
        ("16/6 35 yesterday 23:40", "2026-03-27T23:40:00+00:00", {"ipap": 16.0, "epap": 6.0, "fio2": 0.35}),
        ("rr 28 spo2 91 01:40", "2026-03-28T01:40:00+00:00", {"rr": 28.0, "spo2": 91.0}),
        ("at 01:40 rr 20", "2026-03-28T01:40:00+00:00", {"rr": 20.0}),
    ],
)
def test_a_time_may_stand_last(text, at, expected):
    line = read(text)
    assert (iso(line.at), line.time_typed) == (at, True)
    assert {r.channel.key: r.value for r in line.readings} == expected


def test_a_time_that_stands_last_brings_the_settings_of_its_moment():
    line = read_line("ipap 18 20m ago", now=NOW, zone="UTC",
                     in_force=lambda at: BILEVEL if at < NOW - 15 * MINUTE else ON_CPAP)  # fmt: skip
    assert (line.support_before, line.support_after) == (9.0, 13.0)


def test_a_time_among_words_stays_there_and_is_told():
    line = read("drug salbutamol 20m ago")
    assert line.at == NOW
    assert [r.value for r in line.readings] == ["salbutamol 20m ago"]
    assert [(n.key, n.values["time"]) for n in line.notes] == [("line.time_in_words", "20m ago")]
    assert read("note settled").notes == read("01:40 note better than at 01:20").notes == ()


@pytest.mark.parametrize(
    ("text", "at", "started"),
    [
        ("support started", NOW, NOW),
        ("support started 01:20", NOW, NOW - 50 * MINUTE),
        ("01:20 support started", NOW - 50 * MINUTE, NOW - 50 * MINUTE),
        ("01:20 bpap-st 16/5 28 support started", NOW - 50 * MINUTE, NOW - 50 * MINUTE),
        ("started_at 2026-03-28T01:20:00+00:00", NOW, NOW - 50 * MINUTE),
    ],
)
def test_a_fact_that_is_a_time_takes_it_as_the_line_does(text, at, started):
    line = read(text)
    assert line.at == at
    assert line.readings[-1].channel.key == "started_at"
    assert line.readings[-1].number == started


@pytest.mark.parametrize(
    ("text", "key", "named"),
    [
        ("rate 16", "line.two_meanings", ["br 16", "rr 16", "backup rate", "respiratory rate"]),
        ("rate 110", "line.two_meanings", ["rr 110", "hr 110"]),
        ("16/6 rate 16", "line.two_meanings", ["br 16", "rr 16"]),
        ("air", "line.two_meanings", ["fio2 21", "mask off"]),
        ("room air", "line.two_meanings", ["fio2 21", "mask off"]),
        ("on air", "line.two_meanings", ["fio2 21", "mask off"]),
        ("mask off 0150", "line.time_form", ["01:50 mask off"]),
        ("0325 rr 26", "line.time_form", ["03:25 rr 26"]),
        ("0230 20/5", "line.time_form", ["02:30 20/5"]),
        ("0230 20 5", "line.time_form", ["02:30 20 5"]),
        ("3.25 rr 26", "line.time_form", ["03:25 rr 26"]),
        ("2575 rr 26", "line.time_form", ["14:20"]),
        ("support started half one", "line.time_form", ["14:20"]),
        ("01:40 mask off 20m ago", "line.time_twice", ["one time"]),
        ("hfnc 60", "line.two_meanings", ["flow 60", "fio2 60%"]),
        ("bpap-st 60", "line.number_alone", ["16/6 35"]),
        ("mask off 20m", "line.word_unknown", ["20m ago"]),
        ("started 01:20", "line.word_unknown", ["support started 01:20"]),
    ],
)
def test_what_could_mean_two_things_is_refused_with_each(text, key, named):
    with pytest.raises(RecordError) as refused:
        read(text)
    assert refused.value.message.key == key
    assert all(n in refused.value.message.values["accepted"] for n in named)
    assert "hr 16" in refused.value.message.values["accepted"] or text != "rate 16"
    assert "br 110" not in refused.value.message.values["accepted"]


def test_a_gas_whose_site_nobody_named_says_that_it_is_taken_as_arterial():
    assert [n.key for n in read("ph 7.26 paco2 62").notes] == ["line.site_assumed"]
    assert [n.key for n in read("lactate 2.1").notes] == ["line.site_assumed"]
    assert read("ph 7.26 paco2 62 site venous").notes == ()
    assert read("gas_fio2 40").notes == ()  # no sample by itself


def test_a_time_long_ago_is_said_aloud():
    assert [n.key for n in read("14:20 rr 20").notes] == ["line.long_ago"]


def test_the_settings_in_force_are_those_of_the_lines_own_moment():
    def at(moment):
        return BILEVEL if moment < NOW - 15 * MINUTE else ON_CPAP

    assert read_line("20m ago ipap 18", now=NOW, zone="UTC", in_force=at).support_before == 9.0


@pytest.mark.parametrize(
    ("text", "in_force", "key"),
    [
        ("", BILEVEL, "line.empty"), ("14:20", BILEVEL, "line.empty"), ("35", BILEVEL, "line.number_alone"),
        ("ipap 5", BILEVEL, "settings.ipap_not_above_epap"), ("5/5", NOTHING, "settings.ipap_not_above_epap"),
        ("16/6", ON_CPAP, "line.mode_needed"), ("ps 10", NOTHING, "line.epap_needed"),
        ("foo 3", BILEVEL, "line.word_unknown"), ("ipap", BILEVEL, "line.value_missing"),
        ("ipap 70", BILEVEL, "value.past_hard_limit"), ("ipap 14 ipap 15", BILEVEL, "line.twice"),
        ("ps 10 ipap 15", BILEVEL, "line.twice"), ("mode bilevel", BILEVEL, "value.not_a_choice"),
        ("o2 4", BILEVEL, "line.oxygen_unclear"), ("o2", BILEVEL, "line.value_missing"),
        ("02:40 rr 20", BILEVEL, "time.not_yet"),
        ("03.00 rr 20", BILEVEL, "line.time_form"), ("0300 rr 20", BILEVEL, "line.time_form"),
        ("27-Mar 23:00 rr 20", BILEVEL, "line.time_form"), ("2026-03-28T03:00 rr 20", BILEVEL, "line.time_form"),
        ("ipap +4", BILEVEL, "line.signed"), ("ps +2", BILEVEL, "line.signed"), ("fio2 +10%", BILEVEL, "line.signed"),
        ("rr -4", BILEVEL, "line.signed"), ("paco2 +60", BILEVEL, "line.signed"), ("o2 +2 l", BILEVEL, "line.signed"),
        ("16/+6", BILEVEL, "line.word_unknown"),
        ("25:10 rr 20", BILEVEL, "time.unreadable"), ("note", BILEVEL, None),
    ],
)  # fmt: skip
def test_what_cannot_be_is_refused_by_name(text, in_force, key):
    if key is None:
        assert values(text, in_force) == {"note": None}
        return
    with pytest.raises(RecordError) as refused:
        read(text, in_force)
    assert refused.value.message.key == key


def test_a_base_excess_bears_its_sign():
    assert values("be +3.2")["be"] == 3.2
    assert values("be -6")["be"] == -6


@pytest.mark.parametrize(
    ("text", "instead"),
    [
        ("gas 7,24 62 58", "ph 7.24 paco2 62"),
        ("bed 12", "label Bed 12"),
        ("ceiling no intubation", "ceiling of care"),
    ],
)
def test_what_people_type_first_is_told_how_it_is_said(text, instead):
    with pytest.raises(RecordError) as refused:
        read(text)
    assert instead in refused.value.message.values["accepted"]


def test_soft_limits_become_questions_and_an_unconfirmed_one_a_doubt():
    line = read("rr 45")
    assert [q.key for q in line.questions] == ["doubt.unusual"]
    (doubtful,) = line.entries("E", by="AB", zone="UTC", confirmed=False)
    (sure,) = line.entries("E", by="AB", zone="UTC", confirmed=True)
    assert (doubtful.doubt, sure.doubt) == ("doubt.unusual", "")


@given(st.text(alphabet="0123456789/:.,% abcdefimnoprstu", max_size=40))
def test_no_line_raises_anything_but_a_refusal(text):
    with suppress(RecordError):
        read(text)
