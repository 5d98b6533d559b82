"""What is otherwise than was handed over, on a night made by hand: nothing more, nothing less."""

from dataclasses import replace

from core.figures.episode_figures import episode_figures
from core.figures.since_handover import SinceHandover, TargetChange, since_handover
from core.judgement.policy import shipped_policy
from core.judgement.shapes import EpisodeFigures
from core.record.entries import Entry, NewEntry, recorded
from core.record.episode import Episode, build_episode
from core.record.knowledge import standing
from tests.support.log import entries, moment

POLICY = shipped_policy()
HANDED = moment("00:00")
NIGHT = """
-21:00 ph 7.22 paco2 80 site arterial
-22:00 mode BPAP-ST ipap 16 epap 5 fio2 0.28
-22:05 rr 28
-23:00 ph 7.24 paco2 78 site arterial
01:00 ipap 20
01:10 rr 27
02:00 ph 7.33 paco2 62 site arterial
02:30 mask off
"""


def made(log: str, more: list[NewEntry] | None = None) -> Episode:
    found: list[Entry] = entries(log, "A")
    for new in more or ():
        seq = len(found) + 1
        found.append(recorded(new, seq, f"A-{seq}", new.at))
    return build_episode("A", standing(found))


def fact(channel: str, words: str, clock: str) -> NewEntry:
    return NewEntry("A", channel, moment(clock), words=words)


def figures(episode: Episode, clock: str) -> EpisodeFigures:
    return episode_figures(episode, moment(clock), POLICY)


def compared(episode: Episode, clock: str, then: Episode | None = None) -> SinceHandover:
    return since_handover(figures(then or episode, "00:00"), figures(episode, clock), HANDED)


def test_nothing_happened_and_nothing_is_told() -> None:
    night = made(NIGHT)
    found = since_handover(figures(night, "00:00"), figures(night, "00:00"), HANDED)
    assert found.is_nothing
    assert found == SinceHandover(HANDED, True)


def test_an_episode_that_was_not_there_is_all_new() -> None:
    found = since_handover(None, figures(made(NIGHT), "03:00"), HANDED)
    assert found == SinceHandover(HANDED, False)
    assert not found.is_nothing


def test_settings_state_and_verdicts() -> None:
    found = compared(made(NIGHT), "02:20")
    assert [(s.channel, s.before, s.after) for s in found.settings] == [("ipap", 16.0, 20.0)]
    assert found.gas_before is not None
    assert found.gas_after is not None
    assert (found.gas_before.ph, found.gas_after.ph) == (7.24, 7.33)
    assert [(v.response.anchor_at, v.response.headline, v.before) for v in found.verdicts] == [
        (moment("01:00"), "better", None)
    ]
    assert found.support == ()


def test_flags_raised_and_no_longer_met() -> None:
    found = compared(made(NIGHT), "02:20")
    assert "ph_below_severe" in {f.marker for f in found.gone}
    gone = next(f for f in found.gone if f.marker == "ph_below_severe")
    assert gone.ended_at == moment("02:00")
    assert all(f.since > HANDED for f in found.raised)


def test_support_taken_off_and_ended() -> None:
    assert compared(made(NIGHT), "02:40").support == ("off the mask",)
    ended = compared(made(NIGHT + "03:00 stopped\n"), "03:10")
    assert ended.support == ("ended",)
    assert ended.settings == ()


def test_due_items_done_since_and_no_others() -> None:
    found = compared(made(NIGHT), "02:20")
    assert found.done
    assert all(d.done_at is not None and HANDED < d.done_at <= moment("02:20") for d in found.done)
    gases = [d for d in figures(made(NIGHT), "02:20").due if d.state == "done" and (d.done_at or 0) <= HANDED]
    assert gases, "the gas of 23:00 closed one before"


def test_what_was_agreed() -> None:
    before = fact("plan", "gas at 01:00", "-22:10")
    later = [fact("plan", "if pH below 7.25 call", "01:30"), fact("ceiling_of_care", "no intubation", "01:31")]
    found = compared(made(NIGHT, [before, *later]), "02:20")
    told = [(f.channel, f.before, f.after) for f in found.facts]
    assert told == [("plan", "gas at 01:00", "if pH below 7.25 call"), ("ceiling_of_care", None, "no intubation")]


def test_a_late_correction_of_what_was_handed_over_shows() -> None:
    """What was known then is compared, not what is known now of then."""
    then = made(NIGHT.replace("-23:00 ph 7.24", "-23:00 ph 7.29"))
    found = since_handover(figures(then, "00:00"), figures(made(NIGHT), "00:30"), HANDED)
    assert found.gas_before is not None
    assert found.gas_after is not None
    assert found.gas_before.at == found.gas_after.at == moment("-23:00")
    assert (found.gas_before.ph, found.gas_after.ph) == (7.29, 7.24)
    assert not found.is_nothing


def test_a_range_that_a_gas_changed_is_told_and_a_prescribed_one_is_a_fact():
    start = "-21:00 ph 7.44 paco2 36 site arterial\n-22:00 mode BPAP-ST ipap 16 epap 5 fio2 0.28\n"
    before, after = made(start), made(start + "01:00 ph 7.29 paco2 58 site arterial\n")
    found = since_handover(figures(before, "00:00"), figures(after, "02:00"), HANDED)
    assert found.target == TargetChange((94, 98), (88, 92), moment("01:00"))
    assert not replace(found, gas_after=None, verdicts=(), raised=(), gone=(), done=()).is_nothing
    new = since_handover(None, figures(after, "02:00"), HANDED)
    assert (new.was_there, new.target) == (False, TargetChange((94, 98), (88, 92), moment("01:00")))
    at_the_start = made(start.replace("ph 7.44 paco2 36", "ph 7.29 paco2 58"))
    assert since_handover(None, figures(at_the_start, "02:00"), HANDED).target is None, "nobody kept another before"
    ordered = made(start, [replace(fact("target_spo2_low", "88", "01:00"), words=None, number=88.0),
                           replace(fact("target_spo2_high", "92", "01:00"), words=None, number=92.0)])  # fmt: skip
    told = since_handover(figures(before, "00:00"), figures(ordered, "02:00"), HANDED)
    assert told.target is None
    assert {f.channel for f in told.facts} == {"target_spo2_low", "target_spo2_high"}
