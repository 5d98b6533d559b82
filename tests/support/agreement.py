"""How verdicts, and flags where there are any, agree with what the simulation knows. Simulation, not patients.

    python -m tests.support.agreement [--episodes 500] [--kinds prompt_responder,non_responder]

Verdict: the newest gas 45-135 min after the start says `better` against the start; truth: the patient truly
answered within 120 min. Warning: the first gas from 45 min on that is worse than at the start, lost its gain, or is
acidotic and not better; truth: the patient failed. Flag: the first flag of tier `escalate` since the start. Lead:
minutes before a review at fixed 2 h would have met the failure (negative: later). Gases come when the simulated ward
takes them, so an episode without a gas in time is counted as not asked.
"""

from __future__ import annotations

import argparse
from collections.abc import Iterable, Sequence
from dataclasses import dataclass
from statistics import median

from core.figures.episode_figures import episode_figures
from core.judgement.response_shapes import JudgedGas
from core.judgement.shapes import EpisodeFigures
from core.record.instant import MINUTE
from sample_data.cohort import LAST_MINUTE, SCENARIOS, SimulatedEpisode, simulate_many
from tests.support.simulated import POLICY, START, as_episode, instant

REVIEW_EVERY = 120
FIRST_SEED = 5000
ONE_TO_TWO_HOURS = (45, 135)
NOT_BETTER = ("worse", "no clear change", "mixed")


@dataclass(frozen=True, slots=True)
class Outcome:
    """One episode: what was true, what was said, and when (minutes from the start; None: never)."""

    responded: bool
    failed_at: int | None
    said_better: bool | None
    warned_at: float | None
    flagged_at: float | None


def outcome(simulated: SimulatedEpisode) -> Outcome:
    """Judge a simulated episode as the application would at its end."""
    figures = episode_figures(as_episode(simulated), instant(LAST_MINUTE), POLICY)
    by_at = {g.at: g for r in figures.responses for g in r.gases if g.attributable}
    gases = [by_at[at] for at in sorted(by_at)]
    asked = [g for g in gases if _minute(g) <= ONE_TO_TWO_HOURS[1] and _minute(g) >= ONE_TO_TWO_HOURS[0]]
    verdicts = [g.since_start.verdict for g in asked if g.since_start.verdict is not None]
    return Outcome(
        simulated.truth.responded,
        simulated.truth.failed_at,
        verdicts[-1] in ("better", "over-correction") if verdicts else None,
        next((_minute(g) for g in gases if _minute(g) >= ONE_TO_TWO_HOURS[0] and _warns(g)), None),
        _first_flag(figures),
    )


def _minute(gas: JudgedGas) -> float:
    return (gas.at - START) / MINUTE


def _warns(gas: JudgedGas) -> bool:
    since = gas.since_start
    if since.gain_lost or since.verdict == "worse":
        return True
    return gas.state in ("severe", "acidotic") and since.verdict in NOT_BETTER


def _first_flag(figures: EpisodeFigures) -> float | None:
    moments = [(f.since - START) / MINUTE for f in figures.flags if f.tier == "escalate" and f.since > START]
    return min(moments, default=None)


def share(part: Iterable[bool]) -> str:
    """A share as a percentage; a dash for none."""
    values = list(part)
    return f"{100 * sum(values) / len(values):.0f} %" if values else "-"


def lead(outcomes: Sequence[Outcome], name: str) -> str:
    """Median minutes from the first warning to the 2-hourly review that meets the failure."""
    leads = [
        -(-o.failed_at // REVIEW_EVERY) * REVIEW_EVERY - getattr(o, name)
        for o in outcomes
        if o.failed_at is not None and getattr(o, name) is not None
    ]
    return f"{median(leads):.0f} min" if leads else "-"


HEADS = (
    "kind", "n", "asked", "answered", "sens", "spec", "failed", "warned", "quiet", "lead",
    "flagged", "unflagged", "lead",
)  # fmt: skip


def row(kind: str, outcomes: Sequence[Outcome]) -> list[str]:
    """One line of the table."""
    asked = [o for o in outcomes if o.said_better is not None]
    failed = [o for o in outcomes if o.failed_at is not None]
    spared = [o for o in outcomes if o.failed_at is None]
    return [
        kind, str(len(outcomes)), str(len(asked)), str(sum(o.responded for o in asked)),
        share(bool(o.said_better) for o in asked if o.responded),
        share(not o.said_better for o in asked if not o.responded),
        str(len(failed)), share(o.warned_at is not None for o in failed),
        share(o.warned_at is None for o in spared), lead(outcomes, "warned_at"),
        share(o.flagged_at is not None for o in failed), share(o.flagged_at is None for o in spared),
        lead(outcomes, "flagged_at"),
    ]  # fmt: skip


def main(arguments: Sequence[str] | None = None) -> None:
    """Print the table: one row per kind of episode, and all together."""
    parser = argparse.ArgumentParser(description="Agreement of verdicts and flags with the simulation's truth.")
    parser.add_argument("--episodes", type=int, default=500)
    parser.add_argument("--kinds", default=",".join(SCENARIOS))
    chosen = parser.parse_args(arguments)
    everything: list[Outcome] = []
    print("| " + " | ".join(HEADS) + " |\n|" + "---|" * len(HEADS))
    for kind in chosen.kinds.split(","):
        seeds = range(FIRST_SEED, FIRST_SEED + chosen.episodes)
        outcomes = [outcome(s) for s in simulate_many(kind, seeds)]
        everything += outcomes
        print("| " + " | ".join(row(kind, outcomes)) + " |", flush=True)
    print("| " + " | ".join(row("all", everything)) + " |")


if __name__ == "__main__":
    main()
