"""Export of what stands as the log file (CSV). Taken in again, it gives the same current values.

A text that a spreadsheet would run as a formula is written with an apostrophe before it; the intake takes that
apostrophe away again.
"""

from __future__ import annotations

import csv
from collections.abc import Iterable, Iterator, Sequence
from decimal import Decimal
from math import isnan
from pathlib import Path
from typing import TextIO

from core.record.channels import CHANNELS, Channel, Kind
from core.record.entries import Entry
from core.record.instant import iso
from core.record.knowledge import VALUE_ACTIONS, standing
from core.record.message import RecordError
from core.record.reading import read_value
from core.record.samples import DeviceSamples
from storage.apostrophe import guarded
from storage.export.whole_file import whole_file
from storage.store import Store

HEADER = ("episode", "at", "channel", "value", "unit", "by", "note", "recorded_at", "id", "zone")


def write_log_csv(
    store: Store, path: Path | str, *, episodes: Sequence[str] | None = None, head: int | None = None
) -> int:
    """Write the current values of episodes (all, when none are named) as known at a sequence; how many rows.

    The file appears whole or not at all; an existing one is not overwritten.

    Raises:
        StoreError: `store.exists`, `store.export_failed`.
    """
    top = store.head() if head is None else head
    with whole_file(Path(path), newline="") as file:  # the CSV writer ends its lines itself
        return _write(store, file, store.episode_keys(top) if episodes is None else episodes, top)


def _write(store: Store, file: TextIO, episodes: Iterable[str], head: int) -> int:
    writer = csv.writer(file, lineterminator="\r\n")  # so that both CR and LF inside a text are quoted
    writer.writerow(HEADER)
    count = 0
    for key in episodes:
        for row in (*_entry_rows(key, store.entries(key, head)), *_sample_rows(store.samples(key, head))):
            writer.writerow(row)
            count += 1
    return count


def _entry_rows(episode: str, entries: Iterable[Entry]) -> Iterator[tuple[str, ...]]:
    for s in standing(entries):
        e = s.entry
        if e.episode == episode and e.action in VALUE_ACTIONS and e.channel in CHANNELS:
            value, unit = value_text(CHANNELS[e.channel], e)
            yield (
                guarded(e.episode), iso(e.at), e.channel, value, unit, guarded(e.by), guarded(e.note),
                iso(e.recorded_at), e.id, e.zone,
            )  # fmt: skip


def value_text(channel: Channel, e: Entry) -> tuple[str, str]:
    """A value and its unit as typed where that reads back to the same value, else in the canonical unit."""
    if channel.kind in (Kind.CHOICE, Kind.TEXT, Kind.MARK):
        return guarded(e.words or ""), ""
    if e.raw and _reads_back(channel, e):
        return e.raw, e.raw_unit
    if channel.kind is Kind.INSTANT:
        return iso(int(e.number or 0)), ""
    return number_text(e.number or 0.0), channel.unit


def _reads_back(channel: Channel, e: Entry) -> bool:
    try:
        return read_value(channel, e.raw, e.raw_unit).number == e.number
    except RecordError:
        return False


def number_text(number: float) -> str:
    """The shortest plain decimal that reads back to the same number; empty for NaN.

    >>> number_text(1e-7), number_text(480.0), number_text(float("nan"))
    ('0.0000001', '480', '')
    """
    if isnan(number):
        return ""
    return format(Decimal(repr(number)), "f").removesuffix(".0")


def _sample_rows(samples: Iterable[DeviceSamples]) -> Iterator[tuple[str, ...]]:
    for block in samples:
        unit, episode = CHANNELS[block.channel].unit, guarded(block.episode)
        texts: dict[float, str] = {}
        for t, v in zip(block.t.tolist(), block.v.tolist(), strict=True):
            if v not in texts:
                texts[v] = number_text(v)
            yield (episode, iso(t), block.channel, texts[v], unit, "device", "", "", "", "")
