"""Correcting what a device wrote: a span of samples does not count, or its clock was off. Nothing is overwritten: an
entry says so, for whom and why, and taking it back brings the samples back."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from app.operations.outcome import Outcome
from app.operations.recording import Recorded, append
from core.record.entries import Action, NewEntry
from core.record.instant import MINUTE, Instant
from core.record.local_time import LEAD
from core.record.message import refuse

if TYPE_CHECKING:
    from storage.store import Store

MOST_MINUTES = 2 * 24 * 60
"""A clock that is off by more than two days is another patient's device, or another year."""


@dataclass(frozen=True, slots=True)
class DeviceChannel:
    """What a device wrote of one channel and still counts: how many samples, the first and the last."""

    channel: str
    count: int
    first: Instant
    last: Instant


@dataclass(frozen=True, slots=True)
class SpanInForce:
    """A span that was left out (`minutes` 0) or moved. `ids` are its entries, one for each channel."""

    channels: tuple[str, ...]
    start: Instant
    end: Instant
    minutes: float
    reason: str
    by: str
    ids: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class DeviceRecord:
    """The device samples of an episode, and what was said of them."""

    channels: tuple[DeviceChannel, ...]
    spans: tuple[SpanInForce, ...]


@dataclass(frozen=True, slots=True)
class SpanRequest:
    """Samples of channels from `start` to `end`, both in it. `minutes` 0: they do not count; else they are moved by
    so many, later where positive."""

    episode: str
    channels: tuple[str, ...]
    start: Instant
    end: Instant
    reason: str
    minutes: float = 0.0


def listed(store: Store, who: str, now: Instant, request: str) -> Outcome[DeviceRecord]:
    """What devices wrote for an episode, and the spans that were left out or moved, the newest first."""
    blocks = [b for b in store.samples(request) if b.t.size]
    channels = tuple(DeviceChannel(b.channel, int(b.t.size), int(b.t[0]), int(b.t[-1])) for b in blocks)
    return Outcome(DeviceRecord(channels, _spans(store, request)), store.head())


def counted(store: Store, who: str, now: Instant, request: SpanRequest) -> Outcome[int]:
    """How many samples a request is about."""
    inside = (
        int(((b.t >= request.start) & (b.t <= request.end)).sum())
        for b in store.samples(request.episode) if b.channel in request.channels
    )  # fmt: skip
    return Outcome(sum(inside), store.head())


def record(store: Store, who: str, now: Instant, request: SpanRequest) -> Outcome[Recorded]:
    """Say that the samples of a span do not count, or that they were taken at another time.

    Raises:
        RecordError: `correction.no_reason`, `entry.span_backwards`, `device.*`.
    """
    if not request.reason.strip():
        raise refuse("correction.no_reason", accepted="a few words")
    if not request.channels:
        raise refuse("device.no_channel", accepted="at least one channel")
    if request.end < request.start:
        raise refuse("entry.span_backwards", accepted="an end at or after the start")
    if abs(request.minutes) > MOST_MINUTES:
        raise refuse("device.moved_too_far", value=request.minutes, accepted=MOST_MINUTES)
    if not counted(store, who, now, request).value:
        raise refuse("device.nothing_there", accepted="a span in which the device wrote something")
    shift = round(request.minutes * MINUTE)
    last = max(int(b.t[b.t <= request.end][-1]) for b in store.samples(request.episode)
               if b.channel in request.channels and (b.t <= request.end).any())  # fmt: skip
    if last + shift > now + LEAD:
        raise refuse("device.into_the_future", accepted="times that have been")
    entries = tuple(_entry(request, channel, shift, who) for channel in request.channels)
    operation = "samples moved" if shift else "samples left out"
    return append(store, request.episode, entries, who, operation, now)


def _entry(request: SpanRequest, channel: str, shift: int, who: str) -> NewEntry:
    from core.record.instant import iso

    if not shift:
        return NewEntry(request.episode, channel, request.start, float(request.end), by=who, action=Action.MASK,
                        reason=request.reason.strip())  # fmt: skip
    return NewEntry(request.episode, channel, request.start, float(shift), iso(request.end), by=who,
                    action=Action.SHIFT, reason=request.reason.strip())  # fmt: skip


def _spans(store: Store, episode: str) -> tuple[SpanInForce, ...]:
    """Spans in force that a person set; those of a withdrawn file go with the file."""
    from storage.reading_ledger import span_of, spans_in_force

    groups: dict[tuple[Instant, Instant, float, str, str], list[tuple[str, str]]] = {}
    for e in spans_in_force(store.entries(episode)):
        if not e.source:
            minutes = 0.0 if e.action is Action.MASK else float(e.number or 0) / MINUTE
            key = (e.at, span_of(e).end, minutes, e.reason, e.by)
            groups.setdefault(key, []).append((e.channel, e.id))
    made = [
        SpanInForce(tuple(c for c, _ in own), start, end, minutes, reason, by, tuple(i for _, i in own))
        for (start, end, minutes, reason, by), own in groups.items()
    ]
    return tuple(reversed(made))
