"""The values of one gas are moved, withdrawn and given another time together; one alone asks first."""

from collections.abc import Iterator
from pathlib import Path

import pytest

from app.operations import correction, entry, episode
from app.operations.correction import CorrectionRequest, MoveRequest, UndoRequest, WithdrawalRequest
from app.words import sentence
from core.record.instant import HOUR, MINUTE, parse
from core.record.message import RecordError
from storage.store import Store

NOW = parse("2026-03-28T02:30:00Z")
GAS = "02:10 site arterial ph 7.31 paco2 58 pao2 61"


@pytest.fixture
def store(tmp_path: Path) -> Iterator[Store]:
    with Store.create(tmp_path / "ward.luff", now=NOW - 8 * HOUR) as made:
        for key in ("A", "B"):
            episode.begin(made, "AB", NOW - 8 * HOUR, episode.BeginRequest(key, {"label": f"Bed {key}"}))
        yield made


def log(store: Store, text: str, key: str = "A", at: int = NOW) -> entry.Recorded:
    return entry.log_line(store, "AB", at, entry.LineRequest(key, text, "UTC", confirmed=True)).value


def gas_values(store: Store, key: str) -> list[tuple[float, float, float]]:
    return [(g.ph, g.paco2, g.pao2) for g in store.episode(key).gases]


def test_a_gas_moves_whole_to_the_right_bed_and_back_by_one_undo(store: Store) -> None:
    made = log(store, GAS)
    moved = correction.move(store, "CD", NOW, MoveRequest("A", made.ids[1], "B", "wrong bed")).value
    assert [e.channel for e in moved.entries] == ["site", "ph", "paco2", "pao2"]
    assert (gas_values(store, "A"), gas_values(store, "B")) == ([], [(7.31, 58, 61)])
    assert store.episode("B").gases[0].site == "arterial"
    correction.undo(store, "CD", NOW, UndoRequest("B", moved.ids))
    assert (gas_values(store, "A"), gas_values(store, "B")) == ([(7.31, 58, 61)], [])
    assert store.verify() == ()


def test_a_gas_is_withdrawn_whole(store: Store) -> None:
    made = log(store, GAS)
    taken = correction.withdraw(store, "CD", NOW, WithdrawalRequest("A", made.ids[2], "clotted")).value
    assert len(taken.ids) == 4
    assert gas_values(store, "A") == []
    correction.undo(store, "CD", NOW, UndoRequest("A", taken.ids))
    assert gas_values(store, "A") == [(7.31, 58, 61)]


def test_another_time_is_that_of_the_whole_gas_and_a_value_that_of_one(store: Store) -> None:
    made = log(store, GAS)
    request = CorrectionRequest("A", made.ids[1], "misread", "7.32", at=NOW - HOUR)
    correction.correct(store, "CD", NOW, request)
    (gas,) = store.episode("A").gases
    assert (gas.at, gas.ph, gas.paco2, gas.site) == (NOW - HOUR, 7.32, 58, "arterial")
    value = next(s.entry.id for s in store.episode("A").standing if s.entry.channel == "paco2")
    one = correction.correct(store, "CD", NOW, CorrectionRequest("A", value, "misread", "57")).value
    assert len(one.ids) == 1


@pytest.mark.parametrize("act", ["move", "withdraw", "time"])
def test_one_value_of_a_gas_asks_before_it_leaves_the_rest_behind(store: Store, act: str) -> None:
    made = log(store, GAS)
    head = store.head()

    def request(confirmed: bool) -> correction.Request:
        more = {"alone": True, "confirmed": confirmed}
        if act == "move":
            return MoveRequest("A", made.ids[1], "B", "x", **more)
        if act == "withdraw":
            return WithdrawalRequest("A", made.ids[1], "x", **more)
        return CorrectionRequest("A", made.ids[1], "x", at=NOW - HOUR, **more)

    do = {"move": correction.move, "withdraw": correction.withdraw, "time": correction.correct}[act]
    asked = correction.correction_questions(store, "CD", NOW, request(False)).value
    assert asked[0].key == "correction.half_gas"
    assert "PaCO2, PaO2" in sentence(asked[0])
    with pytest.raises(RecordError, match=r"line\.unconfirmed"):
        do(store, "CD", NOW, request(False))
    assert store.head() == head
    assert len(do(store, "CD", NOW, request(True)).value.ids) == 1
    assert [g.paco2 for g in store.episode("A").gases if g.at == NOW - 20 * MINUTE] == [58]


def test_a_value_added_to_a_gas_later_goes_with_it(store: Store) -> None:
    log(store, GAS)
    later = log(store, "02:10 lactate 1.4", at=NOW + MINUTE)
    moved = correction.move(store, "CD", NOW + MINUTE, MoveRequest("A", later.ids[0], "B", "wrong bed")).value
    assert len(moved.ids) == 5
    assert store.episode("A").gases == ()


def test_of_two_gases_typed_for_one_minute_only_the_one_of_its_recording_goes(store: Store) -> None:
    log(store, GAS)
    other = log(store, "02:10 ph 7.21 paco2 80", at=NOW + MINUTE)
    correction.move(store, "CD", NOW + MINUTE, MoveRequest("A", other.ids[0], "B", "wrong bed"))
    assert gas_values(store, "A") == [(7.31, 58, 61)]
    (gas,) = store.episode("B").gases
    assert (gas.ph, gas.paco2) == (7.21, 80)


def test_a_gas_that_meets_another_in_the_right_bed_asks(store: Store) -> None:
    log(store, "02:10 ph 7.40 paco2 40", "B")
    made = log(store, GAS)
    asked = correction.correction_questions(store, "CD", NOW, MoveRequest("A", made.ids[1], "B", "x")).value
    assert {m.values["channel"] for m in asked if m.key == "doubt.second_value"} == {"ph", "paco2"}


def test_anything_else_is_moved_by_itself(store: Store) -> None:
    made = log(store, "02:10 rr 24 spo2 91 ph 7.31")
    moved = correction.move(store, "CD", NOW, MoveRequest("A", made.ids[0], "B", "wrong bed")).value
    assert [e.channel for e in moved.entries] == ["rr"]
