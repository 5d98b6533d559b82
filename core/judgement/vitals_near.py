"""Respiratory rate and SpO2 near a moment: a counted or spot value first, else a median of the device.

A counted rate beats a device rate. A value from the other side of a change is never taken: the caller bounds
the search.
"""

from __future__ import annotations

from bisect import bisect_right
from dataclasses import dataclass
from functools import cached_property
from statistics import median

import numpy as np

from core.judgement.policy import Policy
from core.record.episode import Episode, Series
from core.record.instant import MINUTE, Instant


@dataclass(frozen=True, slots=True)
class Found:
    """A value near a moment. `device` is True for a median of device samples; `at` is the newest used.

    `since`: the oldest sample of a median; None for a single value.
    """

    value: float
    at: Instant
    device: bool
    since: Instant | None = None


@dataclass(frozen=True)
class VitalsNear:
    """Looks up rate and SpO2 of one episode. Build one per context."""

    episode: Episode
    policy: Policy

    @cached_property
    def _rates(self) -> _Sources:
        rr = self.episode.number("rr")
        return _sources(rr.spots, rr.machine, self.episode.number("rr_total"))

    @cached_property
    def _saturations(self) -> _Sources:
        spo2 = self.episode.number("spo2")
        return _sources(spo2.spots, spo2.machine)

    @cached_property
    def _reach(self) -> tuple[Instant, Instant]:
        """How far a spot value may lie away, and how long a device's values are taken together."""
        policy = self.policy
        return int(policy.freshness.vitals_min.value * MINUTE), int(policy.trend.device_median_min.value * MINUTE)

    def rate(self, at: Instant, low: Instant, high: Instant) -> Found | None:
        """The respiratory rate nearest to `at`, later than `low` and not later than `high`."""
        return self._near(self._rates, at, low, high)

    def spo2(self, at: Instant, low: Instant, high: Instant) -> Found | None:
        """The SpO2 nearest to `at`, later than `low` and not later than `high`."""
        return self._near(self._saturations, at, low, high)

    def _near(self, sources: _Sources, at: Instant, low: Instant, high: Instant) -> Found | None:
        reach, span = self._reach
        found = _nearest(sources, at, max(low, at - reach - 1), min(high, at + reach))
        if found is not None:
            return found
        for machine in sources.machines:
            found = _median_before(machine, max(low, at - span), min(high, at))
            if found is not None:
                return found
        return None


@dataclass(frozen=True, slots=True)
class _Sources:
    """Spot values as lists, since a few of them are searched often; machines as arrays."""

    t: list[int]
    v: list[float]
    machines: tuple[Series, ...]


def _sources(spots: Series, *machines: Series) -> _Sources:
    known = _known(spots)
    return _Sources(known.t.tolist(), known.v.tolist(), tuple(_known(m) for m in machines))


def _known(series: Series) -> Series:
    return series.cut(np.isfinite(series.v)) if len(series) else series


def _nearest(sources: _Sources, at: Instant, low: Instant, high: Instant) -> Found | None:
    """The spot value nearest to `at` in (low, high]; of two as near, the earlier."""
    t = sources.t
    i, j = bisect_right(t, low), bisect_right(t, high)
    if i >= j:
        return None
    near = min(range(i, j), key=lambda k: abs(t[k] - at))
    return Found(sources.v[near], t[near], False)


def _median_before(series: Series, low: Instant, high: Instant) -> Found | None:
    if not len(series):
        return None
    i, j = (int(k) for k in np.searchsorted(series.t, [low, high], side="right"))
    if i >= j:
        return None
    since = int(series.t[i]) if j - i > 1 else None
    return Found(median(series.v[i:j].tolist()), int(series.t[j - 1]), True, since)
