"""A shift's figures: what lies in it and what does not, and nothing from after its end."""

from dataclasses import replace

import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.figures.shift import episode_shift, stands_in_shift, ward_shift
from core.judgement.policy import shipped_policy
from core.record.episode import build_episode
from core.record.instant import HOUR, MINUTE
from core.record.knowledge import standing
from tests.support import log_cases as cases
from tests.support.log import entries, episode, moment

POLICY = shipped_policy()
START, END = moment("-19:30"), moment("07:30")
NIGHT = """
-18:00 site arterial ph 7.24 paco2 72
-18:30 bpap-st 14/5 28
-19:30 ipap 16
-20:40 site arterial ph 7.27 paco2 66
-21:00 ipap 20 epap 6
-22:10 site arterial ph 7.36 paco2 52
-23:00 mask off
01:00 mask on
02:00 told registrar, will come
02:30 ti 1.2
03:00 secretions
07:30 rr 22
08:10 ipap 24
"""


def test_a_shift_takes_its_end_and_not_its_start() -> None:
    found = episode_shift(episode(NIGHT), START, END, POLICY)
    moments = [s.at for r in found.responses for s in r.steps]
    assert START not in moments, "a change at the very start belongs to the shift before"
    assert moment("-21:00") in moments
    assert max(moments) <= END
    assert [g.at for g in found.gases] == [moment("-20:40"), moment("-22:10")]
    assert found.gas_before is not None
    assert found.gas_before.at == moment("-18:00")


def test_states_before_and_after_tell_the_change() -> None:
    found = episode_shift(episode(NIGHT), START, END, POLICY)
    assert (found.state_before, found.state_after) == ("severe", "resolved")
    assert not found.began
    assert not found.ended


def test_hours_and_breaks_are_those_of_the_shift() -> None:
    found = episode_shift(episode(NIGHT), START, END, POLICY)
    assert [(b.start, b.end) for b in found.breaks] == [(moment("-23:00"), moment("01:00"))]
    assert found.hours_on_mask == pytest.approx(12 - 2)


def test_calls_and_events_stand_apart() -> None:
    found = episode_shift(episode(NIGHT), START, END, POLICY)
    assert [(t.at, t.words, t.by) for t in found.told] == [(moment("02:00"), "registrar, will come", "AB")]
    assert {e.channel for e in found.events} == {"mask_off", "mask_on", "secretions"}
    assert [e.at for e in found.events] == sorted(e.at for e in found.events)


def test_every_change_of_settings_is_told_once() -> None:
    found = episode_shift(episode(NIGHT), START, END, POLICY)
    judged = {(s.at, s.channel) for r in found.responses for s in r.steps}
    other = [(s.at, s.channel) for s in found.other_changes]
    assert len(other) == len(set(other))
    assert not judged & set(other)
    assert (moment("-21:00"), "epap") in judged | set(other)


def test_a_shift_must_end_after_it_starts() -> None:
    with pytest.raises(ValueError, match="after its start"):
        episode_shift(episode(NIGHT), END, END, POLICY)


def test_which_episodes_stood_in_a_shift() -> None:
    ended = episode("-10:00 bpap-st 14/5 28\n-12:00 ended at 2026-03-27T12:00:00+00:00")
    later = episode("07:31 rr 20")
    assert stands_in_shift(episode(NIGHT), START, END)
    assert not stands_in_shift(ended, START, END)
    assert not stands_in_shift(later, START, END)
    assert stands_in_shift(ended, moment("-09:00"), START)


