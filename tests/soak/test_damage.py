"""Damage: every byte of an encrypted store, every readable value of a plain one; and inputs made to break it.

Run with `python -m pytest -m soak tests/soak`.
"""

from __future__ import annotations

import os
import random
from pathlib import Path

import pytest

from core.record.message import RecordError
from storage.intake.log_csv import read_log_csv
from storage.keys import envelope_path
from storage.store import Store, StoreError
from tests.support.flips import NOW, SECRET, filled, mutated, outcomes, read_all

pytestmark = [pytest.mark.soak, pytest.mark.timeout(7200)]
STEP = int(os.environ.get("LUFF_FLIP_STEP", "61"))
FUZZ = int(os.environ.get("LUFF_FUZZ", "100000"))


@pytest.mark.parametrize("encrypted", [False, True])
def test_flipped_bytes(tmp_path: Path, encrypted: bool, capsys: pytest.CaptureFixture[str]) -> None:
    path = filled(tmp_path / "ward.luff", encrypted=encrypted)
    found = outcomes(path, range(0, path.stat().st_size, STEP), encrypted=encrypted)
    with capsys.disabled():
        print(f"\nflips ({'encrypted' if encrypted else 'plain'}): { {k: len(v) for k, v in found.items()} }")
    assert "wrong" not in found, found["wrong"]
    if encrypted:
        assert "same" not in found, found["same"]


def test_mutated_stores_open_or_are_refused(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    chance = random.Random(13)
    sound = {e: filled(tmp_path / f"{e}.luff", encrypted=e).read_bytes() for e in (False, True)}
    envelope = envelope_path(tmp_path / "True.luff").read_bytes()
    counts = {"opened": 0, "refused": 0}
    for n in range(FUZZ // 10):
        encrypted = n % 3 == 0
        path = tmp_path / "fuzzed.luff"
        path.write_bytes(mutated(sound[encrypted], chance))
        key = envelope_path(path)
        key.write_bytes(mutated(envelope, chance) if n % 2 else envelope)
        try:
            with Store.open(path, passphrase=SECRET) as store:
                store.verify()
                read_all(store)
            counts["opened"] += 1
        except (StoreError, RecordError):
            counts["refused"] += 1
        for left in tmp_path.glob("fuzzed.luff*"):
            left.unlink()
    with capsys.disabled():
        print(f"\nmutated stores: {counts}")


def test_mutated_backups_restore_whole_or_not_at_all(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    chance = random.Random(17)
    sound = filled(tmp_path / "a.luff", encrypted=False).read_bytes()
    with Store.open(tmp_path / "a.luff") as store:
        truth = read_all(store)
    counts = {"restored": 0, "refused": 0}
    for _ in range(FUZZ // 20):
        (tmp_path / "bad.luff").write_bytes(mutated(sound, chance))
        new = tmp_path / "new.luff"
        try:
            Store.restore(tmp_path / "bad.luff", new)
            counts["restored"] += 1
            with Store.open(new) as store:
                assert read_all(store)[:4] == truth[:4]
        except (StoreError, RecordError):
            counts["refused"] += 1
            assert not new.exists()
        for left in tmp_path.glob("new.luff*"):
            left.unlink()
    with capsys.disabled():
        print(f"\nmutated backups: {counts}")


def test_mutated_logs_are_read_or_refused(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    chance = random.Random(19)
    header = "episode,at,channel,value,unit,by,note,id,replaces,action,zone,recorded_at,reason,leak_definition\n"
    rows = [
        'E1,2026-03-28T01:00:00+00:00,note,"a, ""b""\nc",,AB,,,,,,,,\n',
        "E1,2026-03-28T01:00:00+00:00,ph,7.25,,AB,,r1,,,Europe/Oslo,2026-03-28T01:10:00Z,,\n",
        "E1,2026-03-28T01:00:00+00:00,ph,7.26,,AB,,r2,r1,correct,,2026-03-28T01:20:00Z,misread,\n",
        "E1,2026-03-28T01:00:00+00:00,ipap,16,cmH2O,AB,,,,,,,,\n",
        *(f"E1,2026-03-28T01:{i:02d}:00Z,leak,{i},L/min,device,,,,,,,,total\n" for i in range(40)),
    ]
    sound = (header + "".join(rows)).encode()
    path = tmp_path / "log.csv"
    counts = {"taken": 0, "refused": 0}
    for _ in range(FUZZ):
        path.write_bytes(mutated(sound, chance))
        intake = read_log_csv(path, now=NOW)
        counts["refused" if intake.refusals else "taken"] += 1
    with capsys.disabled():
        print(f"\nmutated logs: {counts}")
