"""Intake of the log file: what is right is taken whole, what is wrong is named by its line, the store untouched."""

from __future__ import annotations

from pathlib import Path

import pytest

from core.record.instant import HOUR, MINUTE, parse
from core.record.message import RecordError
from storage.intake.batch import take_in
from storage.intake.log_csv import read_log_csv
from storage.store import Store
from tests.storage.conftest import NOW
from tests.support.log_rows import AT, FULL, HEADER, Reader, refused


def test_a_shift_goes_in_and_comes_out(read: Reader, store: Store) -> None:
    intake = read(
        f"E1,{AT},label,Bed 3,,AB,",
        f"E1,{AT},ipap,16,cmH2O,AB,",
        f"E1,{AT},epap,6,cmH2O,AB,as tolerated",
        f"E1,{AT},fio2,35,%,AB,",
        f'E1,{AT},note,"said ""better"", sat up",,AB,',
        f"E1,{AT},paco2,8.0,kPa,AB,",
        f"E1,{AT},leak,24,L/min,device,",
        "E1,2026-03-28T01:01:00+00:00,leak,26,L/min,device,",
        f"E1,{AT},mask_adjusted,,,AB,",
    )
    assert refused(intake) == []
    assert (len(intake.entries), intake.sample_count, intake.episodes) == (7, 2, ("E1",))
    receipt = take_in(store, intake, by="AB", now=NOW)
    assert receipt is not None
    assert receipt.last_seq == store.head()
    episode = store.episode("E1")
    assert episode.label == "Bed 3"
    assert episode.number("paco2").v[0] == pytest.approx(60.0, abs=0.01)
    assert episode.number("fio2").v.tolist() == [0.35]
    assert episode.text("note").v == ('said "better", sat up',)
    assert episode.number("leak").v.tolist() == [24, 26]
    assert not episode.number("leak").spot.any()
    assert episode.text("mask_adjusted").v == ("",)
    (epap,) = [s.entry for s in episode.standing if s.entry.channel == "epap"]
    assert (epap.note, epap.by, epap.raw_unit) == ("as tolerated", "AB", "cmH2O")
    assert store.verify() == ()


@pytest.mark.parametrize(
    ("row", "column", "key"),
    [
        (f"E1,{AT},pulseox,20,,AB,", "channel", "channel.unknown"),
        (f"E1,{AT},rr,20,psi,AB,", "unit", "unit.unknown"),
        (f"E1,{AT},rr,500,/min,AB,", "value", "value.past_hard_limit"),
        (f"E1,{AT},rr,many,/min,AB,", "value", "value.not_a_number"),
        (f"E1,{AT},rr,,/min,AB,", "value", "value.not_a_number"),
        (f"E1,{AT},mode,warp,,AB,", "value", "value.not_a_choice"),
        ("E1,2026-03-28T01:00:00,rr,20,/min,AB,", "at", "instant.no_offset"),
        ("E1,last night,rr,20,/min,AB,", "at", "instant.unreadable"),
        ("E1,2026-03-28T02:05:01+00:00,rr,20,/min,AB,", "at", "instant.in_future"),
        (f",{AT},rr,20,/min,AB,", "episode", "entry.no_episode"),
        (f"E1,{AT},rr,20,/min,AB", "", "row.columns"),
        (f"E1,{AT},rr,20,/min,AB,,,", "", "row.columns"),
        (f"E1,{AT},leak,500,L/min,device,", "value", "value.past_hard_limit"),
        (f"E1,{AT},leak,24,psi,device,", "unit", "unit.unknown"),
        (f"E1,{AT},leak,=1+1,L/min,device,", "value", "value.not_a_number"),
        ("E1,2026-03-28T02:05:01+00:00,leak,24,L/min,device,", "at", "instant.in_future"),
        ("E1,2026-02-30T01:00:00+00:00,leak,24,L/min,device,", "at", "instant.unreadable"),
        (f"E1,{AT},rr,NaN,/min,AB,", "value", "value.not_a_number"),
        (f"E1,{AT},rr,1e2,/min,AB,", "value", "value.not_a_number"),
    ],
)
def test_a_bad_row_is_named_and_the_file_refused_whole(
    read: Reader, store: Store, row: str, column: str, key: str
) -> None:
    intake = read(f"E1,{AT},hr,80,/min,AB,", row, f"E1,{AT},leak,24,L/min,device,", existing=store)
    assert refused(intake)[0] == (3, column, key)
    assert intake.refused_rows == 1
    if column:
        accepted = intake.refusals[0].message.values
        assert "accepted" in accepted or key.startswith("instant")
    with pytest.raises(RecordError, match=r"intake.refused"):
        take_in(store, intake, by="AB", now=NOW)
    assert store.head() == 0


