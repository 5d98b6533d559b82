"""Anchors: the moments whose effect is judged. Start, changes of settings, another interface, end of a break.

Changes at most 20 min apart and 60 min in all are one titration: one anchor, its window counted from the last
step. A change undone within 10 min is no anchor. What a person sets during a break takes effect at its end.
"""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from math import isnan

import numpy as np

from core.judgement.policy import Policy
from core.judgement.policy_sections import ResponseRules
from core.judgement.response_shapes import Step
from core.judgement.setting_change import (
    CO2,
    OXYGEN,
    OXYGEN_CHANNELS,
    changed,
    effect_of_change,
    effects,
    number,
    oxygen_recorded,
    support_word,
)
from core.judgement.vitals_near import VitalsNear
from core.record.episode import Episode
from core.record.instant import MINUTE, Instant
from core.record.samples import Times
from core.record.settings import Settings, SettingsInForce
from core.record.support import Break, SupportTime

__all__ = ["Anchor", "effect_of_change", "find_anchors", "settings_moves"]

BREAK_STEP = "break_end"


@dataclass(frozen=True, slots=True)
class Anchor:
    """A moment whose effect is judged: `at` is the last step of its chain, `first_at` the first.

    `kind`: start, change, interface or break_end. `effects`: which of "co2" and "oxygen" it can act on; empty
    where it can do nothing, and then no gas counts for it. `running_before` marks a start that logging did
    not see: support ran already.
    """

    at: Instant
    first_at: Instant
    kind: str
    steps: tuple[Step, ...] = ()
    effects: tuple[str, ...] = ()
    running_before: bool = False

    @property
    def judges(self) -> bool:
        """Whether a gas can count for it."""
        return bool(self.effects)

    @property
    def oxygen_only(self) -> bool:
        """Only FiO2 or oxygen flow was changed."""
        return bool(self.steps) and all(s.channel in OXYGEN_CHANNELS for s in self.steps)


@dataclass(frozen=True, slots=True)
class Move:
    """All steps of one moment, with the settings on both sides. `first` are values recorded for the first time."""

    at: Instant
    kind: str
    steps: tuple[Step, ...]
    before: Settings
    after: Settings
    first: tuple[Step, ...] = ()


@dataclass
class _Chain:
    first_at: Instant
    at: Instant
    kind: str
    steps: list[Step] = field(default_factory=list)
    effects: set[str] = field(default_factory=set)
    interface_only: bool = True


def find_anchors(
    episode: Episode, settings: SettingsInForce, support: SupportTime, policy: Policy
) -> tuple[Anchor, ...]:
    """All anchors of an episode, by time (rules of judgement 1.3, 1.6, 1.7, 3.8)."""
    if support.start is None:
        return ()
    moves = _without_undone(settings_moves(episode, settings, support, policy.response), policy.response)
    vitals = VitalsNear(episode, policy)
    start = _start_anchor(episode, settings, support)
    chains: list[_Chain] = []
    if not start.running_before:
        chains.append(_Chain(start.at, start.at, "start", list(start.steps), set(start.effects)))
    for move in moves:
        acts = _acts(move, vitals)
        if not acts and not move.steps:
            _note_first(chains, move, policy.response)
        elif chains and _joins(chains[-1], move.at, policy.response):
            _extend(chains[-1], move, acts)
        else:
            chains.append(_opened(move, acts))
    found = [_anchor(c) for c in chains]
    return (start, *found) if start.running_before else tuple(found)


def _acts(move: Move, vitals: VitalsNear) -> tuple[str, ...]:
    if move.kind == BREAK_STEP:
        return (CO2, OXYGEN)
    needs_rate = any(s.channel == "rate_set" for s in move.steps)
    own = vitals.rate(move.at, 0, move.at) if needs_rate else None
    return effects(move.steps, move.before, move.after, own.value if own else None)


def _joins(chain: _Chain, at: Instant, rules: ResponseRules) -> bool:
    gap, span = at - chain.at, at - chain.first_at
    return gap <= rules.chain_gap_min.value * MINUTE and span <= rules.chain_span_min.value * MINUTE


