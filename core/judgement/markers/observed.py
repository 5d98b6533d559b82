"""What markers look at: the judged record of one episode, with what several of them need found once."""

from __future__ import annotations

from bisect import bisect_right
from collections.abc import Callable, Hashable
from dataclasses import dataclass
from math import isnan
from typing import Any, Generic, TypeVar

import numpy as np

from core.judgement.context import Context
from core.judgement.gas_findings import STANDS_FOR_ARTERIAL
from core.judgement.oxygen_breathed import oxygen_course
from core.judgement.policy import Policy
from core.judgement.probable_breaks import in_any, probable_breaks
from core.judgement.response_shapes import JudgedGas, ResponseFigure, SinceStart
from core.judgement.shapes import GasFigure
from core.judgement.stretches import FOREVER
from core.judgement.vitals_near import Found, VitalsNear
from core.judgement.watched_context import stands_with, watched
from core.record.channels import HYPERCAPNIC_RISK
from core.record.episode import Episode, Series
from core.record.instant import MINUTE, Instant
from core.record.samples import Flags, Times, Values
from core.record.settings import SettingsInForce, Steps
from core.record.support import Break, SupportTime

Finding = TypeVar("Finding")


def one_a_minute(series: Series) -> Flags:
    """Which values are a reading of their own, shape (n,): of several that people logged for one minute the last is.

    A value typed twice is no second reading, and what asks for two in a row must not take it for one.
    """
    kept = np.ones(series.t.shape, np.bool_)
    spots = np.flatnonzero(series.spot)
    minutes = series.t[spots] // MINUTE
    kept[spots[:-1][minutes[1:] == minutes[:-1]]] = False
    return kept


@dataclass(frozen=True, slots=True)
class Attributed:
    """A gas as it judges one anchor."""

    response: ResponseFigure
    judged: JudgedGas


@dataclass(frozen=True, slots=True)
class _Found:
    value: Any
    moved: bool
    """Whether something that moves with the clock was read to find it."""


class found_once(Generic[Finding]):  # noqa: N801 - used as a decorator, like `cached_property`
    """What is found in a record once, as `Observed.once` finds it, read as an attribute."""

    def __init__(self, find: Callable[[Any], Finding]) -> None:
        self._find = find
        self._name = find.__name__
        self.__doc__ = find.__doc__

    def __get__(self, seen: Observed, owner: type) -> Finding:
        found: Finding = seen.once(self._find)
        if not seen.has_moved(self._find):
            seen.__dict__[self._name] = found  # the next read of it is as fast as any attribute
        return found


