"""Flips bytes of a store and holds what can then be read against what was written."""

from __future__ import annotations

import random
from collections.abc import Iterable
from pathlib import Path

import numpy as np

from core.record.entries import NewEntry
from core.record.instant import MINUTE, parse
from core.record.samples import DeviceSamples
from storage.keys import Cost
from storage.store import Store, StoreError

NOW = parse("2026-03-28T02:00:00+00:00")
SECRET = "correct horse ward 7"


def filled(path: Path, *, encrypted: bool) -> Path:
    """A small closed store with something of everything."""
    secret = SECRET if encrypted else None
    with Store.create(path, now=NOW, passphrase=secret, cost=Cost(64, 1, 1)) as store:
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


def outcome(path: Path, secret: str | None, truth: object) -> str:
    """What a flipped store does: `refused`, `found` by verify, `same` to read, or `wrong` and silent."""
    try:
        with Store.open(path, passphrase=secret) as store:
            if store.verify():
                return "found"
            return "same" if read_all(store) == truth else "wrong"
    except StoreError:
        return "refused"


def outcomes(path: Path, places: Iterable[int], *, encrypted: bool) -> dict[str, list[int]]:
    """The outcome of flipping one bit at each place, by outcome."""
    secret = SECRET if encrypted else None
    with Store.open(path, passphrase=secret) as store:
        truth = read_all(store)
    sound = path.read_bytes()
    found: dict[str, list[int]] = {}
    for place in places:
        flipped = bytearray(sound)
        flipped[place] ^= 1 << (place % 8)
        path.write_bytes(flipped)
        found.setdefault(outcome(path, secret, truth), []).append(place)
    path.write_bytes(sound)
    return found


def mutated(sound: bytes, chance: random.Random) -> bytes:
    """A file that time, a bad cable or an enemy changed."""
    data = bytearray(sound)
    for _ in range(chance.randint(1, 4)):
        at, length = chance.randrange(len(data) + 1), chance.randint(1, 4096)
        kind = chance.randrange(5)
        if kind == 0:
            del data[at:]
        elif kind == 1:
            data[at : at + length] = chance.randbytes(length)
        elif kind == 2:
            data[at : at + 2] = chance.choice([b"\x00\x00", b"\xff\xff", b"\x7f\xff", b"\x80\x00", b'"\n', b",,"])
        elif kind == 3:
            data[at:at] = data[at : at + length]
        else:
            del data[at : at + length]
        data = data or bytearray(b"\x00")
    return bytes(data)
