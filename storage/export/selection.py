"""Export of a selection as a log file (CSV): some episodes, some channels, a span; and the data dictionary beside it.

The rows are those of the log file, so that intake takes them again. A text that a spreadsheet would run as a
formula is written with an apostrophe before it.
"""

from __future__ import annotations

import csv
from collections.abc import Iterable, Iterator, Sequence
from dataclasses import dataclass
from pathlib import Path

from core.record.channels import CHANNELS, channel
from core.record.entries import Entry
from core.record.instant import Instant, iso
from core.record.knowledge import VALUE_ACTIONS, standing
from core.record.samples import DeviceSamples
from storage.apostrophe import guarded
from storage.export import data_dictionary
from storage.export.log_csv import HEADER, number_text, value_text
from storage.export.whole_file import whole_file
from storage.store import Store

LINE_END = "\r\n"
"""So that both CR and LF inside a text are quoted."""


@dataclass(frozen=True, slots=True)
class Selection:
    """What is wanted. Empty: every episode, every channel. The span has both its ends in it; None: open."""

    episodes: tuple[str, ...] = ()
    channels: frozenset[str] = frozenset()
    start: Instant | None = None
    end: Instant | None = None

    def wants(self, channel_key: str, at: Instant) -> bool:
        """Whether a value of a channel at a moment is wanted. Facts of the profile are, whenever they were logged,
        unless channels are named: without them the values of a span could not be read."""
        if self.channels and channel_key not in self.channels:
            return False
        if not self.channels and CHANNELS[channel_key].group.value == "profile":
            return True
        return (self.start is None or self.start <= at) and (self.end is None or at <= self.end)


def write_selection(store: Store, path: Path | str, selection: Selection, head: int | None = None) -> int:
    """Write what stands of a selection, as known at a sequence; how many rows. Whole or not at all.

    Raises:
        StoreError: `store.exists`, `store.export_failed`.
        RecordError: `channel.unknown`.
    """
    for key in selection.channels:
        channel(key)
    count = 0
    with whole_file(Path(path)) as file:
        writer = csv.writer(file, lineterminator=LINE_END)
        writer.writerow(HEADER)
        for episode, entries, samples in chosen(store, selection, head):
            for row in (*(_entry_row(e) for e in entries), *_sample_rows(episode, samples)):
                writer.writerow(row)
                count += 1
    return count


def chosen(
    store: Store, selection: Selection, head: int | None = None
) -> Iterator[tuple[str, list[Entry], list[DeviceSamples]]]:
    """What stands of a selection, episode by episode; samples cut to the span."""
    top = store.head() if head is None else head
    for key in selection.episodes or store.episode_keys(top):
        found = (s.entry for s in standing(store.entries(key, top)))
        entries = [e for e in found if e.episode == key and e.action in VALUE_ACTIONS and e.channel in CHANNELS
                   and selection.wants(e.channel, e.at)]  # fmt: skip
        samples = [b for b in store.samples(key, top) if not selection.channels or b.channel in selection.channels]
        yield key, entries, [_cut(b, selection) for b in samples]


def _cut(block: DeviceSamples, selection: Selection) -> DeviceSamples:
    keep = (block.t >= (selection.start if selection.start is not None else -(2**62))) & (
        block.t <= (selection.end if selection.end is not None else 2**62)
    )
    return DeviceSamples(block.episode, block.channel, block.source, block.t[keep], block.v[keep], block.decimals)


def _entry_row(e: Entry) -> tuple[str, ...]:
    value, unit = value_text(CHANNELS[e.channel], e)
    return (guarded(e.episode), iso(e.at), e.channel, value, unit, guarded(e.by), guarded(e.note),
            iso(e.recorded_at), e.id, e.zone)  # fmt: skip


def _sample_rows(episode: str, samples: Iterable[DeviceSamples]) -> Iterator[tuple[str, ...]]:
    for block in samples:
        unit = CHANNELS[block.channel].unit
        for t, v in zip(block.t.tolist(), block.v.tolist(), strict=True):
            yield (guarded(episode), iso(t), block.channel, number_text(v), unit, "device", "", "", "", "")


def write_dictionary(path: Path | str, channels: Sequence[str] = ()) -> int:
    """Write the data dictionary of channels (all, when none are named) as CSV; how many rows.

    Raises:
        StoreError: `store.exists`, `store.export_failed`.
    """
    rows = [r for r in data_dictionary.rows() if not channels or r["channel"] in channels]
    with whole_file(Path(path)) as file:
        writer = csv.DictWriter(file, data_dictionary.COLUMNS, lineterminator=LINE_END)
        writer.writeheader()
        writer.writerows({k: guarded(v) if not _is_number(v) else v for k, v in row.items()} for row in rows)
    return len(rows)


def _is_number(text: str) -> bool:
    try:
        float(text)
    except ValueError:
        return False
    return True
