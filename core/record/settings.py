"""Settings in force: every setting as a step function, and the oxygen that is known.

Logging an oxygen flow without an FiO2 ends the known FiO2, since the fraction a flow makes on a mask depends
on flow, leak and ventilation. A flow of 0 is room air: the machine draws it from the room, FiO2 0.21.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import dataclass
from functools import cached_property
from math import isnan, nan

import numpy as np

from core.record.channels import BILEVEL_MODES
from core.record.episode import Episode
from core.record.instant import MINUTE, Instant
from core.record.reading import Reading
from core.record.samples import Times, Values

ROOM_AIR = 0.21
SETTING_NUMBERS = ("ipap", "epap", "cpap", "fio2", "o2_flow", "rate_set", "ti")
SETTING_WORDS = ("mode", "interface")
"""The channels whose values are in force from when they were logged until the next."""


@dataclass(frozen=True, slots=True)
class Settings:
    """What is in force at one moment. NaN or None: not recorded, or not known (FiO2 under a flow)."""

    mode: str | None
    ipap: float
    epap: float
    cpap: float
    fio2: float
    o2_flow: float
    rate_set: float
    ti: float
    interface: str | None

    @property
    def is_cpap(self) -> bool:
        """One pressure: CPAP mode, or only a CPAP pressure was ever logged."""
        return self.mode == "CPAP" or (self.mode is None and isnan(self.ipap) and not isnan(self.cpap))

    @property
    def is_bilevel(self) -> bool:
        """Two pressures: a bilevel mode, or an IPAP without a mode."""
        return self.mode in BILEVEL_MODES or (self.mode is None and not isnan(self.ipap))

    @property
    def is_off(self) -> bool:
        """Switched off by mode."""
        return self.mode == "off"

    @property
    def low_pressure(self) -> float:
        """The expiratory pressure, cmH2O: EPAP on two pressures, CPAP on one."""
        if self.is_cpap:
            return self.cpap if not isnan(self.cpap) else self.epap
        return self.epap if self.is_bilevel else nan

    @property
    def pressure_support(self) -> float:
        """IPAP - EPAP in cmH2O; 0 on CPAP and off; NaN where either pressure is not recorded.

        >>> Settings("BPAP-ST", 16, 6, nan, 0.35, nan, 14, nan, None).pressure_support
        10
        """
        if self.is_bilevel:
            return self.ipap - self.epap
        return nan if self.mode is None and not self.is_cpap else 0.0


NO_SETTINGS = Settings(None, nan, nan, nan, nan, nan, nan, nan, None)
"""Nothing was ever recorded."""


@dataclass(frozen=True, slots=True)
class Steps:
    """A step function: value `v[i]` stands from `t[i]` until the next. Shapes (n,)."""

    t: Times
    v: Values

    def at(self, at: Instant) -> float:
        """The value in force at a moment, that moment's own change included; NaN before the first."""
        i = int(self.t.searchsorted(at, side="right")) - 1
        return float(self.v[i]) if i >= 0 else nan

    def before(self, at: Instant) -> float:
        """The value in force just before a moment."""
        return self.at(at - 1)

    def on(self, times: Times) -> Values:
        """The value in force at each of `times`, shape (m,) to (m,)."""
        i = np.searchsorted(self.t, times, side="right") - 1
        if self.t.size == 0:
            return np.full(times.shape, nan)
        return np.where(i >= 0, self.v[np.maximum(i, 0)], nan)


