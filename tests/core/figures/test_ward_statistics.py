"""The figures of a shift that was made by hand, against numbers counted by hand."""

from dataclasses import replace
from itertools import pairwise

import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.figures.episode_figures import episode_figures
from core.figures.ward_statistics import (
    GasTiming,
    Waits,
    Windows,
    episode_statistics,
    nothing,
    ward_statistics,
)
from core.judgement.flags import transitions, word_on
from core.judgement.policy import read_policy, shipped_policy, shipped_text
from core.judgement.policy_check import check
from core.record.entries import Entry, NewEntry, recorded
from core.record.episode import Episode, build_episode
from core.record.knowledge import standing
from tests.support.log import entries, moment

POLICY = shipped_policy()
START, END = moment("-19:30"), moment("07:30")

BETTER = """
-21:00 ph 7.22 paco2 80 site arterial
-21:10 rr 30
-22:00 mode BPAP-ST ipap 16 epap 5 fio2 0.28
-22:20 ph 7.24 paco2 78
-23:00 ph 7.30 paco2 66
-23:10 ph 7.26 paco2 72 site venous
01:00 ipap 20
02:00 ph 7.34 paco2 60
03:00 mask off
03:20 mask on
"""
"""Start 22:00 (window 22:30-00:00, answered 23:00), change 01:00 (01:30-03:00, answered 02:00), 20 min off."""

REPLACED = """
-20:00 rr 34
-20:30 mode BPAP-ST ipap 14 epap 4 fio2 0.35
-21:30 ipap 18
"""
"""The start's window (21:00-22:30) is cut short at 21:30; the next one's (22:00-23:30) runs out unanswered."""

EARLIER = """
-17:00 mode CPAP cpap 10 fio2 0.4
-17:30 rr 24
"""


def made(log: str, key: str, more: list[NewEntry] | None = None) -> Episode:
    found: list[Entry] = entries(log, key)
    for new in more or ():
        seq = len(found) + 1
        found.append(recorded(new, seq, f"{key}-{seq}", new.at))
    return build_episode(key, standing(found))


def fact(key: str, channel: str, clock: str) -> NewEntry:
    return NewEntry(key, channel, moment("-20:00"), number=float(moment(clock)))


def ward() -> list[Episode]:
    a = [fact("A", "deciding_gas_at", "-21:00"), fact("A", "decided_at", "-21:30"), fact("A", "arrived_at", "-19:40")]
    b = [fact("B", "decided_at", "-20:40"), fact("B", "arrived_at", "-20:00")]
    return [made(BETTER, "A", a), made(REPLACED, "B", b), made(EARLIER, "C")]


def test_the_hand_made_shift() -> None:
    found = ward_statistics(ward(), START, END, POLICY)
    assert (found.episodes, found.starts, found.ends) == (3, 2, {})
    assert found.clocks["gas_to_start"] == Waits((60.0,), 60.0, not_known=1)
    # B: start is said to come 10 min before the decision to start
    assert found.clocks["decision_to_start"] == Waits((30.0,), 60.0, backwards=1)
    assert found.clocks["arrival_to_start"] == Waits((30.0, 140.0), 120.0)
    assert found.clocks["arrival_to_start"].within == 1
    assert found.clocks["gas_to_start"].within == 1  # 60 min is inside
    assert found.first_gas == Waits((20.0,), not_known=1)
    assert found.gases == GasTiming(in_window=2, early=1, late=0, judges_none=1, venous=1)
    assert found.windows == Windows(answered=2, unanswered=1, replaced=1)
    assert found.hours_on_mask == pytest.approx(9.5 - 1 / 3 + 11.0 + 12.0)
    assert found.hours_possible == pytest.approx(9.5 + 11.0 + 12.0)
    assert found.responses == {"better": 2, "not judged": 1, "not yet known": 1}