class Observed:
    """The context of one episode and what markers find in it. Holds nothing later than `as_of`.

    What is found without reading what moves with the clock is kept for later moments (`later`).
    """

    def __init__(self, ctx: Context) -> None:
        self.ctx = watched(ctx)
        self._found: dict[Hashable, _Found] = {}
        self._series: dict[tuple[str, str], Series] = {}

    def later(self, ctx: Context) -> Observed:
        """The same record at another moment, with what was found under a name and no clock moves.

        Only that: what markers share on the way to it holds samples, and would keep them in memory twice.
        """
        made = Observed(ctx)
        if stands_with(made.ctx, self.ctx):
            made._found.update((k, f) for k, f in self._found.items() if isinstance(k, str) and not f.moved)
        return made

    def once(self, find: Callable[[Observed], Finding], name: str | None = None) -> Finding:
        """What `find` gives for this record, computed the first time only: several markers share it.

        `name`: what it is kept by for later moments; without it, it is kept for this one.
        """
        key = name or find
        known = self._found.get(key)
        if known is None:
            before, self.ctx.moved = self.ctx.moved, False
            known = self._found[key] = _Found(find(self), self.ctx.moved)
            self.ctx.moved = before
        self.ctx.moved |= known.moved
        found: Finding = known.value
        return found

    def has_moved(self, key: Hashable) -> bool:
        """Whether what was found under `key` (see `once`) moves with the clock."""
        return self._found[key].moved

    @property
    def episode(self) -> Episode:
        """The record as of the moment."""
        return self.ctx.episode

    @property
    def policy(self) -> Policy:
        """The policy in force."""
        return self.ctx.policy

    @property
    def support(self) -> SupportTime:
        """When support ran."""
        return self.ctx.support

    @property
    def settings(self) -> SettingsInForce:
        """Settings as step functions."""
        return self.ctx.settings

    @property
    def as_of(self) -> Instant:
        """The moment of the figures."""
        return self.ctx.as_of

    @found_once
    def first_at(self) -> Instant | None:
        """The first moment that anything was logged for."""
        return self.episode.first_at

    @found_once
    def gases(self) -> tuple[GasFigure, ...]:
        """Arterial and capillary gases, by time: those whose pH and PCO2 judge."""
        return tuple(g for g in self.ctx.gases if g.site in STANDS_FOR_ARTERIAL)

    @found_once
    def on_support_gases(self) -> tuple[GasFigure, ...]:
        """Those drawn on support."""
        return tuple(g for g in self.gases if self.drawn_on_support(g))

    def drawn_on_support(self, gas: GasFigure) -> bool:
        """Whether a gas was drawn after support began, not in a break or soon after one, nor after its end."""
        start = self.support.start
        if start is None or gas.off_support:
            return False
        after = gas.at // MINUTE > start // MINUTE
        return after or (not self.support.start_recorded and gas.at >= start)

    @found_once
    def newest_gas(self) -> GasFigure | None:
        """The newest blood gas of any site."""
        return self.ctx.gases[-1] if self.ctx.gases else None

    @found_once
    def newest_sample(self) -> GasFigure | None:
        """The newest sample of any site, a lone lactate among them."""
        return self.ctx.samples[-1] if self.ctx.samples else None

    @found_once
    def doubtful_gases(self) -> frozenset[Instant]:
        """The moments of the samples that hold what nobody confirmed, or what cannot belong together."""
        return frozenset(g.at for g in self.ctx.samples if g.in_doubt)

    @found_once
    def by_moment(self) -> dict[Instant, GasFigure]:
        """The arterial and capillary gases by their moment."""
        return {g.at: g for g in self.gases}

    @found_once
    def _gas_moments(self) -> list[Instant]:
        return [g.at for g in self.gases]

    def gas_at(self, at: Instant) -> GasFigure | None:
        """The newest arterial or capillary gas at or before a moment."""
        i = bisect_right(self._gas_moments, at)
        return self.gases[i - 1] if i else None

    def gas_with_ph_at(self, at: Instant) -> GasFigure | None:
        """The newest of them that has a pH."""
        i = bisect_right(self._gas_moments, at)
        return next((g for g in reversed(self.gases[:i]) if g.ph is not None), None)

    def gases_until(self, at: Instant) -> tuple[GasFigure, ...]:
        """The arterial and capillary gases at or before a moment."""
        return self.gases[: bisect_right(self._gas_moments, at)]

    def gas_on_support_at(self, at: Instant) -> GasFigure | None:
        """The newest gas with a pH at or before a moment that was not drawn off support."""
        i = bisect_right(self._gas_moments, at)
        return next((g for g in reversed(self.gases[:i]) if g.ph is not None and not g.off_support), None)

    def gases_before(self, gas: GasFigure, within: Instant) -> tuple[GasFigure, ...]:
        """The arterial or capillary gases before one, at most `within` microseconds older."""
        i, j = bisect_right(self._gas_moments, gas.at - within - 1), bisect_right(self._gas_moments, gas.at - 1)
        return self.gases[i:j]

    @found_once
    def start_baseline(self) -> GasFigure | None:
        """The gas that the start of support is judged against."""
        first = self.ctx.responses[0] if self.ctx.responses else None
        if first is None or first.anchor != "start" or first.baseline_at is None:
            return None
        return next((g for g in self.gases if g.at == first.baseline_at), None)

    @found_once
    def attributed(self) -> dict[Instant, list[Attributed]]:
        """By gas: the anchors whose effect it judges."""
        found: dict[Instant, list[Attributed]] = {}
        for response in self.ctx.responses:
            for judged in response.gases:
                if judged.attributable:
                    found.setdefault(judged.at, []).append(Attributed(response, judged))
        return found

    @found_once
    def since_start(self) -> dict[Instant, SinceStart]:
        """By gas: how it compares with the start."""
        return {j.at: j.since_start for r in self.ctx.responses for j in r.gases}

    @found_once
    def vitals(self) -> VitalsNear:
        """Rate and SpO2 near a moment."""
        return VitalsNear(self.episode, self.policy)

    def entry_id(self, channel: str, at: Instant) -> str | None:
        """The id of the entry that logged a channel at a moment; None for a machine's value."""
        words, series = self.episode.text(channel), self.episode.number(channel)
        for t, origin in ((words.t, words.origin), (series.t, series.origin)):
            i = int(np.searchsorted(t, at, side="right")) - 1
            if i >= 0 and t[i] == at and origin[i] >= 0:
                return self.episode.standing[int(origin[i])].entry.id
        return None

    def rate_near(self, at: Instant) -> Found | None:
        """The respiratory rate nearest to a moment, before or after it (none is later than `as_of`)."""
        return self.vitals.rate(at, 0, FOREVER)

    def series(self, channel: str) -> Series:
        """The known values of a channel; of those that people logged for one minute the last."""
        return self._part(channel, "all")

    def spots(self, channel: str) -> Series:
        """The known values of a channel that people logged."""
        return self._part(channel, "spots")

    def machine(self, channel: str) -> Series:
        """The known values of a channel that a machine wrote."""
        return self._part(channel, "machine")

    def worn_machine(self, channel: str) -> Series:
        """Those that it wrote while support ran on the patient."""
        return self._part(channel, "worn")

    def _part(self, channel: str, part: str) -> Series:
        """A part of a channel, cut once: a cut costs more than most markers."""
        key = (channel, part)
        if key not in self._series:
            self._series[key] = self._cut(channel, part)
        return self._series[key]

    def _cut(self, channel: str, part: str) -> Series:
        if part == "all":
            found = self.episode.number(channel)
            kept = np.isfinite(found.v) & one_a_minute(found)
            return found if kept.all() else found.cut(kept)
        if part == "worn":
            machine = self.machine(channel)
            return machine.cut(self.worn(machine.t)) if len(machine) else machine
        found = self.series(channel)
        wanted = found.spot if part == "spots" else ~found.spot
        return found if wanted.all() else found.cut(wanted)

    @found_once
    def suspected_breaks(self) -> tuple[Break, ...]:
        """Breaks that nobody logged."""
        return probable_breaks(self.ctx)

    def off_mask(self, times: Times) -> Flags:
        """Whether each time lies in a logged or a probable break, shape (n,)."""
        return in_any(times, (*self.support.breaks, *self.suspected_breaks))

    def worn(self, times: Times, after_min: float = 0.0) -> Flags:
        """Whether support ran on the patient at each time, `after_min` minutes after its start and later."""
        start, end = self.support.start, self.support.end
        if start is None:
            return np.zeros(times.shape, np.bool_)
        inside: Flags = times >= start + int(after_min * MINUTE)
        if end is not None:
            inside &= times < end
        return inside & ~self.off_mask(times)

    @found_once
    def risk_since(self) -> Instant | None:
        """Since when hypercapnic risk is known: by indication from the beginning, else by a gas that shows it."""
        if self.ctx.indication in HYPERCAPNIC_RISK:
            return 0
        return next((g.at for g in self.gases if g.hypercapnic), None)

    def targets(self, times: Times) -> tuple[Values, Values]:
        """The SpO2 range in force at each time, shapes (n,): as prescribed then, else as the risk calls for."""
        low, high = self._stepped("target_spo2_low", times), self._stepped("target_spo2_high", times)
        o = self.policy.oxygen
        risk = high <= o.risk_target_high.value
        if self.risk_since is not None:
            risk |= times >= self.risk_since
        low_default = np.where(risk, o.risk_target_low.value, o.target_low.value)
        high_default = np.where(risk, o.risk_target_high.value, o.target_high.value)
        return np.where(np.isnan(low), low_default, low), np.where(np.isnan(high), high_default, high)

    def _stepped(self, channel: str, times: Times) -> Values:
        series = self.episode.number(channel)
        return Steps(series.t, series.v).on(times)

    def at_risk(self, times: Times) -> Flags:
        """Whether hypercapnic risk was known at each time, shape (n,)."""
        risk: Flags = self._stepped("target_spo2_high", times) <= self.policy.oxygen.risk_target_high.value
        return risk if self.risk_since is None else risk | (times >= self.risk_since)

    def oxygen_given(self, times: Times) -> Flags:
        """Whether oxygen was given at each time, shape (n,); False where it is not known."""
        return np.asarray(oxygen_course(self.settings, self.support, times) == 1.0)

    def on_highest_oxygen(self, gas: GasFigure, fio2: float, flow: float) -> bool | None:
        """Whether a gas was drawn on at least so much oxygen; None where that is not known."""
        if gas.fio2 is not None:
            return gas.fio2 >= fio2 - 1e-9
        given = self.settings.o2_flow.at(gas.at)
        return None if isnan(given) else given >= flow