@dataclass(frozen=True)
class SettingsInForce:
    """All settings of an episode over time."""

    episode: Episode

    @cached_property
    def fio2(self) -> Steps:
        """The known FiO2 as a fraction: NaN from an oxygen flow without an FiO2 of the same moment.

        An FiO2 and a flow of one moment belong together, unless the flow was recorded later by itself.
        """
        return self._oxygen("fio2", "o2_flow", lambda flow: ROOM_AIR if flow == 0 else nan)

    @cached_property
    def o2_flow(self) -> Steps:
        """The oxygen flow in L/min: NaN once an FiO2 alone was logged."""
        return self._oxygen("o2_flow", "fio2", lambda _fio2: nan)

    def _oxygen(self, channel: str, other: str, meaning: Callable[[float], float]) -> Steps:
        """One of the two ways to say oxygen; `meaning` of a value of the other, where that stands alone."""
        own, others = self.episode.number(channel), self.episode.number(other)
        known = dict(zip(own.t.tolist(), own.v.tolist(), strict=True))
        origins = dict(zip(own.t.tolist(), own.origin.tolist(), strict=True))
        for t, v, origin in zip(others.t.tolist(), others.v.tolist(), others.origin.tolist(), strict=True):
            if t not in origins or self.episode.said_later(origin, origins[t]):
                known[t] = meaning(v)
        moments = sorted(known)
        return Steps(np.array(moments, np.int64), np.array([known[t] for t in moments], np.float64))

    @cached_property
    def moments(self) -> tuple[Instant, ...]:
        """Every moment at which a setting was logged, in order."""
        found = {int(t) for c in SETTING_NUMBERS for t in self.episode.number(c).t}
        found |= {int(t) for c in SETTING_WORDS for t in self.episode.text(c).t}
        return tuple(sorted(found))

    @cached_property
    def _plain(self) -> dict[str, Steps]:
        def steps(channel: str) -> Steps:
            series = self.episode.number(channel)
            return Steps(series.t, series.v)

        return {c: steps(c) for c in ("ipap", "epap", "cpap", "rate_set", "ti")}

    def steps(self, channel: str) -> Steps:
        """The step function of a numeric setting."""
        if channel in ("fio2", "o2_flow"):
            return self.fio2 if channel == "fio2" else self.o2_flow
        return self._plain[channel]

    @cached_property
    def _seen(self) -> dict[Instant, Settings]:
        return {}

    def at(self, at: Instant) -> Settings:
        """The settings in force at a moment, changes of that moment included."""
        seen = self._seen.get(at)
        if seen is None:
            seen = self._seen[at] = self._at(at)
        return seen

    def _at(self, at: Instant) -> Settings:
        plain = self._plain
        return Settings(
            mode=self.episode.text("mode").at(at),
            ipap=plain["ipap"].at(at),
            epap=plain["epap"].at(at),
            cpap=plain["cpap"].at(at),
            fio2=self.fio2.at(at),
            o2_flow=self.o2_flow.at(at),
            rate_set=plain["rate_set"].at(at),
            ti=plain["ti"].at(at),
            interface=self.episode.text("interface").at(at),
        )

    def before(self, at: Instant) -> Settings:
        """The settings in force just before a moment."""
        return self.at(at - 1)

    def fio2_drawn_on(self, at: Instant) -> float:
        """The known FiO2 that a gas of a moment was drawn on, as a fraction.

        A gas of a change's own minute belongs before it, so what oxygen was set before that minute counts; where
        none was ever set before, that of the minute itself.
        """
        fio2, minute = self.fio2, at - at % MINUTE
        return fio2.before(minute) if fio2.t.size and fio2.t[0] < minute else fio2.at(at)


def settings_after(before: Settings, readings: Iterable[Reading]) -> Settings:
    """The settings in force once the readings are."""
    got = {r.channel.key: r.value for r in readings}

    def number(key: str, old: float) -> float:
        value = got.get(key)
        return value if isinstance(value, float) else old

    mode = got.get("mode")
    return Settings(
        mode if isinstance(mode, str) else before.mode,
        number("ipap", before.ipap), number("epap", before.epap), number("cpap", before.cpap),
        number("fio2", before.fio2), number("o2_flow", before.o2_flow),
        number("rate_set", before.rate_set), number("ti", before.ti), before.interface,
    )  # fmt: skip
