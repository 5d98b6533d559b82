"""Rows of a ledger made into drafts again, for a new store that takes some of them: an archive, or a salvage.

An entry whose predecessor does not come along loses its link: a correction or a move becomes a first entry of its
own, since its value is whole; a withdrawal of what is not there has nothing left to say.
"""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import replace
from typing import Any

from core.record.entries import Action, NewEntry
from core.record.knowledge import REPLACING_ACTIONS
from storage.chunks import Block
from storage.draft_batch import DraftChunk, DraftDocument, DraftEntry, DraftEvent, DraftPolicy, SourceFacts

Row = Mapping[str, Any]


def entry_of(row: Row) -> DraftEntry:
    """An entry's row as a draft, under its own id.

    Raises:
        ValueError: its action is none that is known.
    """
    new = NewEntry(
        row["episode_id"], row["channel"], row["at"], row["number"], row["words"], row["raw"], row["raw_unit"],
        row["decimals"], row["zone"], row["by"], row["note"], row["doubt"], Action(row["action"]),
        row["replaces"] or "", row["reason"], row["source"],
    )  # fmt: skip
    return DraftEntry(new, row["id"], row["source_recorded_at"])


def rooted(draft: DraftEntry, known: Mapping[str, Any], why: str) -> DraftEntry | None:
    """The draft with no link to an entry that does not come along; None where nothing of it is left."""
    new = draft.entry
    if new.action not in REPLACING_ACTIONS or new.replaces in known:
        return draft
    if new.action is Action.WITHDRAW:
        return None
    reason = f"{new.reason} ({why})" if new.reason else why
    return replace(draft, entry=replace(new, action=Action.ASSERT, replaces="", reason=reason))


def chunk_of(row: Row, source: str) -> DraftChunk:
    """A block of device samples as a draft, its bytes as they are."""
    block = Block(row["t0"], row["t1"], row["n"], bytes(row["blob"]))
    return DraftChunk(row["episode_id"], row["channel"], source, block)


def source_of(row: Row) -> SourceFacts:
    """What was read, under its own id."""
    try:
        facts = json.loads(row["facts"])
    except ValueError:
        facts = {}
    return SourceFacts(row["kind"], row["name"], row["sha"], row["size"], facts if isinstance(facts, dict) else {},
                       row["id"])  # fmt: skip


def document_of(row: Row) -> DraftDocument:
    """A document as it was kept, under its own id."""
    return DraftDocument(row["kind"], row["name"], bytes(row["data"]), row["id"])


def policy_of(row: Row) -> DraftPolicy:
    """A policy that was put in force."""
    return DraftPolicy(row["hash"], row["text"])


def event_of(row: Row) -> DraftEvent:
    """What somebody did that is no entry."""
    return DraftEvent(row["person"], row["event"], row["detail"])
