"""The episode: one patient's record as arrays, built from what stands, cut at a moment by `until`."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace
from functools import cached_property

import numpy as np
from numpy.typing import NDArray

from core.record.channels import CHANNELS, Group, Kind
from core.record.entries import Entry
from core.record.gas_sample import GasSample, gas_samples
from core.record.instant import Instant
from core.record.knowledge import VALUE_ACTIONS, Standing
from core.record.samples import DeviceSamples, Flags, Times, Values

DEVICE = -1
"""The origin of a sample that a machine wrote: it has no entry."""


@dataclass(frozen=True)
class Series:
    """One numeric channel over time, in order of time. All arrays have shape (n,).

    `v` is in the canonical unit. `spot` is True where a person logged the value, False where a machine did.
    `doubt` marks values outside soft limits that nobody confirmed. `origin` is an index into
    `Episode.standing`, or `DEVICE`.
    """

    t: Times
    v: Values
    spot: Flags
    doubt: Flags
    origin: NDArray[np.int32]

    def cut(self, keep: slice | Flags) -> Series:
        """The part of the series that `keep` selects."""
        kept = keep if isinstance(keep, slice) else np.flatnonzero(keep)  # five arrays are picked faster by place
        return Series(self.t[kept], self.v[kept], self.spot[kept], self.doubt[kept], self.origin[kept])

    def until(self, at: Instant) -> Series:
        """What had happened by `at`, that moment included."""
        return self.cut(slice(0, int(self.t.searchsorted(at, side="right"))))

    def since(self, start: Instant) -> Series:
        """From `start` on, that moment included."""
        return self.cut(slice(int(self.t.searchsorted(start)), None))

    def between(self, start: Instant, end: Instant) -> Series:
        """From `start` to `end`, both included."""
        i, j = self.t.searchsorted([start, end + 1])
        return self.cut(slice(int(i), int(j)))

    def last_at_or_before(self, at: Instant) -> int:
        """The index of the newest value at or before `at`; -1 when there is none."""
        return int(self.t.searchsorted(at, side="right")) - 1

    @cached_property
    def spots(self) -> Series:
        """Only what people logged."""
        return self if self.spot.all() else self.cut(self.spot)

    @cached_property
    def machine(self) -> Series:
        """Only what a machine wrote."""
        return self.cut(~self.spot) if self.spot.any() else self

    def __len__(self) -> int:
        return int(self.t.size)


NO_SERIES = Series(
    np.empty(0, np.int64), np.empty(0), np.empty(0, np.bool_), np.empty(0, np.bool_), np.empty(0, np.int32)
)


@dataclass(frozen=True, slots=True)
class Words:
    """A channel of choices, texts or events over time: instants, texts ("" for a bare event), origins."""

    t: Times
    v: tuple[str, ...]
    origin: NDArray[np.int32]

    def until(self, at: Instant) -> Words:
        """What had happened by `at`, that moment included."""
        n = self.count_until(at)
        return Words(self.t[:n], self.v[:n], self.origin[:n])

    def count_until(self, at: Instant) -> int:
        """How many had happened by `at`, that moment included."""
        return int(self.t.searchsorted(at, side="right"))

    def at(self, at: Instant) -> str | None:
        """The newest text at or before `at`."""
        n = self.count_until(at)
        return self.v[n - 1] if n else None

    def __len__(self) -> int:
        return len(self.v)


NO_WORDS = Words(np.empty(0, np.int64), (), np.empty(0, np.int32))


@dataclass(frozen=True)
class Episode:
    """One episode of support. `standing` are the value entries that count, by time; `transitions` are the
    flag and due entries. Numbers are in `series`, choices, texts and events in `words`."""

    key: str
    standing: tuple[Standing, ...]
    series: Mapping[str, Series]
    words: Mapping[str, Words]
    gases: tuple[GasSample, ...]
    transitions: tuple[Entry, ...] = ()
    zone: str = "UTC"

    def number(self, channel: str) -> Series:
        """The series of a numeric or instant channel; empty when nothing was logged."""
        return self.series.get(channel, NO_SERIES)

    def text(self, channel: str) -> Words:
        """The texts of a choice, text or event channel; empty when nothing was logged."""
        return self.words.get(channel, NO_WORDS)

    def latest(self, channel: str) -> float | None:
        """The newest number of a channel, e.g. a profile fact, or None."""
        series = self.number(channel)
        return float(series.v[-1]) if len(series) else None

    def latest_text(self, channel: str) -> str | None:
        """The newest text of a channel, or None."""
        words = self.text(channel)
        return words.v[-1] if len(words) else None

    def place(self, origin: int) -> int:
        """The place of an entry among those of its instant, in order of recording; a machine's samples come first."""
        return self.standing[origin].place if origin != DEVICE else 0

    def said_later(self, origin: int, before: int) -> bool:
        """Whether an entry was recorded after another and apart from it, not in one line or file with it."""
        if DEVICE in (origin, before):
            return False
        this, other = self.standing[origin], self.standing[before]
        return this.place > other.place and this.placed_at > other.placed_at

    @property
    def label(self) -> str:
        """What the ward calls this episode; its key where no label was given."""
        return self.latest_text("label") or self.key

    @property
    def is_empty(self) -> bool:
        """Whether nothing stands of it: begun by mistake, or all of its files withdrawn."""
        return not self.standing and not any(len(s) for s in self.series.values())

    @cached_property
    def first_at(self) -> Instant | None:
        """The first moment that anything but a profile fact was logged for; None for an empty record."""
        moments = [int(s.t[0]) for k, s in self.series.items() if len(s) and not _is_profile(k)]
        moments += [int(w.t[0]) for k, w in self.words.items() if len(w) and not _is_profile(k)]
        return min(moments) if moments else None

    def until(self, as_of: Instant) -> Episode:
        """The episode as of a moment: later happenings do not exist in it."""
        series = {k: cut for k, s in self.series.items() if len(cut := s.until(as_of))}
        words = {k: part for k, w in self.words.items() if len(part := w.until(as_of))}
        gases = tuple(g for g in self.gases if g.at <= as_of)
        transitions = tuple(e for e in self.transitions if e.at <= as_of)
        return replace(self, series=series, words=words, gases=gases, transitions=transitions)


