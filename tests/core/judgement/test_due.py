"""Due items by the rules: what a gas closes, what an anchor replaces, what comfort suspends.

Sources: BTS 2002 (gas after 1-2 h, again at 4-6 h if poor, about 1 h after a change: from memory); BTS Quality
Standards 2018 (plan before the start: secondary). The rest is common practice, no source.
"""

from dataclasses import replace

import pytest

from core.figures.episode_figures import judged
from core.judgement.due import due_items, due_keys
from core.judgement.due_gas import gas_items
from core.judgement.flags import evaluate
from core.judgement.markers.observed import Observed
from core.judgement.policy import shipped_policy
from core.record.entries import Action, NewEntry, recorded
from tests.support.flag_cases import BEFORE, COPD, LUNG, START, clock, ctx, due, met
from tests.support.log_cases import at, build, entries

BASE = COPD + BEFORE + START
RESOLVED = COPD + BEFORE.replace("7.28 paco2 70", "7.38 paco2 50") + START


def gas(log, as_of, what="gas"):
    """The open gas due, or the newest one that is done: from, until, state, and what closed it."""
    items = due(log, as_of, what)
    still = [i for i in items if i.state != "done"]
    item = still[0] if still else max(items, key=lambda i: i.done_at or 0, default=None)
    if item is None:
        return None
    done = None if item.done_at is None else clock(item.done_at)
    return clock(item.due_from), clock(item.due_until), item.state, done


def test_every_item_has_a_rule_and_every_rule_an_item():
    assert set(due_keys()) == set(shipped_policy().due)


@pytest.mark.parametrize(
    ("as_of", "state"),
    [("01:10", "open"), ("02:44", "open"), ("02:45", "soon"), ("03:00", "soon"), ("03:01", "overdue")],
)
def test_a_gas_after_the_start_runs_from_30_to_120_minutes(as_of, state):
    assert gas(BASE, as_of) == ("01:30", "03:00", state, None)


@pytest.mark.parametrize(
    ("sample", "state"),
    [
        ("01:29 ph 7.30 paco2 60", "overdue"),  # early closes nothing
        ("01:30 ph 7.30 paco2 60", "done"),
        ("03:00 ph 7.30 paco2 60", "done"),
        ("02:00 ph 7.30 paco2 60 site capillary", "done"),
        ("02:00 ph 7.30 paco2 60 site venous", "overdue"),
        ("01:50 mask_off\n02:00 ph 7.30 paco2 60\n02:05 mask_on", "overdue"),  # off support judges nothing
        ("02:00 pao2 60", "overdue"),  # neither pH nor PaCO2
    ],
)
def test_what_closes_a_gas(sample, state):
    assert gas(BASE + sample, "03:10")[2] == state


def test_a_late_gas_closes_it_and_the_flag_of_being_overdue_ends():
    log = BASE + "04:00 ph 7.30 paco2 60"
    assert gas(log, "04:10")[2:] == ("done", "04:00")
    assert met("gas_overdue", log, "04:10") == "03:00-04:00"
    assert met("gas_overdue", BASE, "03:00") == ""
    (item,) = due(log, "04:10", "gas")
    assert item.done_by.startswith("e")


@pytest.mark.parametrize(
    ("change", "asks"),
    [
        ("05:00 ipap 22", True),  # pressure support by 2
        ("05:00 ipap 21", False),
        ("05:00 epap 7", True),  # lowers it by 2
        ("05:00 ipap 22 epap 7", False),  # support kept
        ("05:00 mode BPAP-S", True),
        ("05:00 mode CPAP cpap 8", True),
        ("05:00 fio2 34%", True),  # up by 0.04 at hypercapnic risk
        ("05:00 fio2 33%", False),
        ("05:00 fio2 24%", False),  # lowered
        ("05:00 o2_flow 6", True),  # whether it rose cannot be told
        ("05:00 rate_set 24", False),
        ("05:00 interface nasal", False),
    ],
)
def test_which_changes_ask_for_a_gas_when_the_last_ph_was_normal(change, asks):
    log = RESOLVED + "02:00 ph 7.38 paco2 50 pao2 62 site arterial\n04:50 rr 22\n01:00 interface oronasal\n" + change
    assert (gas(log, "05:10")[2] != "done") is asks