def _note_first(chains: list[_Chain], move: Move, rules: ResponseRules) -> None:
    """Settings first written down soon after the start are the settings it started with."""
    if chains and chains[-1].kind == "start" and _joins(chains[-1], move.at, rules):
        chains[-1].steps.extend(move.first)


def _extend(chain: _Chain, move: Move, acts: tuple[str, ...]) -> None:
    chain.steps.extend((*move.first, *move.steps) if chain.kind == "start" else move.steps)
    if not acts:
        return
    if not chain.effects and chain.kind == "change":
        chain.first_at = move.at  # what did nothing cannot open a titration
    chain.at = move.at
    chain.effects |= set(acts)
    chain.interface_only &= _is_interface(move)


def _opened(move: Move, acts: tuple[str, ...]) -> _Chain:
    kind = BREAK_STEP if move.kind == BREAK_STEP else "change"
    return _Chain(move.at, move.at, kind, list(move.steps), set(acts), _is_interface(move))


def _is_interface(move: Move) -> bool:
    return all(s.channel == "interface" for s in move.steps)


def _anchor(chain: _Chain) -> Anchor:
    kind = "interface" if chain.kind == "change" and chain.interface_only else chain.kind
    acts = tuple(e for e in (CO2, OXYGEN) if e in chain.effects)
    return Anchor(chain.at, chain.first_at, kind, tuple(chain.steps), acts)


def _start_anchor(episode: Episode, settings: SettingsInForce, support: SupportTime) -> Anchor:
    start = support.start
    assert start is not None
    first_entry = episode.first_at
    running = not support.start_recorded or (first_entry is not None and start < first_entry)
    now = settings.at(start)
    return Anchor(start, start, "start", _first_recorded(start, None, now), (CO2, OXYGEN), running)


def _first_recorded(at: Instant, before: Settings | None, after: Settings) -> tuple[Step, ...]:
    """Settings that have a value now and had none before. Of pressures, only those of the kind in force."""

    def values(s: Settings | None) -> dict[str, float | str | None]:
        if s is None:
            return {}
        pressures = {"cpap": number(s.cpap)} if s.is_cpap else {"ipap": number(s.ipap), "epap": number(s.epap)}
        oxygen = {"fio2": number(s.fio2), "o2_flow": number(s.o2_flow)} if oxygen_recorded(s) else {}
        return {"mode": support_word(s), **pressures, **oxygen, "rate_set": number(s.rate_set),
                "ti": number(s.ti), "interface": s.interface}  # fmt: skip

    was = values(before)
    oxygen_known = before is not None and oxygen_recorded(before)
    return tuple(
        Step(at, channel, None, value)
        for channel, value in values(after).items()
        if value is not None and was.get(channel) is None
        and not (channel in OXYGEN_CHANNELS and oxygen_known)
    )  # fmt: skip


def settings_moves(
    episode: Episode, settings: SettingsInForce, support: SupportTime, rules: ResponseRules
) -> tuple[Move, ...]:
    """Every moment at which settings took effect on the patient after the start, undone ones included."""
    if support.start is None:
        return ()
    ends = {b.end: b for b in support.breaks if b.end is not None}
    moments = _effective_moments(settings, support, tuple(ends))
    states = _states(episode, settings, (support.start, *moments))
    moves: list[Move] = []
    for at, before, after in zip(moments, states[:-1], states[1:], strict=True):
        ended = ends.get(at)
        move = _move(at, before, after, ended if ended is not None and _is_long(ended, rules) else None)
        if move.steps or move.first:
            moves.append(move)
    return tuple(moves)


def _move(at: Instant, before: Settings, after: Settings, ended: Break | None) -> Move:
    steps = changed(at, before, after)
    first = _first_recorded(at, before, after) if _known(after) > _known(before) else ()
    kind = "change"
    if ended is not None:
        kind, steps = BREAK_STEP, (Step(at, BREAK_STEP, ended.minutes(at), None), *steps)
    return Move(at, kind, steps, before, after, _not_a_step(first, steps))


def _known(s: Settings) -> int:
    """How many settings are known; a first recording makes them more (oxygen counts once)."""
    numbers = (s.ipap, s.epap, s.cpap, s.rate_set, s.ti)
    return sum(v == v for v in numbers) + oxygen_recorded(s) + (s.mode is not None) + (s.interface is not None)


