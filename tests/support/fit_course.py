"""Fit the process variances of the course on training seeds of the simulation, and test them on held-out seeds.

    python -m tests.support.fit_course

Prints q per hour for pH and PaCO2 such that the 90 % band covers the truth in 90 % of the minutes, between two gases
and in the two hours beyond one, then the coverage on seeds that were not used. The simulation knows the truth; nobody
on a ward does. Between gases all kinds of episode are pooled; beyond a gas q is that of the worst kind, the one that
gets worse, since a band that is too narrow there would reassure.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass

import numpy as np

from core.figures.episode_figures import gas_stage, record_stage
from core.judgement.course import (
    BAND_Z,
    PACO2_DRIFT_VARIANCE_PER_H,
    PACO2_PROCESS_VARIANCE_PER_H,
    PH_DRIFT_VARIANCE_PER_H,
    PH_PROCESS_VARIANCE_PER_H,
    TWO_GASES,
    course_cuts,
    course_gases,
)
from core.judgement.response_baseline import minute
from core.judgement.response_noise import paco2_noise, ph_noise
from core.judgement.shapes import GasFigure
from core.record.samples import Values
from sample_data.cohort import SCENARIOS, SimulatedEpisode, simulate_many
from tests.support.simulated import POLICY, as_episode, instant

TRAINING = range(1000, 1060)
HELD_OUT = range(2000, 2060)
BEYOND_MIN = 120
WIDTHS = (9, 12, 12, 12, 10, 10)


@dataclass(frozen=True)
class Residuals:
    """Error of the interpolated value at minutes between gases, the part of its variance that gases make, and
    the hours that the process variance is multiplied by. Shapes (n,)."""

    error: Values
    noise: Values
    hours: Values

    def coverage(self, q: float) -> float:
        """The share of minutes whose truth lies in the band."""
        return float((np.abs(self.error) <= BAND_Z * np.sqrt(self.noise + q * self.hours)).mean())


NOTHING = Residuals(np.empty(0), np.empty(0), np.empty(0))
USED = {
    "ph between": PH_PROCESS_VARIANCE_PER_H,
    "paco2 between": PACO2_PROCESS_VARIANCE_PER_H,
    "ph beyond": PH_DRIFT_VARIANCE_PER_H,
    "paco2 beyond": PACO2_DRIFT_VARIANCE_PER_H,
}


def residuals(kinds: Iterable[str], seeds: Iterable[int]) -> dict[str, Residuals]:
    """The residuals of the simulated episodes between gases that no change separates, and beyond each gas."""
    rows: dict[str, list[Values]] = {k: [] for k in USED}
    seeds = list(seeds)
    for kind in kinds:
        for simulated in simulate_many(kind, seeds):
            _add_episode(rows, simulated)
    return {k: Residuals(*np.concatenate(v, axis=1)) if v else NOTHING for k, v in rows.items()}


def _add_episode(rows: dict[str, list[Values]], simulated: SimulatedEpisode) -> None:
    ctx = gas_stage(record_stage(as_episode(simulated, device=False), instant(600), POLICY))
    cuts = np.array([minute(c) for c in course_cuts(ctx)])
    gases = course_gases(ctx)
    last = simulated.first + simulated.true.ph.size - 1
    for g, following in zip(gases, (*gases[1:], None), strict=True):
        index = np.searchsorted(cuts, minute(g.at))
        if index == 0:
            continue
        until = int(cuts[index]) if index < cuts.size else minute(instant(last))
        for quantity in ("ph", "paco2"):
            v = _of(g, quantity)
            truth: Values = getattr(simulated.true, quantity)[minute(g.at) - minute(instant(simulated.first)) :]
            rows[f"{quantity} beyond"].append(_beyond(truth, v, min(BEYOND_MIN, until - minute(g.at)), quantity))
            if following is not None and minute(following.at) <= until:
                length = minute(following.at) - minute(g.at)
                rows[f"{quantity} between"].append(_between(truth, v, _of(following, quantity), length, quantity))


def _of(gas: GasFigure, quantity: str) -> float:
    value = gas.ph if quantity == "ph" else gas.paco2_mmHg
    assert value is not None
    return value


def _variance(value: float, quantity: str) -> float:
    noise = ph_noise(POLICY.noise) if quantity == "ph" else paco2_noise(POLICY.noise, value)
    return (noise / TWO_GASES) ** 2


def _between(truth: Values, v0: float, v1: float, minutes: int, quantity: str) -> Values:
    f = np.arange(minutes + 1) / minutes
    noise = (1 - f) ** 2 * _variance(v0, quantity) + f**2 * _variance(v1, quantity)
    return np.stack([v0 + f * (v1 - v0) - truth[: minutes + 1], noise, minutes / 60 * f * (1 - f)])


def _beyond(truth: Values, v0: float, minutes: int, quantity: str) -> Values:
    part = truth[: max(0, minutes) + 1]
    return np.stack([v0 - part, np.full(part.size, _variance(v0, quantity)), np.arange(part.size) / 60])


def fitted(data: Residuals, wanted: float = 0.90) -> float:
    """The process variance per hour at which the band covers the wanted share; 0 where noise alone does."""
    low, high = 0.0, 1e4
    if data.coverage(low) >= wanted:
        return low
    for _ in range(80):
        middle = (low + high) / 2
        low, high = (middle, high) if data.coverage(middle) < wanted else (low, middle)
    return high


def main() -> None:
    """Print the fit and its test."""
    by_kind = {kind: residuals([kind], TRAINING) for kind in SCENARIOS}
    training, held_out = pooled(by_kind.values()), residuals(SCENARIOS, HELD_OUT)
    heads = zip(("minutes", "fitted q/h", "worst kind", "used q/h", "training", "held out"), WIDTHS, strict=True)
    print(" " * 15 + "".join(f"{head:>{width}}" for head, width in heads))
    for k, q in USED.items():
        worst = max(fitted(one[k]) for one in by_kind.values() if one[k].error.size)
        print(f"{k:15}{training[k].error.size:9}{fitted(training[k]):12.3g}{worst:12.3g}{q:12.3g}"
              f"{training[k].coverage(q):10.1%}{held_out[k].coverage(q):10.1%}")  # fmt: skip


def pooled(parts: Iterable[dict[str, Residuals]]) -> dict[str, Residuals]:
    """The residuals of several kinds together."""
    several = list(parts)
    return {
        k: Residuals(*(np.concatenate([getattr(p[k], n) for p in several]) for n in ("error", "noise", "hours")))
        for k in USED
    }


if __name__ == "__main__":
    main()