def test_oxygen_up_by_a_litre_asks_only_at_risk():
    flow = "00:10 o2_flow 2\n02:00 ph 7.38 paco2 44 pao2 62 site arterial\n05:00 o2_flow {}"
    base = START.replace(" fio2 30", "")
    assert gas(COPD + base + flow.format(3), "05:10")[2] == "open"
    assert gas(COPD + base + flow.format(2.5), "05:10")[2] == "done"
    assert gas(LUNG + base + flow.format(4), "05:10")[2] == "done"


def test_any_change_asks_when_the_last_ph_was_below_735():
    log = BASE + "02:00 ph 7.34 paco2 60\n05:00 ipap 21"
    assert gas(log, "05:10") == ("05:30", "07:00", "open", None)
    assert gas(log.replace("7.34", "7.35"), "05:10")[2] == "done"


def test_a_chain_is_one_due_gas_counted_from_its_last_step():
    log = RESOLVED + "02:00 ph 7.38 paco2 50\n05:00 ipap 21\n05:15 ipap 22\n05:30 ipap 23"
    assert gas(log, "05:40") == ("06:00", "07:30", "open", None)
    (item,) = [d for d in due(log, "05:40", "gas") if d.state != "done"]
    assert item.because.key == "due.gas_after_chain"


def test_a_later_anchor_replaces_a_pending_gas_but_keeps_its_latest_time():
    log = BASE + "02:00 ipap 24"
    assert gas(log, "02:10") == ("02:30", "03:00", "open", None)
    assert gas(log + "\n02:20 ph 7.30 paco2 60", "02:59")[2] == "soon"  # early for the change
    assert gas(log + "\n02:30 ph 7.30 paco2 60", "02:59")[2:] == ("done", "02:30")
    for i in range(4):  # one change after another cannot put it off
        log += f"\n0{3 + i}:00 ipap {20 + i % 2}"
    assert gas(log, "06:20")[1:3] == ("03:00", "overdue")


def test_a_gas_of_the_next_anchors_own_minute_belongs_before_it():
    log = BASE + "02:00 ph 7.30 paco2 60\n02:00 ipap 24"
    items = due(log, "02:10", "gas")
    assert [(clock(i.anchor_at), i.state) for i in items] == [("02:00", "open"), ("01:00", "done")]


def test_gas_sent_turns_it_to_awaiting_result_for_a_while():
    log = BASE + "02:50 gas_sent"
    assert gas(log, "03:10")[2] == "awaiting result"
    assert gas(log, "03:51")[2] == "overdue"  # an hour without a result
    assert gas(BASE + "01:20 gas_sent", "01:40")[2] == "open"  # sent too early to count
    assert met("gas_overdue", log, "03:10") == ""
    assert met("gas_overdue", BASE + "03:20 gas_sent", "03:30") == "03:00-03:20"


def test_a_record_that_began_with_support_running():
    running = "04:00 indication copd started_at 2026-03-27T01:00:00+00:00 mode BPAP-ST ipap 20 epap 5\n04:00 rr 22"
    first = gas(running, "04:10")
    assert first[1:3] == ("04:30", "open")  # nothing overdue earlier than the first entry + 30 min
    assert gas(running, "04:31")[2] == "overdue"
    assert due(running, "04:10", "gas")[0].because.key == "due.gas_reference"


def test_a_break_asks_only_when_acidotic_or_worse():
    off = "02:00 ph {} paco2 50\n05:00 mask_off rr 20\n05:40 mask_on rr {}"
    assert gas(RESOLVED + off.format("7.38", 22), "05:50")[2] == "done"
    assert gas(RESOLVED + off.format("7.38", 27), "05:50") == ("06:10", "07:40", "open", None)  # rate up by 7
    asked = gas_items(Observed(ctx(RESOLVED + off.format("7.34", 22), "05:50")))[-1]
    assert (asked.because.key, clock(asked.due_until)) == ("due.gas_after_break", "07:40")


def test_the_repeat_at_4_to_6_hours_when_poor():
    poor = BASE + "02:00 ph 7.30 paco2 60"
    assert gas(poor, "02:10", "repeat_gas") == ("05:00", "07:00", "open", None)
    assert gas(poor, "07:01", "repeat_gas")[2] == "overdue"
    assert gas(poor + "\n06:00 ph 7.36 paco2 52", "07:01", "repeat_gas")[2:] == ("done", "06:00")
    assert gas(poor.replace("7.30", "7.36"), "02:10", "repeat_gas") is None
    changed = poor + "\n03:00 ipap 24"
    assert gas(changed, "03:10", "repeat_gas") is None  # one gas serves both


