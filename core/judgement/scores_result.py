"""What every score returns: points, bounds, what is missing, per-input points, and for whom it was made."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType

from core.record.message import Message


@dataclass(frozen=True, slots=True)
class Part:
    """One input of a score: the value given, the value as binned, and its points.

    `points` is None where the input is missing; then `lowest` and `highest` are the least and the most points
    that it could have.
    """

    value: float | str | bool | None
    binned: float | str | bool | None
    points: float | None
    lowest: float
    highest: float


@dataclass(frozen=True, slots=True)
class Score:
    """A score. `points` is None where an input is missing; `lowest`..`highest` then hold what it could be.

    `population` is "inside" or "outside" the people the score was made for, with `population_reason`.
    `certainty` says how sure the points table is; `notes` are caveats to be shown with it.
    """

    name: str
    points: float | None
    lowest: float | None
    highest: float | None
    missing: tuple[str, ...]
    parts: Mapping[str, Part]
    population: str
    population_reason: Message | None
    certainty: str
    source: str
    notes: tuple[Message, ...] = field(default=())


def total(parts: Mapping[str, Part]) -> tuple[float | None, float, float, tuple[str, ...]]:
    """Points (None when any part is missing), lowest, highest and the missing inputs.

    >>> total({"gcs": Part(None, None, None, 0, 10), "hr": Part(130.0, 130.0, 1, 1, 1)})
    (None, 1, 11, ('gcs',))
    """
    missing = tuple(name for name, part in parts.items() if part.points is None)
    lowest = sum(part.lowest for part in parts.values())
    highest = sum(part.highest for part in parts.values())
    return (None if missing else lowest), lowest, highest, missing


def frozen(parts: dict[str, Part]) -> Mapping[str, Part]:
    """The parts as a mapping that nobody can change."""
    return MappingProxyType(parts)


def known(value: float | str | bool, binned: float | str | bool, points: float) -> Part:
    """A part whose input is known."""
    return Part(value, binned, points, points, points)


def missing_part(lowest: float, highest: float) -> Part:
    """A part whose input is missing: never normal, only bounded."""
    return Part(None, None, None, lowest, highest)
