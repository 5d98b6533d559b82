"""Replay: a flag is raised when it was known, not when it happened; corrections, cancel, another policy."""

from dataclasses import replace

from core.figures.replay import (
    PastEpisode,
    channels_read,
    counts,
    outcome_of,
    per_shift,
    replay,
    replay_episode,
    replay_moments,
)
from core.judgement.policy import shipped_policy
from core.record.entries import Action
from tests.support.flag_cases import BEFORE, COPD, START, with_rule
from tests.support.log_cases import at, build, device, entries

POLICY = shipped_policy()
BASE = COPD + BEFORE + START


def past(log, late=None):
    """The past episode of a log; `late` maps a channel's moment to when it was recorded."""
    made = entries(log)
    if late is not None:
        made = [replace(e, recorded_at=at(late[1])) if e.at == at(late[0]) else e for e in made]
        made = [replace(e, seq=i, id=f"e{i}") for i, e in enumerate(sorted(made, key=lambda e: e.recorded_at), 1)]
    return PastEpisode("E", tuple(made), tuple(device(log)))


def of(flags, marker):
    return [f for f in flags if f.marker == marker]


def test_a_flag_is_raised_when_its_entry_was_recorded():
    log = BASE + "02:00 ph 7.24 paco2 76\n05:00 ph 7.30 paco2 66"
    (flag,) = of(replay_episode(past(log), POLICY), "ph_below_severe")
    assert (flag.since, flag.raised_at, flag.ended_at, flag.undone) == (at("02:00"), at("02:00"), at("05:00"), False)
    (late,) = of(replay_episode(past(log, ("02:00", "03:10")), POLICY), "ph_below_severe")
    assert (late.since, late.raised_at) == (at("02:00"), at("03:10"))


def test_a_correction_undoes_it_in_the_replay_too():
    made = entries(BASE + "02:00 ph 7.24 paco2 76\n03:00 rr 24")
    wrong = next(e for e in made if e.channel == "ph" and e.at == at("02:00"))
    fix = replace(wrong, action=Action.CORRECT, number=7.31, raw="7.31", replaces=wrong.id, seq=len(made) + 1,
                  id="fix", recorded_at=at("02:30"))  # fmt: skip
    made = sorted([*made, fix], key=lambda e: e.recorded_at)
    made = [replace(e, seq=i) for i, e in enumerate(made, 1)]
    (flag,) = of(replay_episode(PastEpisode("E", tuple(made)), POLICY), "ph_below_severe")
    assert (flag.raised_at, flag.undone, flag.ended_at) == (at("02:00"), True, at("02:30"))


def test_what_only_time_brings_is_found_between_entries():
    log = BASE + "01:20 rr 24\n05:00 rr 24"
    (flag,) = of(replay_episode(past(log), POLICY), "gas_overdue")
    assert flag.raised_at == at("03:00") + 1


def test_device_values_are_looked_at_every_few_minutes():
    log = BASE + "device spo2 02:00 04:00 80 80"
    (flag,) = of(replay_episode(past(log), POLICY), "spo2_deep")
    assert flag.since == at("02:00")
    assert flag.raised_at - flag.since <= 5 * 60_000_000
    assert len(replay_moments(past(log), POLICY)) < 40


def test_only_moments_whose_channels_matter():
    log = BASE + "02:10 feeding normal\n02:20 jobs none\n02:30 rr 24"
    moments = replay_moments(past(log), POLICY)
    assert at("02:30") in moments
    assert at("02:10") not in moments
    assert "feeding" not in channels_read(POLICY)


def test_another_policy_side_by_side():
    log = BASE + "02:00 ph 7.24 paco2 76"
    stricter = with_rule("ph_below_severe", limits={"ph": 7.2})
    ours, theirs = ({c.marker: c.raised for c in counts(replay([past(log)], p))} for p in (POLICY, stricter))
    assert ours["ph_below_severe"] == 1
    assert "ph_below_severe" not in theirs


def test_progress_and_cancel():
    seen = []

    def progress(done, total):
        seen.append((done, total))
        return done < 4

    flags = list(replay_episode(past(BASE + "02:00 ph 7.24 paco2 76\n03:00 rr 24"), POLICY, progress))
    assert len(seen) == 4
    assert all(done <= total for done, total in seen)
    assert not of(flags, "gas_overdue")


def test_flags_of_the_record_are_left_out_and_the_outcome_is_told():
    log = BASE + "02:00 ph 7.24 paco2 76\n03:00 intubated"
    made = entries(log)
    old = replace(made[-1], action=Action.FLAG, channel="ph_below_severe", words="settled", raw="{}", seq=99)
    flags = list(replay_episode(PastEpisode("E", (*made, old)), POLICY))
    assert {f.outcome for f in flags} == {"intubated"}
    (count,) = [c for c in counts(flags) if c.marker == "ph_below_severe"]
    assert (count.raised, count.episodes, count.outcomes) == (1, 1, (("intubated", 1),))
    assert outcome_of(build(made)) == "intubated"
    assert outcome_of(build(entries(log + "\n04:00 end_reason escalated"))) == "escalated"


def test_flags_per_shift():
    flags = list(replay_episode(past(BASE + "02:00 ph 7.24 paco2 76\nd1 02:00 ph 7.20 paco2 80"), POLICY))
    shifts = per_shift(flags, at("00:00"))
    assert sum(shifts.values()) == len(flags)
    assert set(shifts) >= {at("00:00"), at("d1 00:00")}
