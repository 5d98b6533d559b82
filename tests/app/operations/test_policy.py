"""The policy in a store: its own copy, entries of the ledger, the last good one where a newer cannot be read."""

import json
from collections.abc import Iterator
from pathlib import Path

import pytest

from app.operations import entry, episode, figures, flag, policy
from app.operations import store as stores
from app.words import sentence
from core.judgement.policy import policy_hash, read_policy, shipped_policy, shipped_text
from core.record.entries import Action
from core.record.instant import HOUR, MINUTE, parse
from core.record.message import RecordError
from storage.store import Store

NOW = parse("2026-03-28T02:30:00Z")
WARD = shipped_text().replace("limits = { ph = 7.25 }", "limits = { ph = 7.2 }").replace(
    'name = "Shipped policy"', 'name = "Ward 7"')  # fmt: skip


@pytest.fixture
def store(tmp_path: Path) -> Iterator[Store]:
    with Store.create(tmp_path / "ward.luffmark", now=NOW - 9 * HOUR) as made:
        yield made


def test_a_store_gets_its_own_copy_once(store: Store) -> None:
    assert policy.show(store, "AB", NOW, None).value.is_shipped
    assert policy.begin(store, "AB", NOW, None).value
    assert not policy.begin(store, "AB", NOW, None).value
    found = policy.show(store, "AB", NOW, None).value
    assert (found.is_shipped, found.text, found.by, found.at) == (False, shipped_text(), "AB", NOW)
    assert len(policy.history(store, "AB", NOW, None).value) == 1


def test_a_new_policy_is_an_entry_in_the_ledger_and_can_be_taken_back(store: Store) -> None:
    policy.begin(store, "AB", NOW, None)
    head, chain = store.head(), store.head_hash()
    made = policy.put(store, "CD", NOW + MINUTE, WARD)
    assert made.head == store.head() == head + 1
    assert store.head_hash() != chain
    assert store.verify() == ()
    assert policy.in_force(store).markers["ph_below_severe"].limits["ph"] == 7.2
    assert policy.in_force(store, head).hash == shipped_policy().hash
    policy.put(store, "CD", NOW + 2 * MINUTE, shipped_text())
    told = policy.history(store, "CD", NOW, None).value
    assert [(k.name, k.by) for k in told] == [("Shipped policy", "CD"), ("Ward 7", "CD"), ("Shipped policy", "AB")]


def test_a_text_with_a_fault_changes_nothing(store: Store) -> None:
    policy.begin(store, "AB", NOW, None)
    head = store.head()
    with pytest.raises(RecordError):
        policy.put(store, "AB", NOW, shipped_text().replace("ph = 7.25", "ph = 72.5"))
    assert store.head() == head


@pytest.mark.parametrize(
    ("text", "hash", "why"),
    [
        ("not = [toml", None, "cannot be read"),
        (WARD.replace("limits = { ph = 7.2 }", "limits = { ph_of_later = 7.2 }"), None, "lacks limits.ph"),
        (WARD + "\n[a_section_of_later]\nx = 1\n", None, "a_section_of_later"),
        (WARD, "0" * 64, "not the one that was put in force"),
    ],
)
def test_one_that_cannot_be_read_leaves_the_last(store: Store, text: str, hash: str | None, why: str) -> None:
    policy.put(store, "AB", NOW, WARD)
    store.put_policy(text, hash or policy_hash(text), "CD", NOW + MINUTE)
    assert policy.in_force(store).name == "Ward 7"
    found = policy.show(store, "AB", NOW, None).value
    assert (found.text, found.by) == (WARD, "AB")
    (notice,) = found.passed_over
    said = sentence(notice)
    assert why in said
    assert "CD" in said
    assert "Ward 7, version 1, stays in force" in said
    facts = stores.describe(store, "AB", NOW, None).value
    assert facts.policy.name == "Ward 7"
    assert notice in facts.notices
    policy.put(store, "AB", NOW + 2 * MINUTE, shipped_text())
    assert policy.show(store, "AB", NOW, None).value.passed_over == ()


def test_with_no_good_one_at_all_the_shipped_one_stands(store: Store) -> None:
    store.put_policy("x = 1", policy_hash("x = 1"), "CD", NOW)
    found = policy.show(store, "AB", NOW, None).value
    assert found.is_shipped
    assert found.policy == shipped_policy()
    assert len(found.passed_over) == 1


def test_a_change_of_policy_by_another_process_brings_its_notice(store: Store) -> None:
    head = store.head()
    store.put_policy("x = 1", policy_hash("x = 1"), "CD", NOW)
    told = stores.changes(store, "AB", NOW, head).value
    assert told.policy == shipped_policy()
    assert len(told.notices) == 1


def test_each_flag_records_the_hash_of_the_policy_that_raised_it(store: Store) -> None:
    policy.begin(store, "AB", NOW, None)
    episode.begin(store, "AB", NOW - 8 * HOUR, episode.BeginRequest("A"))
    line = "02:00 site arterial ph 7.16 paco2 80"
    entry.log_line(store, "AB", NOW, entry.LineRequest("A", line, "UTC", confirmed=True))
    flag.keep_transitions(store, "AB", NOW, ["A"])
    policy.put(store, "AB", NOW + MINUTE, WARD)
    line = "02:31 site arterial ph 7.12 paco2 88 gcs 7"
    entry.log_line(store, "AB", NOW + MINUTE, entry.LineRequest("A", line, "UTC", confirmed=True))
    flag.keep_transitions(store, "AB", NOW + MINUTE, ["A"])
    raised = {e.channel: json.loads(e.raw)["policy"] for e in store.entries("A")
              if e.action is Action.FLAG and e.words == "raised"}  # fmt: skip
    assert raised["ph_below_severe"] == shipped_policy().hash
    assert raised["gcs_below_8"] == read_policy(WARD).hash
    shown = figures.of_episode(store, "AB", NOW + MINUTE, figures.EpisodeRequest("A", NOW + MINUTE)).value.figures
    assert {f.policy for f in shown.flags if f.marker == "gcs_below_8"} == {read_policy(WARD).hash}