def test_a_time_may_lead_the_clock_by_five_minutes(read: Reader) -> None:
    assert refused(read("E1,2026-03-28T02:05:00+00:00,rr,20,/min,AB,")) == []


def test_every_fault_of_a_row_is_reported(read: Reader) -> None:
    intake = read("E1,yesterday,rr,500,/min,AB,")
    assert refused(intake) == [(2, "at", "instant.unreadable"), (2, "value", "value.past_hard_limit")]
    assert intake.refused_rows == 1


@pytest.mark.parametrize(
    ("raw", "line", "key"),
    [
        (b"", 1, "file.empty"),
        (b"\n\n", 1, "file.empty"),
        (b"E1,2026-03-28T01:00:00+00:00,rr,20,/min,AB,\n", 1, "header.missing"),
        (b"episode,at,channel,value,by,note\n", 1, "header.lacks"),
        (b"episode,at,channel,value,unit,by,note,colour\n", 1, "header.unknown"),
        (b"episode,at,channel,value,unit,by,note,note\n", 1, "header.double"),
        (bytes(range(256)) * 10, 1, "file.binary"),
        (b"\x89PNG\r\n\x1a\n\x00\x00", 1, "file.binary"),
        ("\ufeff".encode("utf-16-le") + HEADER.encode("utf-16-le"), 1, "file.encoding"),
        (HEADER.encode() + b"\nE1,2026-03-28T01:00:00+00:00,label,Bett f\xfcnf,,AB,\n", 2, "file.encoding"),
        (HEADER.encode() + b"\n" + b"x" * 140_000, 2, "line.too_long"),
        (HEADER.encode() + b'\nE1,2026-03-28T01:00:00+00:00,note,"never closed,,AB,\n', 2, "row.quotes"),
    ],
)  # fmt: skip
def test_a_file_that_is_no_log_is_refused(read: Reader, store: Store, raw: bytes, line: int, key: str) -> None:
    intake = read(raw=raw)
    assert [(r.line, r.message.key) for r in intake.refusals] == [(line, key)]
    assert not intake.whole
    with pytest.raises(RecordError, match=r"intake.refused"):
        take_in(store, intake, by="AB", now=NOW, without_refused=True)


def test_a_byte_order_mark_and_windows_line_ends_are_taken(read: Reader) -> None:
    rows = f"\ufeff{HEADER}\r\nE1,{AT},rr,20,/min,AB,\r\nE1,{AT},leak,24,L/min,device,\r\n"
    intake = read(raw=rows.encode())
    assert refused(intake) == []
    assert (len(intake.entries), intake.sample_count) == (1, 1)


def test_columns_may_stand_in_any_order(read: Reader) -> None:
    intake = read(f"AB,20,rr,,{AT},/min,E1", header="by,value,channel,note,at,unit,episode")
    assert refused(intake) == []
    assert intake.entries[0].entry.number == 20


def test_a_row_repeated_in_the_file_is_refused_where_it_stands_again(read: Reader) -> None:
    person, machine = f"E1,{AT},rr,20,/min,AB,", f"E1,{AT},leak,24,L/min,device,"
    intake = read(person, machine, person, machine)
    assert [(r.line, r.message.key, r.message.values["first_line"]) for r in intake.refusals] == [
        (4, "row.repeated", 2),
        (5, "row.repeated", 3),
    ]


