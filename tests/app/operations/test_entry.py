"""Recording, correcting, withdrawing, moving and undoing through a real store."""

from collections.abc import Iterator
from pathlib import Path

import pytest
from hypothesis import HealthCheck, given, settings
from hypothesis import strategies as st

from app.operations import correction, entry, episode, facts, figures
from app.words import sentence
from core.record.instant import HOUR, MINUTE, SECOND, parse
from core.record.message import RecordError
from storage.store import Store

NOW = parse("2026-03-28T02:30:00Z")


@pytest.fixture
def store(tmp_path: Path) -> Iterator[Store]:
    with Store.create(tmp_path / "ward.luff", now=NOW - 8 * HOUR) as made:
        for key in ("A", "B"):
            episode.begin(made, "AB", NOW - 8 * HOUR, episode.BeginRequest(key, {"label": f"Bed {key}"}))
        yield made


def line(text: str, key: str = "A", **more: bool) -> entry.LineRequest:
    return entry.LineRequest(key, text, "UTC", **more)


def log(store: Store, text: str, **more: bool) -> entry.Recorded:
    return entry.log_line(store, "AB", NOW, line(text, **more)).value


def test_a_line_is_previewed_without_being_recorded(store: Store) -> None:
    head = store.head()
    shown = entry.preview(store, "AB", NOW, line("02:10 ps 10 epap 5")).value
    assert (shown.episode, shown.label) == ("A", "Bed A")
    assert shown.line.support_after == 10
    assert store.head() == head


def test_support_that_nothing_shows_to_begin_is_told_and_one_word_makes_its_hours_count(store: Store) -> None:
    shown = entry.preview(store, "AB", NOW, line("02:10 bpap-st 16/6 35")).value
    assert [n.key for n in shown.line.notes] == ["line.start_unseen"]
    assert "'support started'" in sentence(shown.line.notes[0])
    told = entry.preview(store, "AB", NOW, line("02:10 bpap-st 16/6 35 support started")).value
    assert "line.start_unseen" not in [n.key for n in told.line.notes]
    log(store, "02:10 bpap-st 16/6 35 support started")
    made = figures.of_episode(store, "AB", NOW, figures.EpisodeRequest("A", NOW)).value.figures
    assert made.support.hours_on_mask == pytest.approx(20 / 60)


def test_a_line_is_recorded_with_who_and_when(store: Store) -> None:
    outcome = entry.log_line(store, "AB", NOW, line("02:10 16/6 35"))
    assert outcome.head == store.head()
    made = store.episode("A")
    assert made.latest("ipap") == 16
    assert made.latest("fio2") == 0.35
    assert {s.entry.by for s in made.standing} == {"AB"}
    assert int(made.number("ipap").t[0]) == NOW - 20 * MINUTE


def test_an_unknown_episode_is_refused_unless_it_is_meant_to_begin(store: Store) -> None:
    with pytest.raises(RecordError) as refused:
        entry.log_line(store, "AB", NOW, line("rr 20", key="C"))
    assert refused.value.message.key == "episode.unknown"
    assert entry.log_line(store, "AB", NOW, line("rr 20", key="C", new=True)).value.episode == "C"


@pytest.mark.parametrize("key", ["", "two words", "x" * 61, "a\tb"])
def test_a_key_that_cannot_be_typed_again_is_refused(store: Store, key: str) -> None:
    with pytest.raises(RecordError) as refused:
        entry.log_line(store, "AB", NOW, line("rr 20", key=key, new=True))
    assert refused.value.message.key == "episode.bad_key"


def test_another_value_for_a_minute_that_has_one_is_asked_about(store: Store) -> None:
    log(store, "01:10 ph 7.30 paco2 60 hco3 28.5", confirmed=True)
    asked = entry.preview(store, "AB", NOW, line("01:10 ph 7.24")).value.questions
    second = [m for m in asked if m.key == "doubt.second_value"]
    assert [(m.values["channel"], m.values["first"]) for m in second] == [("ph", 7.30)]
    assert sentence(second[0]).startswith("pH 7.30 is logged for this minute already (")
    with pytest.raises(RecordError):
        log(store, "01:10 ph 7.24")
    same = entry.preview(store, "AB", NOW, line("01:10 ph 7.30")).value.questions
    assert not [m for m in same if m.key == "doubt.second_value"]
    other = entry.preview(store, "AB", NOW, line("01:11 ph 7.24")).value.questions
    assert not [m for m in other if m.key == "doubt.second_value"]


def test_a_soft_limit_is_asked_about(store: Store) -> None:
    head = store.head()
    with pytest.raises(RecordError) as refused:
        log(store, "rr 48")
    assert refused.value.message.key == "line.unconfirmed"
    assert store.head() == head
    log(store, "rr 48", confirmed=True)
    assert not store.episode("A").number("rr").doubt.any()


def test_a_gas_that_does_not_agree_with_itself_is_asked_about(store: Store) -> None:
    with pytest.raises(RecordError) as refused:
        log(store, "ph 7.25 paco2 60 hco3 36")
    assert refused.value.message.values["first"] == "gas.inconsistent"


