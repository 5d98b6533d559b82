"""The COPD failure chart (Confalonieri, Eur Respir J 2005;25:348) as a risk class, without cell percentages.

Axes, from memory: pH >= 7.30, 7.25-7.29, < 7.25; rate < 30, 30-34, >= 35; GCS 15, 12-14, <= 11; APACHE II
< 29, >= 29. The percentages of its cells are not given here: take them from the paper. Confirmed in print: the
worst corner (GCS < 11, <= 11 in the chart; APACHE >= 29; rate >= 30; pH < 7.25) is above 70 % at admission and
above 90 % after 2 h.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import IntEnum
from typing import Final

from core.judgement.scores_binning import Input, half_up
from core.record.message import Message

SOURCE: Final = "Confalonieri, Eur Respir J 2005;25:348 (n = 1033; axes from memory)"
CERTAINTY: Final = "from memory"

AXES: Final[Mapping[str, tuple[int, bool, tuple[float, ...]]]] = {
    "ph": (2, False, (7.25, 7.30)),
    "rr": (0, True, (30.0, 35.0)),
    "gcs": (0, False, (12.0, 15.0)),
    "apache": (0, True, (29.0,)),
}
"""Per input: decimals it is rounded to, whether higher is worse, and the edges (each belongs to the upper side)."""


class Risk(IntEnum):
    """Where on the chart: no axis adverse, something between, or the worst corner."""

    NO_AXIS_ADVERSE = 0
    BETWEEN = 1
    WORST_CORNER = 2


@dataclass(frozen=True, slots=True)
class RiskClass:
    """`risk` is None where inputs are missing; `lowest`..`highest` then bound it.

    `steps` is, per axis, how many steps from the best side (None where missing). `published_above_percent` is
    the failure the source prints, for the worst corner only. `population_reason` says why outside.
    """

    risk: Risk | None
    lowest: Risk
    highest: Risk
    missing: tuple[str, ...]
    steps: Mapping[str, int | None]
    published_above_percent: float | None
    population: str
    population_reason: Message | None
    certainty: str = CERTAINTY
    source: str = SOURCE


def axis_step(name: str, value: Input, text: str | None = None) -> int | None:
    """How many steps an input lies from the best side of its axis; None where it is missing.

    >>> axis_step("ph", 7.295), axis_step("ph", 7.25), axis_step("ph", 7.24), axis_step("gcs", 11)
    (0, 1, 2, 2)
    """
    decimals, higher_is_worse, edges = AXES[name]
    binned = half_up(value, decimals, text)
    if binned is None:
        return None
    passed = sum(binned >= edge - 1e-9 for edge in edges)
    return passed if higher_is_worse else len(edges) - passed


def _risk(steps: Mapping[str, int]) -> Risk:
    if all(step == 0 for step in steps.values()):
        return Risk.NO_AXIS_ADVERSE
    corner = steps["ph"] == 2 and steps["rr"] >= 1 and steps["gcs"] == 2 and steps["apache"] == 1
    return Risk.WORST_CORNER if corner else Risk.BETWEEN


def copd_failure(
    *,
    ph: Input = None,
    rr: Input = None,
    gcs: Input = None,
    apache: Input = None,
    after_two_hours: bool = False,
    copd: bool | None = None,
    texts: Mapping[str, str | None] | None = None,
) -> RiskClass:
    """The chart's risk class at admission, or after 2 h of mask ventilation.

    Args:
        copd: whether the indication is COPD; anything but True is outside the population.
        texts: the inputs as typed, by name; they decide a rounding edge.

    >>> worst = copd_failure(ph=7.20, rr=36, gcs=10, apache=31, copd=True)
    >>> worst.risk.name, worst.published_above_percent
    ('WORST_CORNER', 70.0)
    >>> r = copd_failure(ph=7.20, rr=36, gcs=10, copd=True)
    >>> r.risk is None, r.lowest.name, r.highest.name, r.missing
    (True, 'BETWEEN', 'WORST_CORNER', ('apache',))
    """
    texts = texts or {}
    given: dict[str, Input] = {"ph": ph, "rr": rr, "gcs": gcs, "apache": apache}
    steps = {name: axis_step(name, value, texts.get(name)) for name, value in given.items()}
    missing = tuple(name for name, step in steps.items() if step is None)
    lowest = _risk({name: 0 if step is None else step for name, step in steps.items()})
    highest = _risk({name: len(AXES[name][2]) if step is None else step for name, step in steps.items()})
    risk = None if missing else lowest
    published = (90.0 if after_two_hours else 70.0) if risk is Risk.WORST_CORNER else None
    reason = None if copd is True else Message("population.not_copd" if copd is False else "population.unknown")
    inside = "inside" if reason is None else "outside"
    return RiskClass(risk, lowest, highest, missing, steps, published, inside, reason)
