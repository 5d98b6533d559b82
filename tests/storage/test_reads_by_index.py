"""Every read on the way to a screen goes by an index: none scans a table that grows with the ward's years."""

from __future__ import annotations

from collections.abc import Callable

import numpy as np
import pytest
from sqlalchemy import event

from core.record.entries import Action, NewEntry
from core.record.samples import DeviceSamples
from storage.store import Store
from tests.storage.conftest import NOW

GROWING = ("entry", "chunk", "batch", "source", "document", "policy", "person_event")


def plans_of(store: Store, read: Callable[[Store], object]) -> list[str]:
    """How the file's engine goes about every query of a read."""
    seen: list[tuple[str, object]] = []

    def note(_c: object, _cursor: object, statement: str, parameters: object, *_more: object) -> None:
        seen.append((statement, parameters))

    engine = store._opened.database.engine
    event.listen(engine, "before_cursor_execute", note)
    read(store)
    event.remove(engine, "before_cursor_execute", note)
    with store._opened.database.read() as c:
        return [
            f"{row[3]} <- {statement}"
            for statement, parameters in seen
            if statement.startswith("SELECT")
            for row in c.exec_driver_sql(f"EXPLAIN QUERY PLAN {statement}", parameters)  # type: ignore[arg-type]
        ]


@pytest.fixture
def moved(store: Store) -> Store:
    """A store with entries moved between episodes, so that every path of reading is taken."""
    ids: list[str] = []
    for i in range(6):
        ids += store.append([NewEntry(f"E{i % 2}", "rr", NOW + i, 20.0)], by="AB", operation="log", now=NOW).ids
    store.append(
        [NewEntry("E1", "rr", NOW, 20.0, action=Action.MOVE, replaces=ids[0])],
        by="AB",
        operation="move",
        now=NOW,
    )
    block = DeviceSamples("E1", "leak", "dev", NOW + np.arange(5, dtype=np.int64), np.arange(5.0))
    store.append([], by="AB", operation="log", now=NOW, samples=[block])
    store.put_policy("a", "h", "AB", NOW)
    return store


@pytest.mark.parametrize(
    "read",
    [
        Store.head, Store.printed_head, lambda s: s.head_known_at(NOW), lambda s: s.changes_since(3),
        lambda s: s.entries("E1"), lambda s: s.entries("E1", head=4), lambda s: s.samples("E1"),
        lambda s: s.samples("E1", channel="leak"),
        lambda s: s.episode("E0"), lambda s: s.episode("E1", head=5), Store.open_episode_keys, Store.policy,
        lambda s: s.known_entry_ids(["x"]), lambda s: s.replaced("x"),
    ],
)  # fmt: skip
def test_no_read_scans_a_growing_table(moved: Store, read: Callable[[Store], object]) -> None:
    plans = plans_of(moved, read)
    assert plans
    # the newest row of a table by its key is a scan of one step; a search of "seq > ?" goes by the key
    scans = [p for p in plans if p.startswith("SCAN") and p.split()[1] in GROWING and "LIMIT" not in p]
    assert scans == []
    assert [p for p in plans if "TEMP B-TREE" in p and "batch" in p] == []