def test_an_arterial_gas_after_a_venous_ph_below_725():
    log = BASE + "02:00 ph 7.24 paco2 70 site venous"
    assert gas(log, "02:10", "arterial_gas")[1:3] == ("02:30", "open")
    assert gas(log + "\n02:20 ph 7.27 paco2 66", "02:40", "arterial_gas")[2] == "done"


def test_comfort_suspends_gas_dues_and_nothing_else():
    comfort = BASE + "02:30 ceiling_of_care comfort"
    assert due(comfort, "04:00", "gas") == []
    assert due(comfort, "04:00", "reassessment") != []
    assert met("gas_overdue", comfort, "04:00") == ""
    assert met("gas_overdue", BASE + "03:30 ceiling_of_care comfort", "04:00") == "03:00-03:30"
    assert gas(comfort + "\n05:00 ceiling_of_care full", "05:10")[2] == "overdue"


@pytest.mark.parametrize("ceiling", ["'no intubation'", "'ward support is the ceiling'", "full"])
def test_no_other_ceiling_does(ceiling):
    assert gas(BASE + f"02:30 ceiling_of_care {ceiling}", "04:00")[2] == "overdue"


def test_support_that_ended_asks_for_nothing():
    assert [d.what for d in due(BASE + "02:30 stopped", "05:00", None) if d.state != "done"] == []


def test_reassessment_after_each_change_then_every_four_hours():
    assert gas(BASE, "01:10", "reassessment") == ("01:15", "02:00", "open", None)
    assert gas(BASE, "02:01", "reassessment")[2] == "overdue"
    assert gas(BASE + "01:40 rr 24", "02:01", "reassessment")[1] == "05:40"
    assert gas(BASE + "01:40 review\n02:00 ipap 24", "02:05", "reassessment")[1] == "03:00"


def test_reassessment_within_the_hour_of_an_escalate_flag_and_hourly_while_it_stands():
    log = BASE + "02:00 ph 7.36 paco2 55 rr 24\n03:00 gcs 7 rr 24\n"
    raised = due(log, "03:10", "reassessment")[0]
    assert (clock(raised.due_from), clock(raised.due_until)) == ("03:15", "04:00")
    assert (raised.because.key, raised.because.values["marker"]) == ("due.reassessment_flag", "gcs_below_8")
    assert gas(log, "04:01", "reassessment")[2] == "overdue"
    looked = log + "03:40 review gcs 7\n"
    assert gas(looked, "03:50", "reassessment")[1] == "04:40"
    assert gas(looked + "04:30 rr 26 gcs 7\n", "04:41", "reassessment")[1] == "05:30"
    assert gas(looked + "04:00 gcs 15\n", "04:10", "reassessment")[1] == "07:40"  # it stands no longer
    assert gas(log + "03:05 ceiling_of_care comfort", "03:10", "reassessment")[1] == "07:00"
    changed = log + "03:50 ipap 24\n"  # a change asks for a look of its own, and does not put this one off
    assert gas(changed, "03:55", "reassessment")[1] == "04:00"


def test_a_settled_escalate_flag_asks_for_no_hourly_look():
    log = BASE + "02:00 ph 7.36 paco2 55 rr 24\n03:00 gcs 7 rr 24\n"
    context = ctx(log, "03:10")
    flags = evaluate(context)
    settled = tuple(replace(f, state="settled") for f in flags)
    until = [{d.what: clock(d.due_until) for d in due_items(context, f)} for f in (flags, settled)]
    assert [(u["reassessment"], u.get("repeat_gas")) for u in until] == [("04:00", "04:00"), ("07:00", None)]


def test_skin_under_the_mask():
    assert gas(BASE, "04:45", "skin_check") == ("04:00", "05:00", "soon", None)
    assert met("skin_check_overdue", BASE, "05:30") == "05:00-"
    assert met("skin_check_overdue", BASE + "05:10 skin_check", "05:30") == "05:00-05:10"
    done = [d for d in due(BASE + "05:10 skin_check", "05:30", "skin_check") if d.state == "done"]
    assert [d.done_by for d in done] == [entries(BASE + "05:10 skin_check")[-1].id]
    assert due(BASE + "01:00 interface helmet", "05:30", "skin_check") == []


