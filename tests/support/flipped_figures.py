"""Figures of a plain store of which one bit was flipped: the same as before, refused, or, never, others."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from pathlib import Path

import numpy as np

from app.operations import episode_shelf, figures
from core.figures.json_form import to_json
from core.judgement.policy import shipped_policy, shipped_text
from core.record.entries import Action, NewEntry
from core.record.instant import HOUR, MINUTE, parse
from core.record.message import RecordError
from core.record.samples import DeviceSamples
from storage.engine import raw_connection
from storage.errors import StoreError, store_error
from storage.store import Store
from tests.support.flips import flipped_at, put_back

NOW = parse("2026-03-28T02:00:00+00:00")
LATER = NOW + 3 * HOUR
PAGE = 4096
WITHIN = (
    ("mode", -90, None, "BPAP-ST"), ("ipap", -90, 16.0, None), ("epap", -90, 6.0, None), ("fio2", -90, 0.35, None),
    ("ph", -95, 7.24, None), ("paco2", -95, 71.0, None), ("rr", -60, 28.0, None), ("spo2", -60, 90.0, None),
)  # fmt: skip


def small(path: Path) -> Path:
    """The least closed plain store whose figures rest on rows of every kind: a correction, a value moved from another
    bed, device samples, the ward's own policy, a look back at what was known."""
    with Store.create(path, now=NOW - 2 * HOUR, by="AB") as store:
        store.put_policy(shipped_text(), shipped_policy().hash, "AB", NOW - 2 * HOUR)
        taken = [_entry("E1", channel, minutes, number, words) for channel, minutes, number, words in WITHIN]
        ids = store.append(taken, by="AB", operation="log", now=NOW).ids
        other = _entry("E2", "paco2", 5, 62.0, None)
        (wrong,) = store.append([other], by="AB", operation="log", now=NOW + 6 * MINUTE).ids
        t = NOW - HOUR + MINUTE * np.arange(60, dtype=np.int64)
        leak = DeviceSamples("E1", "leak", "dev", t, np.arange(60.0) % 41)
        again = [
            NewEntry("E1", "ph", NOW - 95 * MINUTE, 7.21, None, "7.21", by="AB", action=Action.CORRECT,
                     replaces=ids[4], reason="misread"),
            NewEntry("E1", "paco2", NOW + 5 * MINUTE, 62.0, None, "62", by="AB", action=Action.MOVE, replaces=wrong,
                     reason="wrong bed"),
            _entry("E1", "ph", 5, 7.31, None),
        ]  # fmt: skip
        store.append(again, by="AB", operation="log", now=NOW + 10 * MINUTE, samples=[leak])
    return path


def _entry(episode: str, channel: str, minutes: int, number: float | None, words: str | None) -> NewEntry:
    raw = words or str(number)
    return NewEntry(episode, channel, NOW + minutes * MINUTE, number, words, raw, "", 2, "UTC", "AB")


def told(path: Path) -> list[object]:
    """What a person is told: figures of each episode now and as known earlier, and of the ward."""
    episode_shelf._shelves.clear()
    with Store.open(path, read_only=True) as store:
        made: list[object] = []
        for episode, known in (("E1", None), ("E1", NOW + 2 * MINUTE), ("E2", NOW + 7 * MINUTE)):
            one = figures.EpisodeRequest(episode, LATER, known)
            made.append(to_json(figures.of_episode(store, "AB", LATER, one).value.figures, lambda m: m.key))
        ward = figures.of_ward(store, "AB", LATER, figures.WardRequest(LATER)).value
        if ward.unread:
            raise store_error("store.episode_not_as_written", episode=ward.unread[0])
        return [*made, [to_json(f, lambda m: m.key) for f in ward.figures], ward.policy.hash]


def outcomes(path: Path, places: Iterable[int]) -> dict[str, list[int]]:
    """The places by what a flip of one bit there does: `same`, `refused`, or `others` where figures are others."""
    truth, sound = told(path), path.read_bytes()
    found: dict[str, list[int]] = {}
    for place in places:
        flipped_at(path, sound, place)
        try:
            ended = "same" if told(path) == truth else "others"
        except (StoreError, RecordError):
            ended = "refused"
        found.setdefault(ended, []).append(place)
        put_back(path, sound, place)
        for end in ("-wal", "-shm"):
            path.with_name(path.name + end).unlink(missing_ok=True)
    return found


def used_bytes(path: Path, tables: Iterable[str]) -> Iterator[int]:
    """Every byte in use on the pages of tables, and of their indexes, that hold all their rows on one page."""
    connection = raw_connection(path, None, mode="ro")
    marks = ",".join(f"'{t}'" for t in tables)
    pages = connection.execute(f"SELECT rootpage FROM sqlite_master WHERE tbl_name IN ({marks}) AND rootpage > 0")
    roots = sorted(row[0] for row in pages)
    connection.close()
    data = path.read_bytes()
    for root in roots:
        start = (root - 1) * PAGE
        cells, content = (int.from_bytes(data[start + k : start + k + 2]) for k in (3, 5))
        yield from range(start, start + 8 + 2 * cells)
        yield from range(start + content, start + PAGE)
