"""What the simulation knows and no one on the ward does: who truly answered, who truly failed, and when."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np
from numpy.typing import NDArray

from sample_data.saturation import Values
from sample_data.simulation import Trajectory

LASTS_MIN = 15
ANSWER_LASTS_MIN = 30
"""True states count when they last this long."""
BASELINE_MIN = 25
"""The course is compared with the true state this long before support, when the deciding gas is taken."""
ANSWER_PH, ANSWER_PACO2, ANSWER_PF = 0.04, 4.0, 0.20
PROMPT_MIN = 120


@dataclass(frozen=True, slots=True)
class Truth:
    """The truth of one episode; minutes count from the start of support, None where it never came.

    `responded_at`: from then, for half an hour, true pH is up by 0.04 and PaCO2 down by 4 mmHg (in hypoxaemic
    failure: P/F up by a fifth). `responded`: that came within 120 min. `gain_lost_at`: more than half of the best
    gain is gone afterwards. `failed_at`, `failed_why`: lasting, after the first hour: `acidosis` (pH below 7.25 and
    no better than at the start), `oxygenation` (P/F at or below 146 mmHg in hypoxaemic failure), `narcosis` (GCS
    down by 2, below 13), `exhausted`. `leak_from`: leak above 40 L/min, lasting.
    """

    responded: bool
    responded_at: int | None
    gain_lost_at: int | None
    failed: bool
    failed_at: int | None
    failed_why: str
    leak_from: int | None
    finding: str


def lasting(state: NDArray[np.bool_], minutes: int = LASTS_MIN) -> int | None:
    """The first index from which a state, shape (n,), holds for so many minutes on end.

    >>> lasting(np.array([False, True, False, True, True, True]), 3)
    3
    """
    if state.size < minutes:
        return None
    held = np.convolve(state.astype(np.int64), np.ones(minutes, np.int64), "valid") == minutes
    found = np.flatnonzero(held)
    return int(found[0]) if found.size else None


def truth_of(true: Trajectory, start: int, hypoxaemic: bool, finding: str) -> Truth:
    """Judge the true course from index `start`, the start of support."""
    before = max(start - BASELINE_MIN, 0)
    gain = true.pf / true.pf[before] - 1.0 if hypoxaemic else true.ph - true.ph[before]
    gain = gain[start:]
    enough = gain >= (ANSWER_PF if hypoxaemic else ANSWER_PH)
    if not hypoxaemic:
        enough &= true.paco2[before] - true.paco2[start:] >= ANSWER_PACO2
    responded_at = lasting(enough, ANSWER_LASTS_MIN)
    lost_at = None if responded_at is None else _lost(gain, responded_at)
    failed_at, why = _failed(true, start, before, hypoxaemic)
    return Truth(
        responded=responded_at is not None and responded_at <= PROMPT_MIN,
        responded_at=responded_at,
        gain_lost_at=lost_at,
        failed=failed_at is not None,
        failed_at=failed_at,
        failed_why=why,
        leak_from=lasting(true.leak[start:] > 40.0),
        finding=finding,
    )


def _lost(gain: Values, responded_at: int) -> int | None:
    later = lasting((gain < 0.5 * np.maximum.accumulate(gain))[responded_at:])
    return None if later is None else responded_at + later


def _failed(true: Trajectory, start: int, before: int, hypoxaemic: bool) -> tuple[int | None, str]:
    hour = start + 60
    signs: dict[str, NDArray[np.bool_]] = {
        "narcosis": true.gcs[hour:] < min(float(true.gcs[before]) - 2.0, 13.0),
        "exhausted": true.fatigue[hour:] > 0.5,
    }
    if hypoxaemic:
        signs["oxygenation"] = true.pf[hour:] <= 146.0
    else:
        signs["acidosis"] = (true.ph[hour:] < 7.25) & (true.ph[hour:] < true.ph[before] + 0.02)
    found = [(at, why) for why, sign in signs.items() if (at := lasting(sign)) is not None]
    if not found:
        return None, ""
    at, why = min(found)
    return 60 + at, why