def test_a_ceiling_to_decide():
    nobody = BASE.replace("ceiling_of_care full", "")
    assert gas(nobody, "01:10", "ceiling")[1:3] == ("02:00", "open")
    assert gas(BASE, "01:10", "ceiling") is None
    assert gas(nobody + "01:30 ceiling_of_care full", "02:10", "ceiling")[2] == "done"
    assert gas(nobody + "01:30 ceiling_of_care 'not recorded'", "02:10", "ceiling")[2] == "overdue"


def test_a_break_that_stays_open_while_the_device_ventilates():
    log = BASE + "02:00 mask_off\ndevice vte 05:00 06:30 450 450"
    assert gas(log, "05:59", "break_end") is None
    assert gas(log, "06:01", "break_end")[2] == "overdue"
    assert gas(BASE + "02:00 mask_off", "06:01", "break_end") is None  # the device is silent


def test_a_probable_break_is_asked_about():
    log = BASE + "device leak 02:00 02:10 20 20\ndevice leak 02:10 02:20 130 130\ndevice leak 02:20 03:00 20 20"
    assert gas(log, "02:30", "probable_break")[:2] == ("02:10", "02:40")
    assert gas(log + "\n02:10 mask_off\n02:20 mask_on", "02:30", "probable_break") is None


def test_a_single_reading_out_of_range_is_rechecked():
    assert gas(BASE + "02:00 spo2 85", "02:05", "spo2_recheck")[1:3] == ("02:15", "soon")
    assert gas(BASE + "02:00 spo2 85\n02:10 spo2 90", "02:20", "spo2_recheck") is None
    assert gas(BASE + "02:00 spo2 90", "02:05", "spo2_recheck") is None


def test_oxygen_is_reviewed_while_out_of_range():
    log = BASE + "device spo2 02:00 04:00 94 94"
    assert gas(log, "02:40", "oxygen_review")[2] == "overdue"
    assert gas(log + "\n02:35 fio2 26%", "02:40", "oxygen_review")[2] == "done"


def test_a_persons_word_closes_an_item():
    made = entries(BASE)

    def closed(what, clock, word="not needed"):
        new = NewEntry("E", what, at(clock), words=word, by="CD", action=Action.DUE, reason="asleep")
        made.append(recorded(new, len(made) + 1, f"word {clock}", at(clock)))
        ctx = judged(build(made), at("05:30"), shipped_policy())
        flags = evaluate(ctx)
        overdue = [f.ended_at for f in flags if f.marker == "gas_overdue"]
        return [(d.state, d.done_by) for d in due_items(ctx, flags) if d.what == what], overdue

    assert closed("ceiling", "04:30")[0] == []  # decided before support: nothing to close
    assert closed("skin_check", "04:31")[0] == [("open", None), ("done", "CD")]  # the next look is due
    items, overdue = closed("gas", "05:00")
    assert (items, overdue) == ([("done", "CD")], [at("05:00")])  # the flag stood from 03:00 and ends with the word
    items, overdue = closed("gas", "05:10", "open again")
    assert (items, overdue) == ([("overdue", None)], [None])


def test_nothing_is_missed_over_a_clock_change():
    """29 March 2026, 01:00 UTC: clocks go forward. Minutes are elapsed minutes, whatever the wall shows."""
    shifted = [replace(e, at=e.at + at("d1 23:30") - at("00:30"), zone="Europe/London") for e in entries(BASE)]
    ctx = judged(build(shifted), at("d2 02:01"), shipped_policy())
    (item,) = [d for d in due_items(ctx, evaluate(ctx)) if d.what == "gas"]
    assert (item.due_from, item.due_until, item.state) == (at("d2 00:30"), at("d2 02:00"), "overdue")


def test_a_first_skin_check_says_since_when_nobody_looked():
    began = due(BASE, "04:45", "skin_check")[0].because
    assert (began.key, began.values["of"]) == ("due.first_skin_check", "support")
    looked = next(d for d in due(BASE + "05:10 skin_check", "05:30", "skin_check") if d.state != "done")
    assert looked.because.key == "due.skin_check"
