"""Flips bytes of a store and holds what can then be read against what was written."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from pathlib import Path

import numpy as np

from core.record.entries import Action, NewEntry
from core.record.instant import MINUTE, parse
from core.record.samples import DeviceSamples
from storage.engine import driver_errors, raw_connection
from storage.keys import Cost
from storage.schema import metadata
from storage.store import Store, StoreError

NOW = parse("2026-03-28T02:00:00+00:00")
SECRET = "correct horse ward 7"
CHEAP = Cost(64, 1, 1)
FACTS = ("store_id", "imported", "created_at", "created_by", "archive_of", "archive")


def filled(path: Path, *, encrypted: bool) -> Path:
    """A small closed store with something of everything."""
    secret = SECRET if encrypted else None
    with Store.create(path, now=NOW, passphrase=secret, cost=CHEAP) as store:
        for i in range(12):
            new = NewEntry(f"E{i % 3}", "rr", NOW + i, 20.0 + i, None, f"{20 + i}", "/min", 0, by="AB", note="n" * 40)
            store.append([new], by="AB", operation="log", now=NOW + i)
        t = NOW + MINUTE * np.arange(180, dtype=np.int64)
        leak = DeviceSamples("E1", "leak", "dev", t, np.arange(180.0) % 31)
        store.append([], by="AB", operation="log", now=NOW + 20, samples=[leak])
        store.put_document("handover", "a.pdf", bytes(range(256)) * 20, "AB", NOW + 21)
        store.put_policy("a = 1\n" * 50, "h", "AB", NOW + 22)
        store.put_layout("night", "{}" * 50)
        store.put_draft("strip", "ipap 1", NOW)
    return path


def small(path: Path, *, encrypted: bool) -> Path:
    """The least closed store that has something of everything, so that each of its bytes can be flipped in turn."""
    secret = SECRET if encrypted else None
    with Store.create(path, now=NOW, passphrase=secret, cost=CHEAP) as store:
        new = NewEntry("E0", "rr", NOW, 20.0, None, "20", "/min", 0, "UTC", "AB", "note")
        (first,) = store.append([new], by="AB", operation="log", now=NOW).ids
        fixed = NewEntry("E0", "rr", NOW, 22.0, None, "22", "/min", 0, "UTC", "AB", action=Action.CORRECT,
                         replaces=first, reason="misread")  # fmt: skip
        leak = DeviceSamples("E0", "leak", "dev", NOW + MINUTE * np.arange(9, dtype=np.int64), np.arange(9.0))
        store.append([fixed], by="AB", operation="log", now=NOW + 1, samples=[leak])
        store.put_document("handover", "a.pdf", bytes(range(200)), "AB", NOW + 2)
        store.put_policy("a = 1", "h", "AB", NOW + 3)
        store.record_event("printed", person="AB", now=NOW + 4)
        store.put_layout("night", "{}")
        store.put_draft("strip", "ipap 1", NOW)
    return path


def read_small(store: Store) -> list[object]:
    """Everything a person could read in a small store."""
    samples = [(b.channel, b.source, b.t.tolist(), b.v.tolist(), b.decimals) for b in store.samples("E0")]
    kept = (dict(store.layouts()), dict(store.drafts()), store.policies(), store.person_events())
    documents = [(d, store.document(d.id)) for d in store.documents()]
    facts = (store.is_encrypted, store.read_only, *(store.fact(k) for k in FACTS))
    sources, heads = store.sources(), (store.head(), store.head_hash(), store.head_known_at(NOW + 2))
    return [store.entries("E0"), samples, documents, kept, facts, sources, heads, store.open_episode_keys()]


def read_all(store: Store) -> list[object]:
    """Everything a person could read in a store."""
    keys = ("E0", "E1", "E2")
    for key in keys:
        store.episode(key)
    samples = [(b.channel, b.source, b.t.tolist(), b.v.tolist()) for k in keys for b in store.samples(k)]
    documents = [(d, store.document(d.id)) for d in store.documents()]
    kept = (dict(store.layouts()), dict(store.drafts()))
    entries = [store.entries(k) for k in keys]
    return [entries, samples, documents, store.policy(), kept, store.episode_keys(), store.head()]


Reading = Callable[[Store], object]


def outcome(path: Path, secret: str | None, truth: object, reading: Reading) -> str:
    """What a flipped store does: `refused`, `same` to read, `found` by verify, or `wrong` and silent."""
    try:
        with Store.open(path, passphrase=secret) as store:
            if store.verify():
                return "found"
            return "same" if reading(store) == truth else "wrong"
    except StoreError:
        return "refused"


def outcomes(
    path: Path, places: Iterable[int], *, encrypted: bool, reading: Reading = read_all
) -> dict[str, list[int]]:
    """The outcome of flipping one bit at each place, by outcome."""
    secret = SECRET if encrypted else None
    with Store.open(path, passphrase=secret) as store:
        truth = reading(store)
    sound = path.read_bytes()
    found: dict[str, list[int]] = {}
    for place in places:
        flipped = bytearray(sound)
        flipped[place] ^= 1 << (place % 8)
        path.write_bytes(flipped)
        found.setdefault(outcome(path, secret, truth, reading), []).append(place)
        for end in ("-wal", "-shm"):
            path.with_name(path.name + end).unlink(missing_ok=True)
    path.write_bytes(sound)
    return found


def flipped_at(path: Path, sound: bytes, place: int) -> None:
    """Flip one bit of a file that holds `sound`."""
    with path.open("r+b") as file:
        file.seek(place)
        file.write(bytes([sound[place] ^ 1 << (place % 8)]))


def put_back(path: Path, sound: bytes, place: int) -> None:
    """Undo a flip."""
    with path.open("r+b") as file:
        file.seek(place)
        file.write(sound[place : place + 1])


def missed_by_pages(path: Path, key: bytes, places: Iterable[int]) -> list[int]:
    """The places of an encrypted store at which the proof of its pages misses a flip.

    Every opening, and every read of a page, is held against the same proof.
    """
    sound, missed = path.read_bytes(), []
    for place in places:
        flipped_at(path, sound, place)
        if _answers(path, key, ["PRAGMA cipher_integrity_check"]) == [[]]:
            missed.append(place)
        put_back(path, sound, place)
    return missed


_EVERYTHING = (
    "PRAGMA application_id", "PRAGMA integrity_check", "SELECT * FROM sqlite_master ORDER BY name",
    *(f'SELECT * FROM "{t.name}" ORDER BY 1' for t in metadata.sorted_tables),
)  # fmt: skip


def changed_by_flips(path: Path, places: Iterable[int]) -> dict[str, list[int]]:
    """Every place of a plain store whose flip changes anything that can be read, by what the store does then.

    Where every row of every table is as before and every index agrees with its table, any question has the same
    answer as before (`unchanged`). Any other place is looked at through the store's own door: see `outcome`.
    """
    with Store.open(path) as store:
        truth = read_small(store)
    sound, before = path.read_bytes(), _everything(path)
    found: dict[str, list[int]] = {}
    for place in places:
        flipped_at(path, sound, place)
        if _everything(path) == before:
            ended = "unchanged"
            put_back(path, sound, place)
        else:
            ended = outcome(path, None, truth, read_small)
            path.write_bytes(sound)
            for end in ("-wal", "-shm"):
                path.with_name(path.name + end).unlink(missing_ok=True)
        found.setdefault(ended, []).append(place)
    return found


def _everything(path: Path) -> list[object] | None:
    return _answers(path, None, _EVERYTHING)


def _answers(path: Path, key: bytes | None, queries: Iterable[str]) -> list[object] | None:
    """What questions are answered; None where the driver fails."""
    connection = None
    try:
        connection = raw_connection(path, key, mode="ro")
        return [connection.execute(query).fetchall() for query in queries]
    except driver_errors():
        return None
    finally:
        if connection is not None:
            connection.close()
