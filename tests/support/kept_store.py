"""A store with something of every kind, kept as a file for each released format, and what it says.

`python -m tests.support.kept_store FOLDER` makes the files of the format that this program writes. Kept ones are
never made anew: they are what that release wrote.
"""

from __future__ import annotations

import gzip
import json
import sys
from dataclasses import asdict
from hashlib import sha256
from pathlib import Path
from typing import Any

import numpy as np

from core.record.entries import Action, NewEntry
from core.record.instant import MINUTE, parse
from core.record.samples import DeviceSamples
from storage import people
from storage.keys import Cost, envelope_path
from storage.schema import FORMAT
from storage.store import SourceFacts, Store

NOW = parse("2026-03-28T02:00:00+00:00")
SECRET = "correct horse ward 7"
EPISODES = ("E1", "E2", "E3")


def make(path: Path, *, encrypted: bool) -> Path:
    """The store, closed."""
    secret = SECRET if encrypted else None
    with Store.create(path, passphrase=secret, now=NOW, by="AB", cost=Cost(64, 1, 1)) as store:
        people.add(store, "AB", "2580", people.LEAD, by="AB", now=NOW)
        store.put_policy("[policy]\nname = 'of a test'\n", "ab" * 32, "AB", NOW)
        for key in EPISODES:
            _log(store, NewEntry(key, "label", NOW, words=f"Bed {key}", raw=f"Bed {key}"))
            _log(store, *(_rr(key, n) for n in range(5)))
        ids = [e.id for e in store.entries("E1")]
        _log(store, _rr("E1", 9, action=Action.CORRECT, replaces=ids[1], reason="misread"))
        _log(store, _rr("E1", 3, action=Action.WITHDRAW, replaces=ids[4], reason="wrong patient"))
        _log(store, _rr("E2", 2, action=Action.MOVE, replaces=ids[3], reason="wrong bed"))
        t = NOW + MINUTE * np.arange(150, dtype=np.int64)
        source = SourceFacts("table", "device.csv", "cd" * 32, 4711, {"zone": "Europe/Oslo"})
        leak = DeviceSamples("E2", "leak", source.id, t, np.where(t % 7 == 0, np.nan, (t // MINUTE) % 31 + 0.5), 1)
        store.append([], by="AB", operation="intake", now=NOW + 20 * MINUTE, samples=[leak], source=source)
        mask = NewEntry("E2", "leak", int(t[10]), float(t[20]), action=Action.MASK, reason="off", source=source.id)
        _log(store, mask)
        _log(store, NewEntry("E3", "ended_at", NOW, float(NOW)))
        store.put_document("handover", "night", b"%PDF " + bytes(range(256)) * 30, "AB", NOW + 30 * MINUTE)
        store.erase_episode("E3", reason="retention time is over", by="AB", now=NOW + 40 * MINUTE)
        store.put_layout("night", "[panels]")
        store.put_draft("strip E1", "16/6", NOW + 41 * MINUTE)
    return path


def _log(store: Store, *entries: NewEntry) -> None:
    store.append(entries, by="AB", operation="log", now=NOW + 10 * MINUTE)


def _rr(episode: str, n: int, **more: Any) -> NewEntry:
    return NewEntry(episode, "rr", NOW + n * MINUTE, 20.0 + n, None, f"{20 + n}", "/min", 0, "Europe/Oslo", "AB",
                    f"note {n} – å", **more)  # fmt: skip


def told(store: Store) -> dict[str, Any]:
    """What a store says, as JSON keeps it."""
    samples = [[b.channel, b.t.tolist(), [None if np.isnan(v) else v for v in b.v], b.decimals]
               for k in EPISODES for b in store.samples(k)]  # fmt: skip
    made = {
        "printed_head": store.printed_head(), "store_id": store.store_id, "episodes": store.episode_keys(),
        "entries": [asdict(e) for k in EPISODES for e in store.entries(k)], "samples": samples,
        "documents": [[d.name, d.recorded_at, sha256(store.document(d.id)).hexdigest()] for d in store.documents()],
        "policy": store.policy(), "sources": [s.name for s in store.sources()],
        "events": [asdict(e) for e in store.person_events()], "kept": [store.layouts(), store.drafts()],
    }  # fmt: skip
    return json.loads(json.dumps(made))


def main() -> None:
    """Write the files and what they say."""
    folder = Path(sys.argv[1])
    folder.mkdir(parents=True, exist_ok=True)
    for kind in ("plain", "encrypted"):
        path = make(folder / f"{kind}.luffmark", encrypted=kind == "encrypted")
        with Store.open(path, passphrase=SECRET) as store:
            says = told(store)
        name = f"format_{FORMAT}_{kind}"
        (folder / f"{name}.luffmark.gz").write_bytes(gzip.compress(path.read_bytes(), 9, mtime=0))
        (folder / f"{name}.json").write_text(json.dumps(says, indent=0, ensure_ascii=False), encoding="utf-8")
        path.unlink()
        if envelope_path(path).exists():
            envelope_path(path).replace(folder / f"{name}.luffmark.key")


if __name__ == "__main__":
    main()
