"""De-identified export: no labels, no free text, no names, no dates; and a statement of what remains.

What is done
- Episodes are numbered in an order drawn by chance, and their own keys are not written.
- Every time of an episode, profile times too, is moved by one offset drawn by chance for it: it begins at a random
  moment of ten fixed years. The offset is kept nowhere. Lengths of time inside an episode are true.
- Texts that people typed are left out whole: labels, places, plans, remarks, notes, names, identifiers, the words of
  an event (that it happened stays), who entered it, the text as typed, and choices outside the registry's list.
- Ages of 90 and more are written as 90.

What remains can still single a person out by its pattern (an unusual course, a rare combination of age, size and
cause): de-identified is not anonymous. `Statement` says what was left out and what remains.
"""

from __future__ import annotations

import csv
import secrets
from collections import Counter
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Final

from core.record.channels import CHANNELS, Channel, Kind
from core.record.entries import Entry
from core.record.instant import DAY, Instant, iso, parse
from core.record.samples import DeviceSamples
from storage.export.log_csv import number_text
from storage.export.selection import LINE_END, Selection, chosen
from storage.export.whole_file import whole_file
from storage.store import Store

HEADER: Final = ("episode", "at", "channel", "value", "unit")
OLDEST: Final = 90.0
REMARK: Final = "remark beside a value"
_SECOND: Final = 1_000_000
_FROM: Final = parse("2001-01-01T00:00:00+00:00")
_DAYS: Final = 3652


@dataclass(frozen=True, slots=True)
class Statement:
    """What was written and what was left out. `remains` counts rows by channel, `removed` values by why."""

    episodes: int
    rows: int
    remains: Mapping[str, int]
    removed: Mapping[str, int]


def write_deidentified(store: Store, path: Path | str, selection: Selection, head: int | None = None) -> Statement:
    """Write what stands of a selection, de-identified, as known at a sequence. Whole or not at all.

    Raises:
        StoreError: `store.exists`, `store.export_failed`.
    """
    found = [(entries, samples) for _, entries, samples in chosen(store, selection, head) if entries or samples]
    secrets.SystemRandom().shuffle(found)
    remains: Counter[str] = Counter()
    removed: Counter[str] = Counter()
    with whole_file(Path(path)) as file:
        writer = csv.writer(file, lineterminator=LINE_END)
        writer.writerow(HEADER)
        for number, (entries, samples) in enumerate(found, 1):
            for row in _rows(f"P{number:04d}", entries, samples, removed):
                writer.writerow(row)
                remains[row[2]] += 1
    return Statement(len(found), sum(remains.values()), dict(sorted(remains.items())), dict(sorted(removed.items())))


def _rows(
    name: str, entries: list[Entry], samples: list[DeviceSamples], removed: Counter[str]
) -> Iterator[tuple[str, ...]]:
    by = _offset(entries, samples)
    kept: list[tuple[Instant, tuple[str, ...]]] = []
    for e in entries:
        if e.note:
            removed[REMARK] += 1
        value = _value(CHANNELS[e.channel], e, by, removed)
        if value is not None:
            at = _shifted(e.at, by)
            kept.append((at, (name, iso(at), e.channel, *value)))
    yield from (row for _, row in sorted(kept))
    for block in samples:
        unit = CHANNELS[block.channel].unit
        for t, v in zip(block.t.tolist(), block.v.tolist(), strict=True):
            yield name, iso(_shifted(t, by)), block.channel, number_text(v), unit


def _offset(entries: list[Entry], samples: list[DeviceSamples]) -> int:
    """What moves the earliest moment of an episode to a random second of the ten fixed years."""
    moments = [e.at for e in entries] + [int(b.t[0]) for b in samples if b.t.size]
    moments += [int(e.number) for e in entries if CHANNELS[e.channel].kind is Kind.INSTANT and e.number is not None]
    target = _FROM + secrets.randbelow(_DAYS * DAY // _SECOND) * _SECOND
    return target - (min(moments, default=0) // _SECOND) * _SECOND


def _shifted(at: Instant, by: int) -> Instant:
    return at + by


def _value(channel: Channel, e: Entry, by: int, removed: Counter[str]) -> tuple[str, str] | None:
    """The value and its unit as they may be told, or None where nothing of it may."""
    match channel.kind:
        case Kind.TEXT:
            removed[channel.key] += 1
            return None
        case Kind.MARK:
            if e.words:
                removed[f"{channel.key} (words)"] += 1
            return "", ""
        case Kind.CHOICE:
            if e.words in channel.choices:
                return e.words or "", ""
            removed[f"{channel.key} (own words)"] += 1
            return None
        case Kind.INSTANT:
            return iso(_shifted(int(e.number or 0), by)), ""
    number = e.number if e.number is not None else float("nan")
    if channel.key == "age" and number >= OLDEST:
        removed["age (90 and more)"] += 1
        number = OLDEST
    return number_text(number), channel.unit
