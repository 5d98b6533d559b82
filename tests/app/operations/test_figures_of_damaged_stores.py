"""No figure of a plain store rests on a row that is not as it was written, however large the store."""

from __future__ import annotations

from collections.abc import Iterator
from pathlib import Path

import pytest

from app.operations import episode_shelf, figures, policy
from core.figures.json_form import to_json
from core.judgement.policy import policy_hash, shipped_text
from core.record.entries import NewEntry
from core.record.instant import MINUTE
from storage.errors import StoreError
from storage.row_proofs import COVERED
from storage.store import Store
from tests.support.command_line import run
from tests.support.flipped_figures import LATER, NOW, outcomes, small, told, used_bytes
from tests.support.tampered import tamper

READ = ("entry", "chunk", "batch", "source", "policy", "episode_now", "cache")


@pytest.fixture(autouse=True)
def _no_shelf() -> Iterator[None]:
    """A record that was read before the damage would be served from the shelf."""
    episode_shelf._shelves.clear()
    yield
    episode_shelf._shelves.clear()


@pytest.fixture(scope="module")
def kept(tmp_path_factory: pytest.TempPathFactory) -> bytes:
    return small(tmp_path_factory.mktemp("kept") / "ward.luff").read_bytes()


@pytest.fixture
def path(tmp_path: Path, kept: bytes) -> Path:
    store = tmp_path / "ward.luff"
    store.write_bytes(kept)
    return store


def test_a_flipped_bit_changes_no_figure(path: Path) -> None:
    """Every byte in its turn: `tests/soak/test_every_byte.py`."""
    found = outcomes(path, list(used_bytes(path, READ))[::197])
    assert "others" not in found, found["others"]
    assert found.keys() == {"same", "refused"}, "the flips were of bytes that matter, and of some that do not"


@pytest.mark.parametrize(
    "statement",
    [
        "UPDATE entry SET number = 7.4 WHERE channel = 'ph' AND seq = 6",
        "UPDATE entry SET at = at - 60000000 WHERE channel = 'paco2'",
        "UPDATE entry SET words = 'CPAP' WHERE channel = 'mode'",
        "UPDATE entry SET replaces = NULL WHERE action = 'correct'",
        "UPDATE entry SET episode_id = 'E3' WHERE channel = 'spo2'",
        "DELETE FROM entry WHERE channel = 'rr'",
        "DELETE FROM entry WHERE action = 'move'",
        "UPDATE batch SET recorded_at = recorded_at + 1 WHERE seq = 2",
        "UPDATE chunk SET channel = 'rr_total'",
        "UPDATE chunk SET t0 = t0 + 60000000",
        "DELETE FROM chunk",
        "UPDATE source SET id = 'other'",
        "UPDATE policy SET text = replace(text, '7.25', '7.15')",
        "UPDATE cache SET data = CAST('[[0, \"00\"], [0, \"00\"], []]' AS BLOB) WHERE key = 'episode/E1'",
        "DELETE FROM cache WHERE key = 'episode/E1'",
    ],
)
def test_figures_of_changed_rows_are_refused(path: Path, statement: str) -> None:
    tamper(path, statement)
    with Store.open(path, read_only=True) as store, pytest.raises(StoreError) as refused:
        figures.of_episode(store, "AB", LATER, figures.EpisodeRequest("E1", LATER))
    assert refused.value.message.key in ("store.episode_not_as_written", "store.not_as_written")


@pytest.mark.parametrize(
    "statement",
    [
        "UPDATE episode_now SET ended_at = 1 WHERE episode_id = 'E1'",
        "UPDATE episode_now SET first_seq = 99 WHERE episode_id = 'E1'",
        "DELETE FROM episode_now WHERE episode_id = 'E2'",
    ],
)
@pytest.mark.parametrize("everything", [False, True])
def test_no_ward_without_one_of_its_patients(path: Path, statement: str, everything: bool) -> None:
    tamper(path, statement)
    with Store.open(path, read_only=True) as store, pytest.raises(StoreError) as refused:
        figures.of_ward(store, "AB", LATER, figures.WardRequest(LATER, everything=everything))
    assert refused.value.message.key == "store.not_as_written"