def test_ipap_must_exceed_epap_over_the_settings_in_force(read: Reader, store: Store) -> None:
    take_in(store, read(f"E1,{AT},ipap,16,,AB,", f"E1,{AT},epap,6,,AB,"), by="AB", now=NOW)
    later = "2026-03-28T01:30:00+00:00"
    assert refused(read(f"E1,{later},epap,16,,AB,", existing=store)) == [(2, "value", "settings.ipap_not_above_epap")]
    both = read(f"E1,{later},epap,16,,AB,", f"E1,{later},ipap,22,,AB,", existing=store)
    assert refused(both) == []


def test_a_contradiction_that_a_late_entry_brings_is_a_warning(read: Reader, store: Store) -> None:
    take_in(store, read(f"E1,{AT},ipap,16,,AB,", f"E1,{AT},epap,6,,AB,"), by="AB", now=NOW)
    take_in(store, read("E1,2026-03-28T01:50:00+00:00,ipap,10,,AB,", existing=store), by="AB", now=NOW)
    late = read("E1,2026-03-28T01:20:00+00:00,epap,12,,AB,", existing=store)
    assert refused(late) == []
    assert [(d.line, d.message.key) for d in late.doubts] == [(2, "settings.late_contradiction")]


def test_pressures_do_not_contradict_under_cpap(read: Reader) -> None:
    intake = read(f"E1,{AT},mode,CPAP,,AB,", f"E1,{AT},ipap,8,,AB,", f"E1,{AT},epap,8,,AB,")
    assert refused(intake) == []


def test_a_soft_limit_marks_the_entry_doubtful(read: Reader) -> None:
    intake = read(f"E1,{AT},rr,52,/min,AB,")
    assert intake.entries[0].entry.doubt == "doubt.unusual"
    assert [(d.line, d.message.key) for d in intake.doubts] == [(2, "doubt.unusual")]


def test_a_gas_that_does_not_agree_with_itself_is_marked(read: Reader) -> None:
    rows = [
        f"E1,{AT},{c},{v},{u},AB," for c, v, u in (("ph", "7.25", ""), ("paco2", "68", "mmHg"), ("hco3", "22", ""))
    ]
    intake = read(*rows)
    assert {d.entry.doubt for d in intake.entries} == {"gas.inconsistent"}
    assert refused(intake) == []


def test_two_values_of_one_moment_are_said(read: Reader) -> None:
    intake = read(f"E1,{AT},rr,20,/min,AB,", f"E1,{AT},rr,26,/min,AB,")
    assert [(d.line, d.message.key, d.message.values["first_line"]) for d in intake.doubts] == [
        (3, "row.two_values", 2)
    ]


def test_the_definition_of_leak_becomes_an_entry_where_it_is_new(read: Reader, store: Store) -> None:
    header = HEADER + ",leak_definition"
    rows = [
        "E1,2026-03-28T01:01:00+00:00,leak,26,L/min,device,,total",
        f"E1,{AT},leak,24,L/min,device,,total",
    ]
    intake = read(*rows, header=header)
    (draft,) = intake.entries
    assert (draft.entry.channel, draft.entry.words, draft.entry.at) == ("leak_definition", "total", parse(AT))
    take_in(store, intake, by="AB", now=NOW)
    later = read("E1,2026-03-28T01:30:00+00:00,leak,24,L/min,device,,total", header=header, existing=store)
    assert later.entries == ()
    changed = read("E1,2026-03-28T01:40:00+00:00,leak,24,L/min,device,,unintentional", header=header, existing=store)
    assert [d.entry.words for d in changed.entries] == ["unintentional"]
    wrong = read(f"E1,{AT},leak,24,L/min,device,,mostly", header=header)
    assert refused(wrong) == [(2, "leak_definition", "value.not_a_choice")]


@pytest.mark.parametrize(
    ("tail", "column", "key"),
    [
        (",,nobody,correct,,", "replaces", "entry.replaces_unknown"),
        (",,,correct,,", "replaces", "entry.replaces_unknown"),
        (",,,overwrite,,", "action", "row.unknown_action"),
        (",,,,,Mars/Base", "zone", "row.unknown_zone"),
        (",,,,,../../etc/passwd", "zone", "row.unknown_zone"),
        ("soon,,,,,", "recorded_at", "instant.unreadable"),
    ],
)
def test_optional_columns_are_checked(read: Reader, tail: str, column: str, key: str) -> None:
    assert refused(read(f"E1,{AT},rr,20,/min,AB,,{tail}", header=FULL)) == [(2, column, key)]