def _not_a_step(first: tuple[Step, ...], steps: tuple[Step, ...]) -> tuple[Step, ...]:
    if not first:
        return ()
    named = {s.channel for s in steps}
    if "pressure_support" in named:
        named |= {"ipap", "epap", "cpap"}
    return tuple(s for s in first if s.channel not in named)


def _is_long(ended: Break, rules: ResponseRules) -> bool:
    assert ended.end is not None
    return ended.minutes(ended.end) >= rules.break_is_anchor_min.value


def _effective_moments(
    settings: SettingsInForce, support: SupportTime, break_ends: tuple[Instant, ...]
) -> tuple[Instant, ...]:
    start, end = support.start, support.end
    assert start is not None
    logged = np.array(sorted({*settings.moments, *break_ends}), np.int64)
    keep = logged > start
    if end is not None:
        keep &= logged < end
    for b in support.breaks:
        keep &= ~((logged >= b.start) & (logged < (b.end if b.end is not None else np.iinfo(np.int64).max)))
    return tuple(int(t) for t in logged[keep])


def _states(episode: Episode, settings: SettingsInForce, moments: tuple[Instant, ...]) -> tuple[Settings, ...]:
    """The settings in force at each moment; one search per channel, since figures are due in milliseconds."""
    times = np.array(moments, np.int64)
    channels = ("ipap", "epap", "cpap", "fio2", "o2_flow", "rate_set", "ti")
    numbers = zip(*(settings.steps(c).on(times).tolist() for c in channels), strict=True)
    modes, interfaces = (_words_on(episode, c, times) for c in ("mode", "interface"))
    return tuple(
        Settings(mode, ipap, epap, cpap, fio2, flow, rate, ti, interface)
        for mode, (ipap, epap, cpap, fio2, flow, rate, ti), interface in zip(modes, numbers, interfaces, strict=True)
    )


def _words_on(episode: Episode, channel: str, times: Times) -> list[str | None]:
    logged = episode.text(channel)
    index = np.searchsorted(logged.t, times, side="right").tolist()
    return [logged.v[i - 1] if i else None for i in index]


def _without_undone(moves: tuple[Move, ...], rules: ResponseRules) -> tuple[Move, ...]:
    """Take out steps that were undone at once. FiO2 and flow are one oxygen: they go together."""
    limit = rules.undone_within_min.value * MINUTE
    kept: dict[str, list[tuple[int, object, object]]] = {}
    dropped: set[tuple[int, str]] = set()
    for i, move in enumerate(moves):
        for group, (was, now) in _groups(move).items():
            row = kept.setdefault(group, [])
            undone = next((k for k, (j, before, _) in enumerate(row)
                           if before == now and move.at - moves[j].at <= limit), None)  # fmt: skip
            if undone is None:
                row.append((i, was, now))
            else:
                dropped |= {(j, group) for j, _, _ in row[undone:]} | {(i, group)}
                del row[undone:]
    return tuple(_cleared(m, {g for j, g in dropped if j == i}) for i, m in enumerate(moves))


def _group(channel: str) -> str:
    if channel in OXYGEN_CHANNELS:
        return OXYGEN
    return "support" if channel in ("mode", "pressure_support") else channel


def _groups(move: Move) -> dict[str, tuple[object, object]]:
    """What each step's group was before and after, in a form that compares (NaN is not equal to itself)."""

    def state(s: Settings, group: str, step: Step, side: str) -> object:
        if group == OXYGEN:
            return number(s.fio2), None if not isnan(s.fio2) else number(s.o2_flow)
        if group == "support":
            return support_word(s), number(s.pressure_support)
        return getattr(step, side)

    return {
        g: (state(move.before, g, s, "before"), state(move.after, g, s, "after"))
        for s in move.steps
        if s.channel != BREAK_STEP
        for g in (_group(s.channel),)
    }


def _cleared(move: Move, groups: set[str]) -> Move:
    if not groups:
        return move
    return replace(move, steps=tuple(s for s in move.steps if _group(s.channel) not in groups))