def test_a_correction_asks_what_the_entry_itself_would_have_been_asked(store: Store) -> None:
    made = log(store, "01:10 ph 7.30 paco2 60 hco3 28.9 gas fio2 28%", confirmed=True)
    ids = dict(zip(("ph", "paco2", "hco3", "gas_fio2"), made.ids, strict=True))
    wrong = correction.CorrectionRequest("A", ids["paco2"], "misread", "50")
    asked = correction.correction_questions(store, "CD", NOW, wrong).value
    assert [m.key for m in asked] == ["gas.inconsistent"]
    with pytest.raises(RecordError) as refused:
        correction.correct(store, "CD", NOW, wrong)
    assert refused.value.message.key == "line.unconfirmed"
    right = correction.CorrectionRequest("A", ids["paco2"], "misread", "61")
    assert correction.correction_questions(store, "CD", NOW, right).value == ()
    correction.correct(store, "CD", NOW, right)
    assert store.episode("A").gases[0].paco2 == 61


def test_a_correction_of_the_time_alone_asks_too(store: Store) -> None:
    log(store, "00:30 16/6 35", confirmed=True)
    log(store, "01:00 mask off", confirmed=True)
    change = log(store, "00:50 18/6", confirmed=True)
    later = correction.CorrectionRequest("A", change.ids[0], "typed wrong", at=NOW - 60 * MINUTE)
    asked = correction.correction_questions(store, "CD", NOW, later).value
    assert "doubt.settings_off_mask" in [m.key for m in asked]


def test_a_target_the_wrong_way_round_is_refused_however_it_is_entered(store: Store) -> None:
    log(store, "target spo2 low 88")
    for refusing in (
        lambda: log(store, "target spo2 high 86", confirmed=True),
        lambda: facts.record(store, "AB", NOW, facts.FactsRequest("A", NOW, {"target_spo2_high": "88"}, "UTC", True)),
        lambda: episode.begin(store, "AB", NOW, episode.BeginRequest("C", {"target_spo2_low": "96",
                                                                           "target_spo2_high": "94"})),
    ):  # fmt: skip
        with pytest.raises(RecordError, match=r"target\.wrong_order"):
            refusing()
    assert log(store, "target spo2 high 92").entries[0].number == 92


def test_a_bed_of_another_patient_is_asked_about_however_it_is_given(store: Store) -> None:
    request = episode.BeginRequest("C", {"label": " bed  a"})
    (asked,) = episode.preview_begin(store, "AB", NOW, request).value.questions
    assert sentence(asked).startswith("Bed A is in use: episode A")
    (asked,) = facts.preview(
        store, "AB", NOW, facts.FactsRequest("B", NOW, {"label": "Bed A"}, "UTC")
    ).value.questions
    assert (asked.key, asked.values["episode"]) == ("doubt.label_in_use", "A")
    own = facts.preview(store, "AB", NOW, facts.FactsRequest("A", NOW, {"label": "Bed A"}, "UTC")).value
    assert not own.questions
    log(store, "stopped end_reason weaned")
    assert not episode.preview_begin(store, "AB", NOW, request).value.questions


def test_a_moment_to_come_is_refused(store: Store) -> None:
    with pytest.raises(RecordError) as refused:
        entry.check_not_future(NOW + 6 * MINUTE, NOW)
    assert refused.value.message.key == "entry.in_future"
    entry.check_not_future(NOW + 5 * MINUTE, NOW)


def test_correction_supersedes_and_stays_visible(store: Store) -> None:
    made = log(store, "ph 7.31")
    correction.correct(store, "CD", NOW, correction.CorrectionRequest("A", made.ids[0], "misread", "7,13"))
    (gas,) = store.episode("A").gases
    assert (gas.ph, gas.corrected) == (7.13, True)
    assert gas.text("ph") == "7.13"


def test_correction_of_the_time_alone_keeps_the_value(store: Store) -> None:
    made = log(store, "rr 30")
    correction.correct(store, "CD", NOW, correction.CorrectionRequest("A", made.ids[0], "late", at=NOW - HOUR))
    series = store.episode("A").number("rr")
    assert (int(series.t[0]), float(series.v[0])) == (NOW - HOUR, 30.0)


@pytest.mark.parametrize("reason", ["", "   "])
def test_a_correction_needs_its_reason(store: Store, reason: str) -> None:
    made = log(store, "rr 30")
    with pytest.raises(RecordError) as refused:
        correction.correct(store, "CD", NOW, correction.CorrectionRequest("A", made.ids[0], reason, "31"))
    assert refused.value.message.key == "correction.no_reason"


def test_what_was_superseded_cannot_be_corrected_again(store: Store) -> None:
    made = log(store, "rr 30")
    correction.withdraw(store, "CD", NOW, correction.WithdrawalRequest("A", made.ids[0], "wrong bed"))
    with pytest.raises(RecordError) as refused:
        correction.correct(store, "CD", NOW, correction.CorrectionRequest("A", made.ids[0], "again", "31"))
    assert refused.value.message.key == "correction.superseded"


