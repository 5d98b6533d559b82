"""Every byte of a store flipped in turn, and every page of it destroyed in turn."""

from __future__ import annotations

import os
import random
from pathlib import Path

import pytest

from storage.salvage import salvage
from storage.store import Store
from storage.store_file import data_key
from tests.support import flipped_figures
from tests.support.flips import (
    CHEAP,
    NOW,
    SECRET,
    changed_by_flips,
    filled,
    missed_by_pages,
    outcomes,
    small,
)

pytestmark = [pytest.mark.soak, pytest.mark.timeout(7200)]
STEP = int(os.environ.get("LUFF_FLIP_STEP", "1"))
"""Bytes from one flip to the next."""
PAGE = 4096


def test_every_byte_of_a_plain_store(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = small(tmp_path / "ward.luff", encrypted=False)
    found = changed_by_flips(path, range(0, path.stat().st_size, STEP))
    with capsys.disabled():
        print(f"\nplain, {path.stat().st_size} bytes: { {k: len(v) for k, v in sorted(found.items())} }")
    assert "wrong" not in found, found["wrong"]


def test_figures_of_a_plain_store_of_which_every_byte_in_use_is_flipped(
    tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    """Every byte in use on each page that figures are read from: the same figures, or a refusal."""
    path = flipped_figures.small(tmp_path / "ward.luff")
    tables = ("entry", "chunk", "batch", "source", "policy", "document", "person_event", "episode_now", "cache")
    places = list(flipped_figures.used_bytes(path, tables))[::STEP]
    found = flipped_figures.outcomes(path, places)
    with capsys.disabled():
        print(f"\nfigures, {len(places)} bytes: { {k: len(v) for k, v in sorted(found.items())} }")
    assert "others" not in found, found["others"]


def test_every_byte_of_an_encrypted_store(tmp_path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    path = small(tmp_path / "ward.luff", encrypted=True)
    places = range(0, path.stat().st_size, STEP)
    missed = missed_by_pages(path, data_key(path, SECRET) or b"", places)
    with capsys.disabled():
        print(f"\nencrypted, {path.stat().st_size} bytes: {len(places) - len(missed)} of {len(places)} flips found")
    assert missed == []


@pytest.mark.parametrize("encrypted", [False, True])
def test_bytes_of_a_fuller_store_through_its_own_door(
    tmp_path: Path, encrypted: bool, capsys: pytest.CaptureFixture[str]
) -> None:
    path = filled(tmp_path / "ward.luff", encrypted=encrypted)
    found = outcomes(path, range(0, path.stat().st_size, 331 * STEP), encrypted=encrypted)
    with capsys.disabled():
        print(f"\nthrough the door ({encrypted=}): { {k: len(v) for k, v in sorted(found.items())} }")
    assert "wrong" not in found, found["wrong"]
    if encrypted:
        assert "same" not in found, found["same"]


@pytest.mark.parametrize("encrypted", [False, True])
def test_every_page_destroyed_in_turn_and_salvaged(
    tmp_path: Path, encrypted: bool, capsys: pytest.CaptureFixture[str]
) -> None:
    path, secret, dice = (
        filled(tmp_path / "ward.luff", encrypted=encrypted),
        SECRET if encrypted else None,
        random.Random(3),
    )
    with Store.open(path, passphrase=secret) as store:
        truth = {e.id: e for k in store.episode_keys() for e in store.entries(k)}
    sound, saved = path.read_bytes(), []
    for page in range(len(sound) // PAGE):
        start = page * PAGE
        path.write_bytes(sound[:start] + dice.randbytes(PAGE) + sound[start + PAGE :])
        found = salvage(path, tmp_path / f"new{page}.luff", secret, by="AB", now=NOW, cost=CHEAP)
        with Store.open(found.new, passphrase=secret) as store:
            assert store.verify() == ()
            kept = [e for k in store.episode_keys() for e in store.entries(k)]
            assert all(e.doubt or (e.number, e.at) == (truth[e.id].number, truth[e.id].at) for e in kept)
        saved.append(len(kept))
    with capsys.disabled():
        print(f"\n{len(saved)} pages destroyed in turn ({encrypted=}): of {len(truth)} entries saved: "
              f"{ {n: saved.count(n) for n in sorted(set(saved))} }")  # fmt: skip
    assert sum(n == len(truth) for n in saved) >= len(saved) - 3, "only a page that holds entries costs any"
