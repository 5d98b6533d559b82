"""The repeat of a gas: soon after a grave one or while an escalate flag stands, and nothing puts it off.

Source: common practice (30-60 min after a severe, worse or not better gas), beside "pH 7.20-7.25 on two occasions
1 h apart" (BTS 2016, from memory). The policy holds the numbers.
"""

import pytest

from tests.support.flag_cases import BEFORE, COPD, LUNG, START, clock, due, flags, met

BASE = COPD + BEFORE + START
GAS_TYPES = ("gas", "repeat_gas")
LUNGS = LUNG + "00:30 ph 7.44 paco2 34 pao2 60 fio2 0.4 site arterial rr 24 gcs 15\n" + START.replace("30 ", "0.4 ")


def pending(log, as_of):
    """Every gas that is asked for: what, from, until, state, and why."""
    items = [d for d in due(log, as_of, None) if d.what in GAS_TYPES and d.state != "done"]
    return [(d.what, clock(d.due_from), clock(d.due_until), d.state, said(d)) for d in items]


def said(d):
    return str(d.because.values.get("why") or d.because.values.get("marker") or d.because.key)


@pytest.mark.parametrize(
    ("gases", "why"),
    [
        ("02:00 ph 7.22 paco2 70", "severe"),
        ("02:00 ph 7.25 paco2 74", "not better"),
        ("02:00 ph 7.26 paco2 80", "worse"),
        ("01:40 ph 7.26 paco2 73\n01:50 ipap 22\n02:00 ph 7.25 paco2 78", "worse since start"),
        ("01:20 ph 7.38 paco2 55\n02:00 ph 7.33 paco2 62", "gain lost"),
    ],
)
def test_a_grave_gas_is_repeated_in_30_to_60_minutes(gases, why):
    assert pending(BASE + gases, "02:10") == [("repeat_gas", "02:30", "03:00", "open", why)]


def test_its_states_are_those_of_every_gas():
    severe = BASE + "02:00 ph 7.22 paco2 70\n"
    assert pending(severe, "02:30")[0][3] == "soon"
    assert pending(severe, "03:01")[0][3] == "overdue"
    assert met("gas_overdue", severe, "03:10") == "03:00-"
    assert pending(severe + "02:50 gas_sent", "03:10")[0][3] == "awaiting result"
    assert pending(severe + "02:50 ph 7.36 paco2 55", "03:10") == []
    done = [d for d in due(severe + "02:50 ph 7.36 paco2 55", "03:10", "repeat_gas") if d.state == "done"]
    assert [(clock(d.due_until), clock(d.done_at)) for d in done] == [("03:00", "02:50")]


def test_a_better_gas_or_a_slow_gain_asks_for_nothing_new():
    assert pending(BASE + "02:00 ph 7.36 paco2 55", "02:10") == []
    slow = BASE + "02:00 ph 7.30 paco2 62\n02:10 ipap 22\n03:10 ph 7.31 paco2 60"  # each step inside noise
    assert [(until, why) for _, _, until, _, why in pending(slow, "03:20")] == [("08:10", "due.repeat_gas")]


def test_no_later_change_puts_it_off():
    log = BASE + "02:00 ph 7.19 paco2 80\n"
    for change in ("02:15 ipap 22", "02:40 ipap 24", "03:05 ipap 26"):
        log += change + "\n"
        assert pending(log, "03:06")[0][:3] == ("repeat_gas", "02:30", "03:00")
    taken = pending(log + "03:10 ph 7.36 paco2 60", "03:15")  # early for the last change: that one still asks
    assert [(what, until) for what, _, until, _, _ in taken] == [("gas", "04:15")]


def test_a_change_no_longer_hides_a_repeat_that_is_due_sooner():
    poor = BASE + "02:00 ph 7.32 paco2 60\n06:40 ipap 24"
    assert [(what, until) for what, _, until, _, _ in pending(poor, "06:45")] == [("repeat_gas", "07:00")]


def test_what_is_overdue_shows_beside_what_is_awaited():
    log = BASE + "02:00 ph 7.22 paco2 70\n02:15 ipap 24\n02:35 gas_sent"
    assert [s for *_, s, _ in pending(log, "03:10")] == ["awaiting result"]
    late = log.replace("02:35 gas_sent", "02:00 checked_no_change").replace("02:00 ph", "01:35 ph")
    assert pending(late, "04:30")[0][3] == "overdue"


def test_an_escalate_flag_asks_for_a_gas_though_the_last_was_good():
    log = BASE + "02:00 ph 7.36 paco2 55\n03:00 gcs 7\n"
    assert pending(log, "03:10") == [("repeat_gas", "03:30", "04:00", "open", "gcs_below_8")]
    assert pending(log + "03:20 gcs 15", "03:30") == []  # it stands no longer
    assert pending(log + "03:40 ipap 22\n04:10 ipap 24", "04:20")[0][2] == "04:00"
    assert pending(log + "03:05 ceiling_of_care comfort", "03:10") == []
    assert pending(log + "03:50 ph 7.37 paco2 54", "03:55")[0][2] == "04:50"  # hourly while it stands


def test_fio2_up_by_010_in_hypoxaemic_failure_asks_for_a_gas():
    first = LUNGS + "02:00 ph 7.45 paco2 34 pao2 62 fio2 0.4 site arterial\n"
    assert pending(first + "02:30 fio2 0.45", "02:40") == []
    assert pending(first + "02:30 fio2 0.5", "02:40") == [("gas", "03:00", "04:30", "open", "due.gas_after_change")]
    enough = first.replace("pao2 62", "pao2 130")
    assert pending(enough + "02:30 fio2 0.5", "02:40") == []


def test_the_overdue_flag_names_the_item_that_it_stands_since():
    """Two gases overdue at once: the head's moment is the first one's, so the evidence begins with that one."""
    log = BASE + "02:00 ph 7.22 paco2 70\n02:10 ipap 22\n"
    (flag,) = [f for f in flags(log, "04:20") if f.marker == "gas_overdue"]
    named = [(m.values["what"], clock(m.values["until"])) for m in flag.evidence]
    assert named == [("repeat_gas", "03:00"), ("gas", "04:10")]
    assert clock(flag.since) == "03:00"
