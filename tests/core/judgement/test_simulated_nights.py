"""Simulated nights of twelve episodes, several seeds: escalation on those that fail, on no stable one.

The truth is the simulation's and shares no code with the judgement. A patient who fails only after the last gas was
drawn cannot be escalated on gases: there a concern stands, and the overdue gas is said.
"""

from collections.abc import Iterator
from functools import lru_cache

import pytest

from core.figures.episode_figures import judged
from core.judgement.flags import evaluate
from core.judgement.policy import shipped_policy
from core.judgement.shapes import FlagFigure
from core.record.instant import HOUR, Instant
from sample_data.cohort import SCENARIOS, SimulatedEpisode, simulate_many
from tests.support.simulated import as_episode, instant

SEEDS = (1, 2, 3, 4)
MANY = range(1, 25)
FAILING_KINDS = ("non_responder", "hypoxaemic_failure")
END = instant(600)


class Seen:
    """A simulated episode, its flags over the whole night, and when its last gas was drawn."""

    def __init__(self, kind: str, simulated: SimulatedEpisode) -> None:
        self.kind, self.truth = kind, simulated.truth
        context = judged(as_episode(simulated), END, shipped_policy())
        self.flags = evaluate(context)
        self.last_gas: Instant = max((g.at for g in context.gases), default=0)

    @property
    def escalated(self) -> list[FlagFigure]:
        return [f for f in self.flags if f.tier == "escalate"]

    @property
    def failed_at(self) -> Instant | None:
        return None if self.truth.failed_at is None else instant(self.truth.failed_at)

    @property
    def was_seen_failing(self) -> bool:
        """Whether a gas was drawn once it had failed."""
        return self.failed_at is not None and self.last_gas >= self.failed_at


@lru_cache(maxsize=2)
def nights(seeds: tuple[int, ...]) -> tuple[Seen, ...]:
    return tuple(Seen(kind, one) for kind in SCENARIOS for one in simulate_many(kind, seeds))


def stable(found: tuple[Seen, ...]) -> Iterator[Seen]:
    """Those that did not fail, of the kinds that do not."""
    return (s for s in found if s.kind not in FAILING_KINDS and not s.truth.failed)


def test_no_stable_episode_is_escalated():
    found = list(stable(nights(SEEDS)))
    assert len(found) >= 9 * len(SEEDS)
    wrong = [(s.kind, f.marker) for s in found for f in s.escalated]
    assert wrong == []


@pytest.mark.parametrize("kind", FAILING_KINDS)
def test_every_failing_episode_of_which_a_gas_was_drawn_is_escalated(kind):
    failed = [s for s in nights(SEEDS) if s.kind == kind and s.was_seen_failing]
    assert len(failed) >= 2
    assert all(s.escalated for s in failed)
    assert all(min(f.since for f in s.escalated) <= s.failed_at + 4 * HOUR for s in failed)


def test_a_failure_that_no_gas_saw_is_a_concern_with_the_gas_overdue():
    unseen = [s for s in nights(SEEDS) if s.truth.failed and not s.was_seen_failing and not s.escalated]
    assert unseen
    for seen in unseen:
        standing = {f.marker for f in seen.flags if f.ended_at is None and f.tier == "concern"}
        assert "gas_overdue" in standing
        assert len(standing) > 1


@pytest.mark.bench
def test_over_many_seeds(capsys):
    found = nights(tuple(MANY))
    well, failed = list(stable(found)), [s for s in found if s.truth.failed]
    false, told = [s for s in well if s.escalated], [s for s in failed if s.escalated]
    drawn = [s for s in failed if s.was_seen_failing]
    between = [s for s in found if s.kind in FAILING_KINDS and not s.truth.failed]
    with capsys.disabled():
        print(f"\n{len(well)} stable episodes, {len(false)} escalated")
        print(f"{len(failed)} that failed, {len(told)} escalated; of {len(drawn)} with a gas drawn once failing, "
              f"{sum(bool(s.escalated) for s in drawn)}")  # fmt: skip
        between_told = sum(bool(s.escalated) for s in between)
        print(f"{len(between)} of failing kinds that did not fail, {between_told} escalated")
    # the rules name some who then recover (pH below 7.25, not yet better at 1-2 h), and P/F counts at 1 h alone
    assert len(false) <= 0.02 * len(well)
    assert sum(bool(s.escalated) for s in drawn) >= 0.9 * len(drawn)