def test_the_others_of_a_ward_stand_and_the_damaged_one_is_named(path: Path) -> None:
    """E2 cannot be told either: a value was moved from it to E1."""
    with Store.open(path) as store:
        new = NewEntry("E3", "rr", NOW, 22.0, None, "22", "/min", 0, "UTC", "AB")
        store.append([new], by="AB", operation="log", now=LATER)
    tamper(path, "UPDATE entry SET number = 90.0 WHERE channel = 'rr' AND episode_id = 'E1'")
    with Store.open(path, read_only=True) as store:
        answer = figures.of_ward(store, "AB", LATER, figures.WardRequest(LATER, episodes=("E1", "E2", "E3"))).value
    assert answer.unread == ("E1", "E2")
    assert [f.episode for f in answer.figures] == ["E3"]


def test_the_command_line_refuses_a_list_that_lacks_a_patient(path: Path, capsys: pytest.CaptureFixture[str]) -> None:
    tamper(path, "UPDATE entry SET number = 90.0 WHERE channel = 'rr'")
    code, out, err = run(capsys, "--store", str(path), "figures")
    assert (code, out) == (1, "")
    assert "What is kept of E1, E2 is not what was written" in err


def test_the_ledger_cut_off_or_its_time_changed_is_no_answer(path: Path) -> None:
    tamper(path, "UPDATE batch SET recorded_at = 1 WHERE seq = 3")
    with Store.open(path, read_only=True) as store, pytest.raises(StoreError):
        store.head_known_at(NOW + 2 * MINUTE)
    tamper(path, "DELETE FROM batch WHERE seq = 4")
    with Store.open(path, read_only=True) as store, pytest.raises(StoreError):
        policy.in_force(store)


@pytest.mark.parametrize(
    "older",
    [
        "DELETE FROM cache",  # it kept nothing beside the ledger
        f"UPDATE cache SET key = 'covered/0' WHERE key = '{COVERED}'",  # it summed up in another way
    ],
)
def test_a_store_of_an_older_program_gets_its_proofs_when_it_is_opened_for_writing(path: Path, older: str) -> None:
    truth = told(path)
    tamper(path, older)
    with Store.open(path, read_only=True) as store:
        assert not store.proves_rows
    assert told(path) == truth
    with Store.open(path) as store:
        assert store.proves_rows
        assert store.verify() == ()
    assert told(path) == truth
    tamper(path, "UPDATE entry SET number = 90.0 WHERE channel = 'rr'")
    with pytest.raises(StoreError):
        told(path)


def test_no_proof_vouches_for_what_the_chain_does_not(path: Path) -> None:
    tamper(path, "DELETE FROM cache", "UPDATE entry SET number = 90.0 WHERE channel = 'rr'")
    with Store.open(path) as store:
        assert not store.proves_rows


def test_what_an_older_program_wrote_between_lets_the_proofs_go_and_an_opening_makes_them_anew(path: Path) -> None:
    tamper(path, f"UPDATE cache SET data = CAST('3' AS BLOB) WHERE key = '{COVERED}'")
    new = NewEntry("E1", "rr", NOW, 22.0, None, "22", "/min", 0, "UTC", "AB")
    with Store.open(path, read_only=True) as store:
        assert not store.proves_rows
    with Store.open(path) as store:
        store.append([new], by="AB", operation="log", now=LATER)
        assert store.proves_rows
        assert store.verify() == ()


def test_an_older_policy_that_is_damaged_takes_no_figure_away(path: Path) -> None:
    with Store.open(path) as store:
        text = shipped_text() + "\n# of this ward"
        store.put_policy(text, policy_hash(text), "AB", LATER)
    tamper(path, "UPDATE policy SET text = replace(text, '7.25', '7.15') WHERE seq = 1")
    with Store.open(path, read_only=True) as store:
        assert policy.found(store).passed_over == ()
        now = figures.EpisodeRequest("E1", LATER)
        made = figures.of_episode(store, "AB", LATER, now).value.figures
        assert to_json(made, lambda m: m.key)["policy"] == policy_hash(text)
        with pytest.raises(StoreError):  # a look back would judge by the damaged one
            figures.of_episode(store, "AB", LATER, figures.EpisodeRequest("E1", LATER, NOW + MINUTE))