def _is_profile(key: str) -> bool:
    return CHANNELS[key].group is Group.PROFILE


def build_episode(key: str, standing: Iterable[Standing], samples: Iterable[DeviceSamples] = ()) -> Episode:
    """Build the arrays of one episode from what stands and from device samples.

    Entries of other episodes are ignored. Values of one channel at one moment: the later sequence comes last
    and so is the one in force.
    """
    own = [s for s in standing if s.entry.episode == key]
    values = tuple(s for s in own if s.entry.action in VALUE_ACTIONS and s.entry.channel in CHANNELS)
    values = tuple(sorted(values, key=lambda s: (s.entry.at, s.entry.seq)))
    transitions = tuple(s.entry for s in own if s.entry.action not in VALUE_ACTIONS)
    numbers: dict[str, list[int]] = {}
    words: dict[str, list[int]] = {}
    for index, s in enumerate(values):
        kind = CHANNELS[s.entry.channel].kind
        room = numbers if kind in (Kind.NUMBER, Kind.INSTANT) else words
        room.setdefault(s.entry.channel, []).append(index)
    series = {k: _spot_series(values, indices) for k, indices in numbers.items()}
    for block in samples:
        if block.episode == key and block.t.size:
            series[block.channel] = _with_device(series.get(block.channel, NO_SERIES), block)
    texts = {k: _word_series(values, indices) for k, indices in words.items()}
    zone = values[-1].entry.zone if values else "UTC"
    return Episode(key, values, series, texts, gas_samples(values), transitions, zone)


def _spot_series(values: tuple[Standing, ...], indices: list[int]) -> Series:
    entries = [values[i].entry for i in indices]
    n = len(entries)
    return Series(
        np.fromiter((e.at for e in entries), np.int64, n),
        np.fromiter((np.nan if e.number is None else e.number for e in entries), np.float64, n),
        np.ones(n, np.bool_),
        np.fromiter((bool(e.doubt) for e in entries), np.bool_, n),
        np.asarray(indices, np.int32),
    )


def _word_series(values: tuple[Standing, ...], indices: list[int]) -> Words:
    entries = [values[i].entry for i in indices]
    times = np.fromiter((e.at for e in entries), np.int64, len(entries))
    return Words(times, tuple(e.words or "" for e in entries), np.asarray(indices, np.int32))


def _with_device(series: Series, block: DeviceSamples) -> Series:
    n = block.t.size
    soft = CHANNELS[block.channel].soft
    doubt = np.zeros(n, np.bool_) if soft is None else (block.v < soft[0]) | (block.v > soft[1])
    t = np.concatenate((series.t, block.t))
    order = np.argsort(t, kind="stable")
    return Series(
        t[order],
        np.concatenate((series.v, block.v))[order],
        np.concatenate((series.spot, np.zeros(n, np.bool_)))[order],
        np.concatenate((series.doubt, doubt))[order],
        np.concatenate((series.origin, np.full(n, DEVICE, np.int32)))[order],
    )
