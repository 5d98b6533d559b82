"""Rotating backups: hourly for a shift, daily for two weeks, monthly for a year; each opened before it counts."""

from __future__ import annotations

import re
from collections.abc import Iterable
from pathlib import Path
from typing import TYPE_CHECKING

from core.record.instant import DAY, HOUR, Instant, parse, to_datetime
from core.record.message import RecordError
from storage.keys import envelope_path

if TYPE_CHECKING:
    from storage.store import Store

EVERY = HOUR
SHIFT, WEEKS, YEAR = 12 * HOUR, 14 * DAY, 366 * DAY
_STAMP = re.compile(r"(\d{4})(\d{2})(\d{2})T(\d{2})(\d{2})(\d{2})Z")


def kept(taken: Iterable[Instant], now: Instant) -> set[Instant]:
    """Which backups to keep: the newest of each hour, day or month by their age, and always the newest of all.

    Days and months are those of UTC. A backup dated after `now` (a clock stepped back) is kept.

    >>> sorted(kept([0, 10, HOUR], 2 * HOUR)) == [10, HOUR]
    True
    """
    newest: dict[tuple[str, object], Instant] = {}
    for at in sorted(taken):
        span = _span(at, now)
        if span is not None:
            newest[span] = at
    last = max(taken, default=None)
    return set(newest.values()) | ({last} if last is not None else set())


def _span(at: Instant, now: Instant) -> tuple[str, object] | None:
    age, when = now - at, to_datetime(at)
    if age < 0:
        return "ahead", at
    if age <= SHIFT:
        return "hour", at // HOUR
    if age <= WEEKS:
        return "day", when.date()
    return ("month", (when.year, when.month)) if age <= YEAR else None


def backups_in(folder: Path, store: Path) -> dict[Instant, Path]:
    """The rotating backups of a store in a folder, by the moment in their names."""
    found: dict[Instant, Path] = {}
    for path in folder.glob("*.luff"):
        at = taken_at(path)
        if at is not None and path.name.rpartition(".luff")[0].rpartition(".")[0] == store.stem:
            found[at] = path
    return found


def taken_at(path: Path) -> Instant | None:
    """When a rotating backup was taken, by its name; None for any other file.

    >>> taken_at(Path("ward.20260328T053000Z.luff")) == parse("2026-03-28T05:30:00Z")
    True
    """
    match = _STAMP.fullmatch(path.name.removesuffix(".luff").rpartition(".")[2])
    if match is None or path.suffix != ".luff":
        return None
    y, mo, d, h, mi, s = match.groups()
    try:
        return parse(f"{y}-{mo}-{d}T{h}:{mi}:{s}Z")
    except RecordError:
        return None  # digits that are no moment: somebody else's file


def is_due(folder: Path, store: Path, now: Instant) -> bool:
    """Whether the newest rotating backup is an hour old, or there is none, or the clock stepped back behind it."""
    newest = max(backups_in(folder, store), default=None)
    return newest is None or not 0 <= now - newest < EVERY


def rotate(store: Store, folder: Path, now: Instant, *, expire: bool = True) -> Path:
    """Take a backup now and remove those whose time is over (`expire`); where the new one lies.

    Nothing is removed before the new one has been opened and is on the disk.

    Raises:
        StoreError: as `Store.backup`.
    """
    stamp = f"{to_datetime(now):%Y%m%dT%H%M%SZ}"
    target = folder / f"{store.path.stem}.{stamp}.luff"
    store.backup(target)
    if not expire:
        return target
    found = backups_in(folder, store.path)
    gone = [found[at] for at in found.keys() - kept(found, now)]
    beside = backups_in(store.path.parent, store.path)  # made before a migration: kept a year too
    gone += [path for at, path in beside.items() if now - at > YEAR and path.parent != folder]
    for path in gone:
        path.unlink(missing_ok=True)
        envelope_path(path).unlink(missing_ok=True)
    return target
