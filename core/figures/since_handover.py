"""What is otherwise for an episode than it was handed over: settings, state, verdicts, flags, due items, agreements.

Both sides are whole figures, each as of its own moment and as known then, so that what was recorded late or corrected
since shows as a change: the sheet that was handed over did not say it.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from typing import Final

from core.judgement.response_shapes import ResponseFigure, Step
from core.judgement.shapes import DueFigure, EpisodeFigures, FlagFigure, GasFigure, SupportFigure
from core.record.instant import Instant

OPEN: Final = frozenset({"raised", "seen"})
AGREED: Final = ("plan", "agreed_with", "breaks_and_night", "ceiling_of_care", "resuscitation", "contact",
                 "jobs", "feeding", "isolation", "target_spo2_low", "target_spo2_high")  # fmt: skip
"""Facts of the profile that a handover passes on, in the order in which their changes are told."""
_WAITING: Final = frozenset({"not yet known", "not judged"})
_SETTINGS: Final = (
    ("mode", "mode"), ("ipap", "ipap_cmH2O"), ("epap", "epap_cmH2O"), ("fio2", "fio2"),
    ("o2_flow", "o2_flow_L_per_min"), ("rate_set", "rate_set_per_min"), ("ti", "ti_s"), ("interface", "interface"),
)  # fmt: skip


@dataclass(frozen=True, slots=True)
class FactChange:
    """A fact of the profile that reads otherwise; None where it was not recorded."""

    channel: str
    before: float | str | None
    after: float | str | None


@dataclass(frozen=True, slots=True)
class TargetChange:
    """Another SpO2 range in force, in %, that nobody prescribed: `at` is when a gas showed hypercapnic risk."""

    before: tuple[float, float]
    after: tuple[float, float]
    at: Instant


@dataclass(frozen=True, slots=True)
class Verdict:
    """A response that tells more than it did. `before` is its headline then; None where the change is newer."""

    response: ResponseFigure
    before: str | None


@dataclass(frozen=True, slots=True)
class SinceHandover:
    """What is otherwise than at `since`. `was_there` False: the episode was not known then, and all of it is new."""

    since: Instant
    was_there: bool
    settings: tuple[Step, ...] = ()
    support: tuple[str, ...] = ()
    """What became of support itself: "started", "ended", "off the mask", "on the mask again"."""
    gas_before: GasFigure | None = None
    gas_after: GasFigure | None = None
    """The newest arterial or capillary gas now, where it is another one or reads otherwise than then."""
    verdicts: tuple[Verdict, ...] = ()
    raised: tuple[FlagFigure, ...] = ()
    """Flags that are new since, also where they are no longer met by now."""
    gone: tuple[FlagFigure, ...] = ()
    """Flags that were open then and are not now, as they stand now."""
    done: tuple[DueFigure, ...] = ()
    facts: tuple[FactChange, ...] = ()
    target: TargetChange | None = None
    """The SpO2 range, where it changed without a prescription; a prescribed one is among the facts."""

    @property
    def is_nothing(self) -> bool:
        """Whether all reads as it did."""
        told = (self.settings, self.support, self.verdicts, self.raised, self.gone, self.done, self.facts)
        return self.was_there and self.gas_after is None and self.target is None and not any(told)


def since_handover(then: EpisodeFigures | None, now: EpisodeFigures, since: Instant) -> SinceHandover:
    """Compare the figures that were handed over at `since` (None: the episode was not known then) with those now."""
    if then is None:
        return SinceHandover(since, False, target=_target(None, now))
    before, after = _newest(then.gases), _newest(now.gases)
    other = after is not None and not _same_gas(before, after)
    return SinceHandover(
        since, True, _settings(then.support, now.support), _support(then.support, now.support),
        before if other else None, after if other else None, tuple(_verdicts(then.responses, now.responses)),
        _raised(then.flags, now.flags, since), tuple(_gone(then.flags, now.flags)),
        tuple(d for d in now.due if d.state == "done" and d.done_at is not None and d.done_at > since),
        tuple(_facts(then, now)), _target(then, now),
    )  # fmt: skip


def _settings(then: SupportFigure, now: SupportFigure) -> tuple[Step, ...]:
    """Settings in force that differ, what was recorded for the first time included."""
    if now.ended_at is not None:
        return ()
    at = now.last_change_at if now.last_change_at is not None else 0
    pairs = ((channel, getattr(then, name), getattr(now, name)) for channel, name in _SETTINGS)
    return tuple(Step(at, _channel(c, now), old, new) for c, old, new in pairs if old != new)


def _channel(channel: str, now: SupportFigure) -> str:
    return "cpap" if channel == "epap" and now.ipap_cmH2O is None else channel


def _support(then: SupportFigure, now: SupportFigure) -> tuple[str, ...]:
    found = []
    if then.since is None and now.since is not None:
        found.append("started")
    if then.ended_at is None and now.ended_at is not None:
        found.append("ended")
    elif (then.break_since is None) != (now.break_since is None):
        found.append("off the mask" if now.break_since is not None else "on the mask again")
    return tuple(found)


def _newest(gases: Iterable[GasFigure]) -> GasFigure | None:
    return next((g for g in reversed(tuple(gases)) if g.site != "venous"), None)


def _same_gas(one: GasFigure | None, other: GasFigure) -> bool:
    """Whether both are one sample and read alike: a correction makes another reading of it."""
    if one is None:
        return False
    return (one.at, one.ph, one.paco2_mmHg, one.pao2_mmHg, one.state) == (
        other.at, other.ph, other.paco2_mmHg, other.pao2_mmHg, other.state,
    )  # fmt: skip


def _verdicts(then: Iterable[ResponseFigure], now: Iterable[ResponseFigure]) -> Iterable[Verdict]:
    """Changes whose headline is another one than then, or that are judged for the first time."""
    said = {r.anchor_at: (r.headline, r.headline_gas_at, r.gain_lost) for r in then}
    for r in now:
        old = said.get(r.anchor_at)
        if r.headline in _WAITING and (old is None or old[0] in _WAITING):
            continue
        if old != (r.headline, r.headline_gas_at, r.gain_lost):
            yield Verdict(r, old[0] if old is not None else None)


def _raised(then: tuple[FlagFigure, ...], now: tuple[FlagFigure, ...], since: Instant) -> tuple[FlagFigure, ...]:
    """New ones: begun since, or open now under a marker of which nothing was known then."""
    known = {f.marker for f in then}
    return tuple(f for f in now if f.since > since or (f.state in OPEN and f.marker not in known))


def _gone(then: Iterable[FlagFigure], now: tuple[FlagFigure, ...]) -> Iterable[FlagFigure]:
    """Those open then and not now, as they ended; one that a correction took away stands as it did."""
    still = {f.marker for f in now if f.state in OPEN}
    told: set[str] = set()
    for flag in then:
        if flag.state not in OPEN or flag.marker in still or flag.marker in told:
            continue
        told.add(flag.marker)
        yield max((f for f in now if f.marker == flag.marker), key=lambda f: (f.flag_id == flag.flag_id, f.since),
                  default=flag)  # fmt: skip


def _target(then: EpisodeFigures | None, now: EpisodeFigures) -> TargetChange | None:
    """The range that a gas changed since; None where a person prescribed the one in force. Of an episode that was not
    known then, a change after its support had begun: before that nobody kept the range."""
    new = now.now
    after, since = _range(now), new.spo2_target_since
    before = _range(then) if then is not None else new.spo2_target_before
    if since is None or not new.spo2_target_by_gas or before is None or after is None or before == after:
        return None
    if then is None and (now.support.since is None or since <= now.support.since):
        return None
    return TargetChange(before, after, since)


def _range(f: EpisodeFigures) -> tuple[float, float] | None:
    low, high = f.now.spo2_target_low, f.now.spo2_target_high
    return None if low is None or high is None else (low, high)


def _facts(then: EpisodeFigures, now: EpisodeFigures) -> Iterable[FactChange]:
    for channel in AGREED:
        old, new = then.profile.get(channel), now.profile.get(channel)
        if old != new:
            yield FactChange(channel, old, new)
