"""Which episodes may stand on the ward: asked by index, none that stood is missing, in a store of any age."""

from __future__ import annotations

import tempfile
from dataclasses import replace
from pathlib import Path

from hypothesis import given, settings
from hypothesis import strategies as st

from core.record.entries import Action, NewEntry
from core.record.instant import HOUR
from core.record.settings import SettingsInForce
from core.record.support import support_time
from storage import episode_index
from storage.store import Store
from tests.storage.conftest import NOW

ENDS = "ended_at"


def end(episode: str, at: int, replaces: str = "", action: Action = Action.ASSERT) -> NewEntry:
    return NewEntry(episode, ENDS, at, float(at), action=action, replaces=replaces, reason="x" if replaces else "")


def log(store: Store, *entries: NewEntry) -> tuple[str, ...]:
    return store.append(entries, by="AB", operation="log", now=NOW).ids


def begin(store: Store, *episodes: str) -> None:
    for episode in episodes:
        log(store, NewEntry(episode, "label", NOW, words=episode))


def test_ended_ones_of_any_age_are_left_out(store: Store) -> None:
    begin(store, "open", "old", "late")
    log(store, end("old", NOW), end("late", NOW + 9 * HOUR))
    assert store.standing_keys(NOW + 8 * HOUR) == ("open", "late")
    assert store.standing_keys(NOW + 9 * HOUR) == ("open",)
    assert store.standing_keys(NOW - 1) == ("open", "old", "late")
    assert store.has_episode("old")
    assert not store.has_episode("never")


def test_one_that_was_open_as_known_then_is_named_though_it_ended_since(store: Store) -> None:
    begin(store, "E1")
    before = store.head()
    (first,) = log(store, end("E1", NOW))
    then = store.head()
    assert store.standing_keys(NOW + HOUR, before) == ("E1",)
    assert store.standing_keys(NOW + HOUR) == ()
    log(store, end("E1", NOW + 5 * HOUR, first, Action.CORRECT))
    assert store.standing_keys(NOW + HOUR) == ("E1",)
    assert store.standing_keys(NOW + HOUR, then) == ("E1",)  # told too often, never too seldom
    assert store.standing_keys(NOW + HOUR, 0) == ()


@given(st.lists(st.tuples(st.integers(0, 3), st.integers(0, 4), st.integers(0, 2)), max_size=9))
@settings(max_examples=10, deadline=None)
def test_none_that_stood_is_missing_at_any_moment_of_knowledge(steps: list[tuple[int, int, int]]) -> None:
    with tempfile.TemporaryDirectory() as folder, Store.create(Path(folder) / "a.luff", now=NOW) as store:
        last: dict[str, str] = {}
        for number, hour, what in steps:
            key = f"E{number}"
            if what == 0:
                begin(store, key)
            elif what == 1 or key not in last:
                (last[key],) = log(store, end(key, NOW + hour * HOUR))
            else:
                (last[key],) = log(store, end(key, NOW + hour * HOUR, last[key], Action.CORRECT))
        for head in range(store.head() + 1):
            for since in (NOW - 1, NOW + HOUR, NOW + 4 * HOUR):
                truly = {k for k in store.episode_keys(head) if _stands(store, k, head, since)}
                assert truly <= set(store.standing_keys(since, head))
        assert {k for k in store.episode_keys() if _stands(store, k, store.head(), NOW + HOUR)} == set(
            store.standing_keys(NOW + HOUR)
        )


def _stands(store: Store, key: str, head: int, since: int) -> bool:
    found = store.episode(key, head).latest(ENDS)
    return found is None or found > since


def said(episode: str, channel: str, at: int, words: str = "", **more: object) -> NewEntry:
    return NewEntry(episode, channel, at, words=words or "yes", **more)  # type: ignore[arg-type]


def test_a_stop_ends_an_episode_until_the_mask_goes_on_again(store: Store) -> None:
    begin(store, "E1")
    log(store, said("E1", "mode", NOW, "BPAP-ST"))
    assert store.open_episode_keys() == ("E1",)
    log(store, said("E1", "stopped", NOW + HOUR))
    assert store.open_episode_keys() == ()
    assert store.standing_keys(NOW) == ("E1",)
    assert store.standing_keys(NOW + HOUR) == ()
    (again,) = log(store, said("E1", "mask_on", NOW + 30 * HOUR))
    assert store.open_episode_keys() == ("E1",)
    log(store, said("E1", "mask_on", NOW + 30 * HOUR, action=Action.WITHDRAW, replaces=again, reason="not hers"))
    assert store.open_episode_keys() == ()
    assert not store.verify()


STEPS = st.tuples(st.sampled_from(["stopped", "mask_on", "mode", "ended_at", "rr"]), st.integers(0, 9),
                  st.integers(0, 1), st.sampled_from(["assert", "withdraw", "move"]))  # fmt: skip


@given(st.lists(STEPS, max_size=8))
@settings(max_examples=15, deadline=None)
def test_the_table_tells_the_end_that_the_figures_read(steps: list[tuple[str, int, int, str]]) -> None:
    with tempfile.TemporaryDirectory() as folder, Store.create(Path(folder) / "a.luff", now=NOW) as store:
        begin(store, "E0", "E1")
        last: NewEntry | None = None
        last_id = ""
        for channel, hour, number, action in steps:
            if action == "assert" or last is None:
                at = NOW + hour * HOUR
                value = float(at) if channel == ENDS else 20.0 if channel == "rr" else None
                words = None if value is not None else "BPAP-ST" if channel == "mode" else "yes"
                last = NewEntry(f"E{number}", channel, at, value, words)
                (last_id,) = log(store, last)
            else:
                what = Action.WITHDRAW if action == "withdraw" else Action.MOVE
                key = last.episode if what is Action.WITHDRAW else "E1" if last.episode == "E0" else "E0"
                log(store, replace(last, episode=key, action=what, replaces=last_id, reason="x"))
                last = None
        for key in ("E0", "E1"):
            record = store.episode(key)
            end = support_time(record, SettingsInForce(record)).end
            assert (key in store.open_episode_keys()) == (end is None)
        assert not [m for m in store.verify() if m.key == "verify.derived"]


def test_it_is_asked_by_index(store: Store) -> None:
    begin(store, *(f"E{i}" for i in range(50)))
    with store._opened.database.read() as connection:
        asked: list[str] = []
        connection.connection.driver_connection.set_trace_callback(asked.append)  # type: ignore[union-attr]
        episode_index.standing_keys(connection, NOW, None)
        episode_index.is_known(connection, "E7")
        connection.connection.driver_connection.set_trace_callback(None)  # type: ignore[union-attr]
        plans = [
            " ".join(str(r[3]) for r in connection.exec_driver_sql(f"EXPLAIN QUERY PLAN {q}"))
            for q in asked
            if q.startswith("SELECT")
        ]
    assert len(plans) == 2
    assert all("SCAN episode_now" not in plan and "INDEX" in plan for plan in plans), plans
