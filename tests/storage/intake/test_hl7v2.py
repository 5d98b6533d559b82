"""Results by HL7 v2: line ends, value types, status, corrections, deletions, and whose they are."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

import pytest

from core.record.instant import iso
from core.record.knowledge import standing
from core.record.message import RecordError
from storage.intake.batch import take_in
from storage.intake.findings import Intake
from storage.intake.hl7v2 import read_hl7
from storage.intake.said import Said
from storage.intake.wall_times import parse_dtm
from storage.store import Store
from tests.storage.conftest import NOW
from tests.support.hl7_messages import gas, message, obx

Reader = Callable[..., Intake]
KNOWN = Said(episodes={"WARD-7|0042": "E1"})


@pytest.fixture
def read(tmp_path: Path) -> Reader:
    def run(*messages: str, said: Said = KNOWN, existing: Store | None = None, raw: bytes | None = None) -> Intake:
        path = tmp_path / "results.hl7"
        path.write_bytes("".join(messages).encode() if raw is None else raw)
        return read_hl7(path, now=NOW, said=said, existing=existing)

    return run


def taken(store: Store, intake: Intake) -> None:
    take_in(store, intake, by="AB", now=NOW, without_refused=True)


def now_standing(store: Store, channel: str, episode: str = "E1") -> list[tuple[float | None, bool]]:
    return [(s.entry.number, s.corrected) for s in standing(store.entries(episode)) if s.entry.channel == channel]


@pytest.mark.parametrize("end", ["\r", "\n", "\r\n"])
def test_a_gas_goes_in_with_its_site_unit_and_precision(read: Reader, end: str) -> None:
    intake = read(message(gas(ph="7.40"), end=end))
    assert not intake.refusals
    found = {d.entry.channel: d.entry for d in intake.entries}
    assert found.keys() == {"site", "identifier", "ph", "paco2", "pao2"}
    assert (found["ph"].raw, found["ph"].decimals) == ("7.40", 2)
    assert (found["paco2"].raw_unit, found["paco2"].number) == ("kPa", pytest.approx(60.755, abs=0.001))
    assert found["site"].words == "arterial"
    assert iso(found["ph"].at) == "2026-03-28T00:25:00+00:00"


def test_notes_escapes_and_transport_marks(read: Reader) -> None:
    text = message([*gas()[:1], "NTE|1|L|drawn \\T\\ sent", "NTE|2|L|on \\F\\ NIV\\.br\\calm"])
    raw = b"\x0b" + text.encode() + b"\x1c\r" + b"FHS|^~\\&|X\r" + message(gas(), order="F2").encode()
    intake = read(raw=raw)
    ph = next(d.entry for d in intake.entries if d.entry.channel == "ph")
    assert ph.note == "drawn & sent\non | NIV\ncalm"
    assert intake.source.facts["messages"] == "2"


@pytest.mark.parametrize(
    ("kind", "value", "expected"),
    [
        ("NM", "7.31", "7.31"), ("SN", "^7.31", "7.31"), ("SN", "=^7.31", "7.31"), ("ST", " 7.31 ", "7.31"),
        ("TX", "7.31", "7.31"),
    ],
)  # fmt: skip
def test_value_types(read: Reader, kind: str, value: str, expected: str) -> None:
    intake = read(message([obx("ph", value, kind=kind)]))
    assert [d.entry.raw for d in intake.entries if d.entry.channel == "ph"] == [expected]


@pytest.mark.parametrize(
    ("row", "key"),
    [
        (obx("pao2", ">^60", kind="SN"), "value.comparator"), (obx("pao2", "<8", kind="ST"), "value.comparator"),
        (obx("pao2", "^7^-^8", kind="SN"), "value.comparator"), (obx("ph", "seven"), "value.not_a_number"),
        (obx("paco2", "8.1", unit=""), "unit.missing"), (obx("paco2", "8.1", unit="g/dL"), "unit.unknown"),
        (obx("ph", "9.9"), "value.past_hard_limit"), (obx("ph", "7.3", status="Q"), "result.status_unknown"),
        (obx("ph", "7.3", at="20260328"), "time.date_only"), (obx("ph", "7.3", at="x"), "instant.unreadable"),
        (obx("ph", "7.3", at="209901010000+0000"), "instant.in_future"),
        (obx("ph", "7.3", at="190001010000+0000"), "instant.out_of_range"),
        (obx("ph", "x", kind="ED"), "value.not_a_number"),
    ],
)  # fmt: skip
def test_what_cannot_be_taken_is_refused_with_its_line(read: Reader, row: str, key: str) -> None:
    intake = read(message([row]))
    assert [(r.line, r.message.key) for r in intake.refusals] == [(4, key)]


def test_what_is_not_for_this_log_is_left_aside_with_the_reason(read: Reader) -> None:
    sodium = "OBX|1|NM|2951-2^Na^LN||140|mmol/L^^UCUM|||||F"
    intake = read(message([sodium, obx("ph", "", status="F"), obx("ph", "", status="I"), obx("ph", "", status="X")]))
    assert [a.message.key for a in intake.aside] == [
        "code.not_ours", "result.no_value", "result.not_yet", "result.nothing_to_withdraw",
    ]  # fmt: skip
    assert not intake.refusals


def test_the_code_counts_and_never_the_text_beside_it(read: Reader) -> None:
    row = obx("ph", "7.31").replace("^pH^", "^pCO2 in mmHg^").replace("[pH]^^UCUM", "[pH]^mmHg^UCUM")
    assert [d.entry.channel for d in read(message([row])).entries][-1] == "ph"


def test_a_local_code_is_read_where_a_person_gave_it_a_channel(read: Reader) -> None:
    row = obx("ph", "7.31").replace("2744-1^pH^LN", "PHA^pH^L")
    assert read(message([row])).aside[0].message.key == "code.not_ours"
    said = Said(episodes=KNOWN.episodes, codes={"L|PHA": "ph"})
    assert [d.entry.raw for d in read(message([row]), said=said).entries if d.entry.channel == "ph"] == ["7.31"]


# versions


def test_a_correction_supersedes_and_a_deletion_withdraws(read: Reader, store: Store) -> None:
    taken(store, read(message(gas()), existing=store))
    taken(store, read(message([obx("ph", "7.25", status="C")], sent="202603280100+0000"), existing=store))
    assert now_standing(store, "ph") == [(7.25, True)]
    taken(store, read(message([obx("paco2", "", status="D")], sent="202603280101+0000"), existing=store))
    assert now_standing(store, "paco2") == []
    assert len(now_standing(store, "pao2")) == 1
    assert store.verify() == ()


def test_repeats_bring_nothing_in_whatever_order_they_come(read: Reader, store: Store) -> None:
    original = message(gas())
    correction = message([obx("ph", "7.25", status="C")], sent="202603280100+0000")
    deletion = message([obx("pao2", "", status="X")], sent="202603280101+0000")
    taken(store, read(original, correction, deletion, existing=store))
    head = store.head()
    for texts in (
        (original,),
        (correction,),
        (deletion,),
        (original, original),
        (deletion, correction, original),
    ):
        again = read(*texts, said=Said(), existing=store)
        assert again.entries == (), texts
        assert again.repeated_in_store > 0
    assert store.head() == head
    assert now_standing(store, "ph") == [(7.25, True)]


def test_a_correction_back_to_the_first_value_counts(read: Reader, store: Store) -> None:
    for n, (value, status) in enumerate((("7.31", "F"), ("7.25", "C"), ("7.31", "C"))):
        text = message([obx("ph", value, status=status)], sent=f"20260328010{n}+0000")
        taken(store, read(text, existing=store))
    assert now_standing(store, "ph") == [(7.31, True)]


def test_a_correction_that_comes_alone_is_the_value(read: Reader, store: Store) -> None:
    taken(store, read(message([obx("ph", "7.25", status="C")]), existing=store))
    assert now_standing(store, "ph") == [(7.25, False)]


def test_a_preliminary_result_is_in_doubt_until_the_final_one(read: Reader, store: Store) -> None:
    preliminary = read(message([obx("ph", "7.31", status="P")]), existing=store)
    assert [d.message.key for d in preliminary.doubts] == ["result.preliminary"]
    taken(store, preliminary)
    taken(store, read(message([obx("ph", "7.31")], sent="202603280100+0000"), existing=store))
    assert now_standing(store, "ph") == [(7.31, True)]
    assert not [s.entry.doubt for s in standing(store.entries("E1")) if s.entry.doubt]


def test_two_sites_at_one_moment_never_mix(read: Reader) -> None:
    venous = obx("paco2", "9.0").replace("2019-8", "2021-4")
    intake = read(message([*gas()[:1], venous]))
    assert [r.message.key for r in intake.refusals] == ["gas.two_sites"]


# whose it is


def test_an_unknown_patient_is_asked_once_and_then_known(read: Reader, store: Store) -> None:
    text = message(gas())
    asked = read(text, said=Said(), existing=store)
    assert asked.unknown_patients == ("WARD-7|0042",)
    assert {r.message.key for r in asked.refusals} == {"patient.unknown"}
    taken(store, read(text, existing=store))
    later = read(message(gas(), order="F2", at="202603280125+0000"), said=Said(), existing=store)
    assert not later.refusals
    assert {d.entry.episode for d in later.entries} == {"E1"}
    assert "identifier" not in {d.entry.channel for d in later.entries}, "confirmed once is enough"


def test_one_episode_for_the_file_stands_for_one_patient(read: Reader) -> None:
    two = message(gas()) + message(gas(), patient="0043^^^WARD-7^MR", order="F2")
    intake = read(two, said=Said(episodes={"*": "E1"}))
    assert {r.message.key for r in intake.refusals} == {"patient.more_than_one"}
    assert {d.entry.episode for d in intake.entries} == {"E1"}


def test_a_patient_with_two_open_episodes_is_asked(read: Reader, store: Store) -> None:
    for episode, order in (("E1", "F1"), ("E2", "F2")):
        taken(
            store,
            read(message(gas(), order=order), said=Said(episodes={"WARD-7|0042": episode}), existing=store),
        )
    text = message(gas(), order="F3", at="202603280125+0000")
    assert {r.message.key for r in read(text, said=Said(), existing=store).refusals} == {"patient.several_episodes"}
    one = read(text, said=Said(episodes={"*": "E2"}), existing=store)
    assert {d.entry.episode for d in one.entries} == {"E2"}


def test_a_result_without_patient_needs_an_episode(read: Reader) -> None:
    text = message(gas(), patient="")
    assert {r.message.key for r in read(text, said=Said()).refusals} == {"patient.no_identifier"}
    assert not read(text, said=Said(episodes={"*": "E1"})).refusals


# messages and times


@pytest.mark.parametrize(
    ("raw", "key"),
    [
        (b"", "hl7.no_message"), (b"PID|1\r", "hl7.no_message"),
        (b"MSH|^~\\&|A\rOBX|" + b"x" * 200_000, "line.too_long"),
        (message(gas()).encode() + b"NTE|1||\xff\xfe\r", "file.encoding"), (b"MSH|^~\\&|\x00\r", "file.binary"),
        (b"MSH\rOBX|\xfc\r", "file.encoding"),  # found by mutation: a header that ends before its separator
    ],
)  # fmt: skip
def test_files_that_are_no_messages(read: Reader, raw: bytes, key: str) -> None:
    intake = read(raw=raw)
    assert (intake.whole, [r.message.key for r in intake.refusals]) == (False, [key])
    assert intake.entries == ()


def test_a_message_of_another_kind_is_refused(read: Reader) -> None:
    assert [r.message.key for r in read(message([], kind="ADT^A01")).refusals] == ["hl7.not_a_result"]


def test_the_character_set_that_the_message_names(read: Reader) -> None:
    text = message([*gas()[:1], "NTE|1||müde"]).replace("|2.5.1", "|2.5.1||||||8859/1")
    intake = read(raw=text.encode("latin-1"))
    assert next(d.entry.note for d in intake.entries if d.entry.channel == "ph") == "müde"


def test_a_time_without_offset_needs_a_zone(read: Reader) -> None:
    text = message(gas(), at="202603280125", sent="202603280130")
    assert {r.message.key for r in read(text).refusals} == {"time.needs_zone"}
    intake = read(text, said=Said(zone="Europe/Oslo", episodes=KNOWN.episodes))
    assert iso(next(d.entry.at for d in intake.entries if d.entry.channel == "ph")) == "2026-03-28T00:25:00+00:00"
    for shown, key in (("202510260230", "time.repeated"), ("202603290230", "time.skipped")):
        with pytest.raises(RecordError) as refused:
            parse_dtm(shown, "Europe/Oslo")
        assert refused.value.message.key == key


def test_cancelling_leaves_nothing(tmp_path: Path, store: Store) -> None:
    path = tmp_path / "results.hl7"
    path.write_text(message(gas()))
    with pytest.raises(RecordError) as refused:
        read_hl7(path, now=NOW, said=KNOWN, existing=store, cancelled=lambda: True)
    assert refused.value.message.key == "intake.cancelled"
    assert store.head() == 0