def test_a_file_may_withdraw_move_mask_and_shift(read: Reader, store: Store) -> None:
    rows = [f"E1,{AT},rr,20,/min,AB,,,r1,,,,", f"E1,{AT},hr,80,/min,AB,,,h1,,,,"]
    rows += [f"E1,2026-03-28T01:0{i}:00+00:00,leak,{i},L/min,device,,,,,,," for i in range(4)]
    take_in(store, read(*rows, header=FULL), by="AB", now=NOW)
    acts = [
        f"E1,{AT},rr,,,AB,,,,r1,withdraw,wrong bed,",
        f"E2,{AT},hr,80,/min,AB,,,,h1,move,wrong bed,",
        "E1,2026-03-28T01:01:00+00:00,leak,2026-03-28T01:02:00+00:00,,AB,,,,,mask,suction,",
        "E1,2026-03-28T01:03:00+00:00,leak,3600,,AB,,,,,shift,clock off,",
    ]
    intake = read(*acts, header=FULL, existing=store)
    assert refused(intake) == []
    take_in(store, intake, by="AB", now=NOW)
    episode = store.episode("E1")
    assert len(episode.number("rr")) == len(episode.number("hr")) == 0
    assert store.episode("E2").number("hr").v.tolist() == [80]
    assert episode.number("leak").v.tolist() == [0, 3]
    assert int(episode.number("leak").t[1]) == parse(AT) + 3 * MINUTE + HOUR
    assert store.verify() == ()


def test_a_device_row_without_a_value_is_a_gap(read: Reader, store: Store) -> None:
    rows = [f"E1,2026-03-28T01:0{i}:00+00:00,leak,{v},L/min,device," for i, v in enumerate(("1", "", "3"))]
    take_in(store, read(*rows), by="AB", now=NOW)
    (block,) = store.samples("E1")
    assert [str(x) for x in block.v] == ["1.0", "nan", "3.0"]


def test_a_remark_on_a_device_row_is_kept_as_a_note(read: Reader, store: Store) -> None:
    take_in(store, read(f"E1,{AT},leak,24,L/min,device,mask off"), by="AB", now=NOW)
    assert store.episode("E1").text("note").v == ("mask off",)
    assert store.episode("E1").number("leak").v.tolist() == [24]


def test_a_person_may_leave_refused_rows_out_and_that_is_recorded(read: Reader, store: Store) -> None:
    intake = read(f"E1,{AT},rr,20,/min,AB,", f"E1,{AT},rr,500,/min,AB,")
    take_in(store, intake, by="AB", now=NOW, without_refused=True)
    assert store.episode("E1").number("rr").v.tolist() == [20]
    with store._opened.database.read() as c:
        from sqlalchemy import text

        assert '"left_out_lines": "3"' in str(c.execute(text("select facts from source")).scalar())


def test_text_stays_text(read: Reader, store: Store) -> None:
    """Formulas, SQL, markup and path tricks are words like any other."""
    evil = ["=cmd|' /C calc'!A0", "'; DROP TABLE entry; --", "<b onload=x>&lt;", "../../x\\..\\y", "%s%n{0}"]
    rows = [f'E{i},{AT},label,"{text}",,AB,' for i, text in enumerate(evil)]
    take_in(store, read(*rows), by="AB", now=NOW)
    assert [store.episode(f"E{i}").label for i in range(len(evil))] == evil
    assert store.verify() == ()


def test_progress_is_told_and_reading_can_be_cancelled(tmp_path: Path) -> None:
    path = tmp_path / "log.csv"
    path.write_text(HEADER + "\n" + f"E1,{AT},rr,20,/min,AB,\n")
    told: list[tuple[int, int]] = []
    read_log_csv(path, now=NOW, progress=lambda done, total: told.append((done, total)))
    assert told[-1] == (path.stat().st_size, path.stat().st_size)
    with pytest.raises(RecordError, match=r"intake.cancelled"):
        read_log_csv(path, now=NOW, cancelled=lambda: True)
