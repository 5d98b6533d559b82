"""What the simulation knows and no one on the ward does: who truly answered, who truly failed, and when."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from sample_data.saturation import Values
from sample_data.simulation import Trajectory

LASTS_MIN = 15
"""A true state counts when it lasts this long."""
ANSWER_PH, ANSWER_PACO2 = 0.04, 4.0
OXYGEN_ANSWER = 0.20


@dataclass(frozen=True, slots=True)
class Truth:
    """The truth of one episode; minutes count from the start of support, None where it never came.

    `responded_at`: true pH up by 0.04 with PaCO2 down by 4 mmHg (or, in hypoxaemic failure, P/F up by a fifth),
    lasting. `responded`: that within 120 min. `failed_at`: see `failed_why`.
    `leak_from`: true leak above 40 L/min, lasting.
    """

    responded: bool
    responded_at: int | None
    gain_lost_at: int | None
    failed: bool
    failed_at: int | None
    failed_why: str
    leak_from: int | None
    finding: str


def lasting(state: Values, minutes: int = LASTS_MIN) -> int | None:
    """The first index from which a state (0 or 1, shape (n,)) holds for so many minutes on end.

    >>> lasting(np.array([0, 1, 0, 1, 1, 1.0]), 3)
    3
    """
    held = np.convolve(state > 0, np.ones(minutes), "valid") >= minutes - 0.5
    found = np.flatnonzero(held)
    return int(found[0]) if found.size else None


def truth_of(true: Trajectory, start: int, hypoxaemic: bool, finding: str) -> Truth:
    """Judge the true course from index `start`, the start of support."""
    before = max(start - 5, 0)
    answered = _answered(true, start, before, hypoxaemic)
    responded_at = lasting(answered)
    failed_at, why = _failed(true, start, before, hypoxaemic)
    lost = None
    if responded_at is not None:
        later = lasting(_lost(true, start, before, hypoxaemic)[responded_at:])
        lost = None if later is None else responded_at + later
    leak_from = lasting((true.leak[start:] > 40.0).astype(np.float64))
    prompt = responded_at is not None and responded_at <= 120
    return Truth(prompt, responded_at, lost, failed_at is not None, failed_at, why, leak_from, finding)


def _answered(true: Trajectory, start: int, before: int, hypoxaemic: bool) -> Values:
    if hypoxaemic:
        return np.asarray(true.pf[start:] >= (1.0 + OXYGEN_ANSWER) * true.pf[before], np.float64)
    up = true.ph[start:] - true.ph[before] >= ANSWER_PH
    down = true.paco2[before] - true.paco2[start:] >= ANSWER_PACO2
    return np.asarray(up & down, np.float64)


def _lost(true: Trajectory, start: int, before: int, hypoxaemic: bool) -> Values:
    """Of the best gain so far, more than half is gone."""
    if hypoxaemic:
        gain = true.pf[start:] - true.pf[before]
    else:
        gain = true.ph[start:] - true.ph[before]
    best = np.maximum.accumulate(gain)
    return np.asarray(gain < 0.5 * best, np.float64)


def _failed(true: Trajectory, start: int, before: int, hypoxaemic: bool) -> tuple[int | None, str]:
    """The earliest lasting failure after the first hour of support."""
    hour = start + 60
    signs: dict[str, Values] = {
        "narcosis": true.gcs[hour:] < np.minimum(true.gcs[before] - 2.0, 13.0),
        "exhausted": true.fatigue[hour:] > 0.5,
    }
    if hypoxaemic:
        signs["oxygenation"] = true.pf[hour:] <= 146.0
    else:
        signs["acidosis"] = (true.ph[hour:] < 7.25) & (true.ph[hour:] < true.ph[before] + 0.02)
    found = [(at, why) for why, s in signs.items() if (at := lasting(np.asarray(s, np.float64))) is not None]
    if not found:
        return None, ""
    at, why = min(found)
    return 60 + at, why