def test_the_ward_stands_in_order_of_concern_with_whom_to_see_first() -> None:
    quiet = episode("-20:00 site arterial ph 7.41 paco2 40\n-20:10 bpap-st 12/5 28\n-21:00 rr 16", "quiet")
    poor = episode("-20:00 site arterial ph 7.20 paco2 80\n-20:10 bpap-st 12/5 28\n"
                   "-21:20 site arterial ph 7.12 paco2 95", "poor")  # fmt: skip
    ward = ward_shift([quiet, poor], START, moment("-22:00"), POLICY)
    assert [s.episode for s in ward.episodes] == ["poor", "quiet"]
    assert ward.first is not None
    assert ward.first.episode == "poor"
    assert ward.first.flags_open
    ranks = [s.now.concern.rank for s in ward.episodes]
    assert ranks == sorted(ranks)


def test_due_items_reach_four_hours_ahead() -> None:
    log = "-20:00 site arterial ph 7.22 paco2 80\n-20:10 bpap-st 14/5 28"
    found = episode_shift(episode(log), START, moment("-20:30"), POLICY)
    assert "gas" in [d.what for d in found.due]
    assert all(d.due_from <= moment("-20:30") + 4 * HOUR for d in found.due)
    assert [d.due_until for d in found.due] == sorted(d.due_until for d in found.due)


@given(st.integers(0, 14 * 60))
def test_a_shift_knows_nothing_after_its_end(minutes: int) -> None:
    """The figures of a shift equal those of a record that never saw what came after it."""
    end = START + (minutes + 1) * MINUTE
    whole = episode(NIGHT)
    assert episode_shift(whole, START, end, POLICY) == episode_shift(whole.until(end), START, end, POLICY)


def late_by(log: str, recorded_at: str) -> int:
    made = [replace(e, recorded_at=moment(recorded_at)) for e in entries(log)]
    return episode_shift(build_episode("E1", standing(made)), START, END, POLICY).recorded_late


def test_what_was_typed_late_is_counted_and_what_a_file_brought_is_not() -> None:
    assert late_by("01:00 rr 24 hr 100", "03:00") == 2
    assert late_by("02:30 rr 24", "03:00") == 0
    assert late_by("01:00 rr 24\n01:30 rr 26\n02:00 rr 28", "05:00") == 0


def test_leak_over_its_limit_is_that_of_the_whole_shift() -> None:
    """Nine hours later the trend's span has left it behind; the shift has not."""
    log = """19:00 mode BPAP-ST ipap 14 epap 5 leak_definition unintentional
        device leak 19:00 20:00 45 45
        device leak 20:00 23:59 20 20
        d1 01:00 rr 20"""
    begin, end = cases.at("19:30"), cases.at("d1 05:00")
    found = episode_shift(cases.episode(log), begin, end, POLICY)
    assert found.now.leak.minutes_over_limit == 0
    assert found.leak.minutes_over_limit == 29, "19:31 to 20:00: the minute of the start is the shift's before"
    assert found.leak.counted == (begin + MINUTE, end)


CALLED = """
-19:00 bpap-st 20/5 28
-19:30 told outreach, will look in
-20:30 site arterial ph 7.19 paco2 90
-20:40 told registrar, busy
-20:50 gcs 15
"""


def test_a_call_before_the_shift_about_what_still_stands_is_handed_over() -> None:
    found = episode_shift(episode(CALLED), moment("-21:00"), moment("-23:00"), POLICY)
    assert any(f.tier == "escalate" for f in found.flags_open)
    assert found.told == ()
    assert [e.at for e in found.told_before] == [moment("-20:40")], "not who was told before it began"
    own = episode_shift(episode(CALLED), moment("-20:35"), moment("-23:00"), POLICY)
    assert [e.at for e in own.told] == [moment("-20:40")]
    assert [e.at for e in own.told_before] == [moment("-19:30")], "the newest of before, where none is about it"


def test_a_call_is_not_carried_on_where_nothing_stands() -> None:
    well = CALLED.replace("ph 7.19 paco2 90", "ph 7.40 paco2 44")
    found = episode_shift(episode(well), moment("-21:00"), moment("-21:30"), POLICY)
    assert not any(f.tier != "remark" for f in found.flags_open)
    assert found.told_before == ()