def test_who_saw_a_flag_and_how_soon() -> None:
    before = made(BETTER, "A")
    flag = next(f for f in episode_figures(before, END, POLICY).flags if f.marker == "ph_below_severe")
    assert flag.since == moment("-21:00")
    raised = transitions([replace(flag, ended_at=None)], (), "A", POLICY.hash, moment("-21:02"))
    seen = word_on(flag, "seen", "CD", moment("-21:25"), "A")
    counted = episode_statistics(made(BETTER, "A", [*raised, seen]), START, END, POLICY).flags["ph_below_severe"]
    assert (counted.raised, counted.ended, counted.seen) == (1, 1, Waits((25.0,)))
    unseen = episode_statistics(before, START, END, POLICY).flags["ph_below_severe"]
    assert unseen.seen == Waits(not_known=1)


def test_what_happened_after_the_span_is_not_in_it() -> None:
    short = moment("-22:50")
    found = ward_statistics(ward(), START, short, POLICY)
    assert found.gases.total == 2
    assert found.windows == Windows(replaced=1)
    assert found.hours_on_mask == pytest.approx((50 + 140 + 200) / 60)


def test_an_episode_that_ended_before_the_span_adds_nothing() -> None:
    ended = made(EARLIER + "-18:00 stopped\n", "C")
    assert episode_statistics(ended, START, END, POLICY) == nothing(START, END, POLICY)
    in_span = made(EARLIER + "-20:30 stopped\n", "C")
    assert episode_statistics(in_span, START, END, POLICY).ends == {"stopped": 1}
    assert episode_statistics(in_span, START, END, POLICY).hours_on_mask == pytest.approx(1.0)


def test_a_span_must_go_forward() -> None:
    with pytest.raises(ValueError, match="must lie after"):
        ward_statistics((), END, START, POLICY)


@given(st.lists(st.integers(20 * 60, 31 * 60), min_size=1, max_size=3, unique=True))
def test_spans_laid_end_to_end_count_every_happening_once(cuts: list[int]) -> None:
    """What is counted by its own moment: starts, hours, gases, flags raised. Verdicts may ripen later."""
    episodes = ward()
    edges = [START, *(moment("-00:00") + c * 60_000_000 for c in sorted(cuts)), END]
    parts = [ward_statistics(episodes, a, b, POLICY) for a, b in pairwise(edges)]
    whole = ward_statistics(episodes, START, END, POLICY)
    assert sum(p.starts for p in parts) == whole.starts
    assert sum(p.hours_on_mask for p in parts) == pytest.approx(whole.hours_on_mask)
    assert sum(p.gases.total + p.gases.venous for p in parts) == whole.gases.total + whole.gases.venous
    assert sum(p.windows.closed + p.windows.replaced for p in parts) == 4
    flags = [sum(c.raised for c in p.flags.values()) for p in parts]
    assert sum(flags) == sum(c.raised for c in whole.flags.values())


@given(st.permutations(range(3)))
def test_the_order_of_the_episodes_does_not_matter(order: list[int]) -> None:
    episodes = ward()
    mixed = ward_statistics([episodes[n] for n in order], START, END, POLICY)
    straight = ward_statistics(episodes, START, END, POLICY)
    assert replace(mixed, hours_on_mask=0, hours_possible=0) == replace(straight, hours_on_mask=0, hours_possible=0)
    assert mixed.hours_on_mask == pytest.approx(straight.hours_on_mask)


def test_the_clocks_limits_are_the_wards_own() -> None:
    text = shipped_text().replace("arrival_to_start_min = { value = 120", "arrival_to_start_min = { value = 150")
    own = ward_statistics(ward(), START, END, read_policy(text))
    assert own.clocks["arrival_to_start"].within == 2  # 30 and 140 min
    assert own.limits["arrival_to_start"].value == 150
    assert ward_statistics(ward(), START, END, POLICY).limits["arrival_to_start"].sure == "from memory"


def test_a_copy_of_the_policy_that_is_older_than_the_clocks_has_those_shipped() -> None:
    text = shipped_text()
    before, _, rest = text.partition("[start_clocks]")
    older = before + rest[rest.index("# Markers.") :]
    assert check(older).usable
    found = ward_statistics(ward(), START, END, read_policy(older))
    assert found.limits == nothing(START, END, POLICY).limits
