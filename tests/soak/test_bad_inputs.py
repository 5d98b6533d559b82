"""Bad inputs in their thousands: for opening, restoring, salvaging and every reader of files. None crashes, hangs or
leaves half of anything.
"""

from __future__ import annotations

import os
from pathlib import Path

import pytest

from core.record.message import RecordError
from storage.intake.log_csv import read_log_csv
from storage.store import Store
from tests.storage.intake.test_fuzz import fuzz as fuzz_readers
from tests.support import bad_stores
from tests.support.flips import NOW
from tests.support.mutations import Edit, changed, fuzz

pytestmark = [pytest.mark.soak, pytest.mark.timeout(14400)]
FUZZ = int(os.environ.get("LUFF_FUZZ", "100000"))
"""Bad inputs for opening, restoring and intake of logs together, and as many for the readers of all files."""
SLOWEST = 60.0
HEADER = "episode,at,channel,value,unit,by,note,id,replaces,action,zone,recorded_at,reason,leak_definition\n"
ROWS = [
    'E1,2026-03-28T01:00:00+00:00,note,"a, ""b""\nc",,AB,,,,,,,,\n',
    "E1,2026-03-28T01:00:00+00:00,ph,7.25,,AB,,r1,,,Europe/Oslo,2026-03-28T01:10:00Z,,\n",
    "E1,2026-03-28T01:00:00+00:00,ph,7.26,,AB,,r2,r1,correct,,2026-03-28T01:20:00Z,misread,\n",
    "E1,2026-03-28T01:00:00+00:00,ipap,16,cmH2O,AB,,,,,,,,\n",
    *(f"E1,2026-03-28T01:{i:02d}:00Z,leak,{i},L/min,device,,,,,,,,total\n" for i in range(40)),
]


@pytest.mark.parametrize("encrypted", [False, True])
def test_bad_stores_are_opened_or_refused(
    tmp_path: Path, encrypted: bool, capsys: pytest.CaptureFixture[str]
) -> None:
    tally = fuzz(FUZZ // 10, 100, bad_stores.opening(tmp_path, encrypted=encrypted))
    with capsys.disabled():
        print(f"\nopening ({encrypted=}): {tally}")
    assert tally.slowest < SLOWEST


def test_bad_key_files_are_refused(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    tally = fuzz(FUZZ // 10, 200, bad_stores.opening(tmp_path, encrypted=True, key_too=True))
    with capsys.disabled():
        print(f"\nkey files: {tally}")
    assert tally.slowest < SLOWEST


@pytest.mark.parametrize("encrypted", [False, True])
def test_bad_backups_restore_whole_or_not_at_all(
    tmp_path: Path, encrypted: bool, capsys: pytest.CaptureFixture[str]
) -> None:
    tally = fuzz(FUZZ // 20, 300, bad_stores.restoring(tmp_path, encrypted=encrypted))
    with capsys.disabled():
        print(f"\nrestoring ({encrypted=}): {tally}")
    assert tally.slowest < SLOWEST


@pytest.mark.parametrize("encrypted", [False, True])
def test_bad_stores_are_salvaged_without_making_anything_up(
    tmp_path: Path, encrypted: bool, capsys: pytest.CaptureFixture[str]
) -> None:
    tally = fuzz(FUZZ // 100, 400, bad_stores.salvaging(tmp_path, encrypted=encrypted))
    with capsys.disabled():
        print(f"\nsalvaging ({encrypted=}): {tally}")
    assert tally.slowest < SLOWEST


def test_bad_logs_are_taken_whole_or_not_at_all(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    from app.operations.intake import TakeRequest, take

    sound, path = (HEADER + "".join(ROWS)).encode(), tmp_path / "log.csv"
    with Store.create(tmp_path / "ward.luff", now=NOW) as store:

        def tried(made: list[Edit]) -> str:
            path.write_bytes(changed(sound, made))
            head = store.head()
            intake = read_log_csv(path, now=NOW, existing=store)
            if intake.refusals:
                assert store.head() == head
                return "refused"
            try:
                taken = take(store, "AB", NOW, TakeRequest(intake)).value
            except RecordError:
                assert store.head() == head
                return "refused"
            assert (store.head() > head) == bool(taken.entries + taken.samples), "half of a file"
            return "taken"

        tally = fuzz(FUZZ * 6 // 10, 500, tried)
        with capsys.disabled():
            print(f"\nlogs: {tally}")
        assert store.verify() == ()
    assert tally.slowest < SLOWEST


def test_bad_files_of_every_kind_are_read_or_refused(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    """Logs, tables as CSV, XLSX and ODS, HL7 v2 and FHIR JSON, in turn."""
    with Store.create(tmp_path / "ward.luff", now=NOW) as store:
        refused = fuzz_readers(tmp_path, store, FUZZ, 3)
        with capsys.disabled():
            print(f"\nfiles of every kind: {FUZZ} read, refused: {refused}")
        assert store.verify() == ()