def test_an_entry_moves_to_the_episode_it_belongs_to(store: Store) -> None:
    made = log(store, "rr 30")
    moved = correction.move(store, "CD", NOW, correction.MoveRequest("A", made.ids[0], "B", "wrong bed")).value
    assert store.episode("A").latest("rr") is None
    assert store.episode("B").latest("rr") == 30
    correction.undo(store, "CD", NOW, correction.UndoRequest("B", moved.ids))
    assert store.episode("A").latest("rr") == 30
    assert store.episode("B").latest("rr") is None


def test_undo_refuses_what_somebody_changed_since(store: Store) -> None:
    made = log(store, "rr 30")
    correction.correct(store, "CD", NOW, correction.CorrectionRequest("A", made.ids[0], "recount", "28"))
    with pytest.raises(RecordError) as refused:
        correction.undo(store, "AB", NOW, correction.UndoRequest("A", made.ids))
    assert refused.value.message.key == "undo.superseded"
    assert store.episode("A").latest("rr") == 28


STEPS = st.lists(st.sampled_from(["log", "correct", "withdraw", "undo"]), min_size=1, max_size=7)


@given(STEPS)
@settings(max_examples=25, deadline=None, suppress_health_check=[HealthCheck.function_scoped_fixture])
def test_undo_brings_back_what_stood_before(tmp_path_factory: pytest.TempPathFactory, steps: list[str]) -> None:
    """Whatever was done, its undo leaves the value that stood before it; undoing the undo brings it again."""
    with Store.create(tmp_path_factory.mktemp("u") / "ward.luff", now=NOW - HOUR) as store:
        episode.begin(store, "AB", NOW - HOUR, episode.BeginRequest("A"))
        last = log(store, "rr 20")
        for n, step in enumerate(steps):
            before = store.episode("A").latest("rr")
            last = _do(store, step, last, n, standing=before is not None)
            after = store.episode("A").latest("rr")
            taken_back = correction.undo(store, "AB", NOW, correction.UndoRequest("A", last.ids)).value
            assert store.episode("A").latest("rr") == before
            last = correction.undo(store, "AB", NOW, correction.UndoRequest("A", taken_back.ids)).value
            assert store.episode("A").latest("rr") == after
        assert store.verify() == ()


def _do(store: Store, step: str, last: entry.Recorded, n: int, *, standing: bool) -> entry.Recorded:
    if step == "undo":
        return correction.undo(store, "AB", NOW, correction.UndoRequest("A", last.ids)).value
    if step == "log" or not standing:
        return log(store, f"rr {20 + n}", confirmed=True)
    current = store.episode("A").standing[-1].entry.id
    if step == "correct":
        wanted = correction.CorrectionRequest("A", current, "x", str(25 + n), confirmed=True)
        return correction.correct(store, "AB", NOW, wanted).value
    return correction.withdraw(store, "AB", NOW, correction.WithdrawalRequest("A", current, "x")).value


def test_a_gas_typed_in_two_lines_of_one_minute_is_one_gas(store: Store) -> None:
    def typed(text: str, second: int) -> None:
        entry.log_line(store, "AB", NOW + second * SECOND, line(text))

    typed("ph 7.25", 5)
    typed("paco2 60 pao2 58", 40)
    (gas,) = store.episode("A").gases
    assert (gas.ph, gas.paco2, gas.at) == (7.25, 60, NOW + 5 * SECOND)
    later = entry.preview(store, "AB", NOW + 70 * SECOND, line("ph 7.28")).value
    assert later.questions == ()
    assert later.line.at == NOW + 70 * SECOND


def test_half_a_gas_beside_the_other_half_is_asked_about(store: Store) -> None:
    log(store, "01:00 ph 7.25")
    shown = entry.preview(store, "AB", NOW, line("01:03 paco2 60")).value
    told = " ".join(sentence(q) for q in shown.questions)
    assert told == (
        "The gas of 28-Mar-2026 01:00 has pH and no PaCO2. If both are of one sample, leave and log this with the "
        "time of that one before it."
    )
    log(store, "01:00 paco2 60")
    assert len(store.episode("A").gases) == 1


def test_a_gas_very_unlike_the_last_asks_whose_it_is(store: Store) -> None:
    log(store, "01:00 ph 7.49 paco2 32")
    shown = entry.preview(store, "AB", NOW, line("02:00 ph 7.10 paco2 95")).value
    told = " ".join(sentence(q) for q in shown.questions)
    assert "Very unlike the gas of 28-Mar-2026 01:00: pH 7.10, there 7.49; PaCO2 95 mmHg" in told
    with pytest.raises(RecordError):
        log(store, "02:00 ph 7.10 paco2 95")
    assert log(store, "02:00 ph 7.10 paco2 95", confirmed=True).ids
    assert not any(s.entry.doubt for s in store.episode("A").standing)
