"""The session: one value, one signal, and the same news for own and foreign commits."""

from collections.abc import Iterator
from pathlib import Path
from typing import Any

import pytest

from app.operations import store as store_operations
from app.operations.outcome import Outcome
from app.session.clock import REAL, Clock, running_from, still
from app.session.model import POLL_MS, SessionModel
from app.session.runner import Runner
from app.session.state import Changed, Session, What


def test_session_follows_its_clock_unless_told_otherwise() -> None:
    session = Session(Path("ward.luff"), clock=still(50))
    assert (session.now(), session.moment(), session.is_live) == (50, 50, True)
    looked_back = Session(Path("ward.luff"), clock=still(50), as_of=20)
    assert (looked_back.now(), looked_back.moment(), looked_back.is_live) == (50, 20, False)


def test_clocks_stand_or_run() -> None:
    assert not still(5).is_running
    assert running_from(5).now() >= 5
    assert running_from(5).is_running
    assert REAL.now() > 1_600_000_000_000_000
    assert Clock().is_running


class Heads:
    """A store whose head the test moves."""

    def __init__(self) -> None:
        self.head = 3
        self.revision = 0

    def close(self) -> None:
        pass


@pytest.fixture
def store() -> Heads:
    return Heads()


@pytest.fixture
def model(store: Heads, monkeypatch: pytest.MonkeyPatch, qtbot: Any) -> Iterator[SessionModel]:
    def describe(s: Any, who: str, now: int, request: Any) -> Outcome[Any]:
        from core.judgement.policy import shipped_policy

        facts = store_operations.StoreFacts(
            frozenset({"a", "b"}), shipped_policy(), read_only=True, encrypted=False, notices=(), printed_head="3 ab"
        )
        return Outcome(facts, s.head)

    def changes(s: Any, who: str, now: int, request: int) -> Outcome[Any]:
        episodes = frozenset({"b"} if s.head > request else ())
        return Outcome(store_operations.Changes(episodes, layout_revision=s.revision), s.head)

    monkeypatch.setattr(store_operations, "describe", describe)
    monkeypatch.setattr(store_operations, "changes", changes)
    runner = Runner(lambda: store)  # type: ignore[arg-type, return-value]
    made = SessionModel(Session(Path("w"), clock=still(9)), runner)
    yield made
    made.close()


def test_start_tells_the_store_and_its_head(model: SessionModel, qtbot: Any) -> None:
    with qtbot.waitSignal(model.changed) as told:
        model.start()
    change: Changed = told.args[0]
    assert change.touches(What.STORE)
    assert change.touches(What.RECORD)
    assert change.episodes == {"a", "b"}
    assert model.session.head == 3
    assert model.session.read_only


def test_a_foreign_commit_is_looked_for_more_often_than_each_second() -> None:
    assert POLL_MS < 1_000


def test_a_foreign_commit_is_told_once(model: SessionModel, store: Heads, qtbot: Any) -> None:
    with qtbot.waitSignal(model.changed):
        model.start()
    store.head = 8
    with qtbot.waitSignal(model.changed) as told:
        model.look_for_changes()
    assert told.args[0] == Changed(frozenset({What.RECORD}), frozenset({"b"}))
    assert model.session.head == 8
    with qtbot.assertNotEmitted(model.changed, wait=50):
        model.look_for_changes()
        qtbot.waitUntil(lambda: not model.runner.is_busy)


def test_a_kept_layout_is_told(model: SessionModel, store: Heads, qtbot: Any) -> None:
    with qtbot.waitSignal(model.changed):
        model.start()
    store.revision = 1
    with qtbot.waitSignal(model.changed) as told:
        model.look_for_changes()
    assert told.args[0].what == {What.LAYOUT}


def test_an_own_commit_arrives_by_the_same_way(model: SessionModel, store: Heads, qtbot: Any) -> None:
    with qtbot.waitSignal(model.changed):
        model.start()

    def write(s: Any, who: str, now: int, request: Any) -> Outcome[None]:
        s.head += 1
        return Outcome(None, s.head)

    with qtbot.waitSignal(model.changed) as told:
        model.ask(write)
    assert told.args[0].episodes == {"b"}
    assert model.session.head == 4


def test_intents_change_the_value_and_say_what(model: SessionModel, qtbot: Any) -> None:
    for intent, value, what in (
        (model.select, "a", What.SELECTION), (model.set_person, "AB", What.PERSON),
        (model.set_as_of, 4, What.AS_OF), (model.set_as_known_at, 2, What.AS_KNOWN_AT),
        (model.set_zone, "Europe/London", What.ZONE),
    ):  # fmt: skip
        with qtbot.waitSignal(model.changed) as told:
            intent(value)
        assert told.args[0].what == {what}
        with qtbot.assertNotEmitted(model.changed, wait=10):
            intent(value)
    assert model.session.selection == "a"
    assert model.session.person == "AB"


def test_nothing_is_looked_for_before_the_store_is_described(model: SessionModel, qtbot: Any) -> None:
    """Else every episode that was ever closed would come as news and be read."""
    with qtbot.assertNotEmitted(model.changed, wait=30):
        model.look_for_changes()
        assert not model.runner.is_busy
    with qtbot.waitSignal(model.changed):
        model.start()
    assert model.session.head == 3
