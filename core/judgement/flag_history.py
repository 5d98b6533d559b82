"""What the ledger holds of each flag: its transitions, each an entry, read back and written.

A transition's `channel` is the marker, `words` the transition, `raw` a JSON object with the flag's id, when it was
met, its tier, group, evidence, source, the policy's hash and the engine's version.
"""

from __future__ import annotations

import json
from collections.abc import Iterable
from dataclasses import dataclass, field
from math import isfinite
from typing import Any

from core.judgement.shapes import FlagFigure
from core.record.entries import Action, Entry, NewEntry
from core.record.instant import Instant
from core.record.message import Message, Value

ENGINE = "1"
"""The version of the markers' rules in code; raised when the same policy would give other flags."""

RAISED, SEEN, SETTLED, NO_LONGER, UNDONE = "raised", "seen", "settled", "no longer met", "undone"
LIFE = frozenset({RAISED, NO_LONGER, UNDONE})


@dataclass
class History:
    """One flag in the ledger. `life` is the newest of raised, no longer met and undone."""

    flag_id: str
    marker: str
    since: Instant
    life: str
    policy: str
    raised: dict[str, Any] = field(default_factory=dict)
    ended_at: Instant | None = None
    undone_at: Instant | None = None
    seen_by: str | None = None
    seen_at: Instant | None = None
    settled_by: str | None = None
    settled_at: Instant | None = None
    settled_why: str | None = None

    def figure(self, as_of: Instant, policy: str) -> FlagFigure:
        """The flag as it was when raised: shown where the present record no longer has it.

        Under another policy than the one that raised it, it is no longer met; under the same it is undone.
        """
        told = tuple(Message(str(k), dict(v)) for k, v in self.raised.get("evidence", ()))
        return FlagFigure(
            flag_id=self.flag_id, marker=self.marker, group=str(self.raised.get("group", "")),
            tier=str(self.raised.get("tier", "remark")), since=self.since, evidence=told,
            source=str(self.raised.get("source", "")), sure=str(self.raised.get("sure", "")), policy=self.policy,
            ended_at=self.ended_at or self.undone_at or as_of, state=NO_LONGER, strongest=False,
            undone_by_correction=self.policy == policy or self.life == UNDONE,
            detail_sure=str(self.raised.get("detail_sure", "")),
        )  # fmt: skip


def history_of(transitions: Iterable[Entry]) -> dict[str, History]:
    """Every flag that the ledger holds, by its id, in order of the ledger. What cannot be read is passed over."""
    found: dict[str, History] = {}
    for entry in sorted((e for e in transitions if e.action is Action.FLAG), key=lambda e: e.seq):
        told = _read(entry)
        if told is None:
            continue
        name = str(told["flag_id"])
        history = found.get(name)
        if history is None:
            history = found[name] = History(name, entry.channel, int(told.get("since", entry.at)), "", "")
        _take(history, entry, told)
    return {k: h for k, h in found.items() if h.life}


def _read(entry: Entry) -> dict[str, Any] | None:
    try:
        told = json.loads(entry.raw)
    except ValueError:
        return None
    return told if isinstance(told, dict) and "flag_id" in told else None


def _take(history: History, entry: Entry, told: dict[str, Any]) -> None:
    if entry.words in LIFE:
        history.life = entry.words
    match entry.words:
        case "raised":
            history.raised, history.policy = told, str(told.get("policy", ""))
            history.ended_at = history.undone_at = None
        case "no longer met":
            history.ended_at = int(told.get("ended_at") or entry.at)
        case "undone":
            history.undone_at = entry.at
        case "seen":
            history.seen_by, history.seen_at = entry.by, entry.at
        case "settled":
            history.settled_by, history.settled_at, history.settled_why = entry.by, entry.at, entry.reason
        case "not seen":
            history.seen_by = history.seen_at = None
        case "reopened":
            history.settled_by = history.settled_at = history.settled_why = None


def transitions(
    flags: Iterable[FlagFigure], recorded: Iterable[Entry], episode_key: str, policy_hash: str, now: Instant
) -> tuple[NewEntry, ...]:
    """The transitions to append so that the ledger says what the flags say; none where it already does.

    `flags` are computed as of `now` from the record as known now. A flag is raised once by its id, whichever window
    saw it first. One that was raised and is no longer in the record is undone (by a correction, a late entry or
    another policy); one that is met again is raised again under its id.
    """
    history = history_of(recorded)
    out: list[NewEntry] = []
    for flag in flags:
        known = history.get(flag.flag_id)
        life = known.life if known is not None else ""
        if flag.undone_by_correction:
            if life and life != UNDONE:
                out.append(_entry(flag, UNDONE, episode_key, policy_hash, now))
            continue
        if flag.ended_at is None:
            if life != RAISED:
                out.append(_entry(flag, RAISED, episode_key, policy_hash, now))
            continue
        if not life or life == UNDONE:
            out.append(_entry(flag, RAISED, episode_key, policy_hash, now))
        if life != NO_LONGER:
            out.append(_entry(flag, NO_LONGER, episode_key, policy_hash, now))
    return tuple(out)


def word_on(flag: FlagFigure, words: str, by: str, now: Instant, episode_key: str, reason: str = "") -> NewEntry:
    """A person's word on a flag, as an entry: `seen`, `settled` (with the reason), or their undoing: `not seen`,
    `reopened`."""
    raw = _json({"flag_id": flag.flag_id, "since": flag.since, "policy": flag.policy, "engine": ENGINE})
    return NewEntry(episode_key, flag.marker, now, words=words, raw=raw, by=by, action=Action.FLAG, reason=reason)


def _entry(flag: FlagFigure, words: str, episode_key: str, policy_hash: str, now: Instant) -> NewEntry:
    told: dict[str, Any] = {"flag_id": flag.flag_id, "since": flag.since, "policy": policy_hash, "engine": ENGINE}
    if words == RAISED:
        told |= {"tier": flag.tier, "group": flag.group, "source": flag.source, "sure": flag.sure,
                 "detail_sure": flag.detail_sure, "evidence": [[m.key, _kept(m)] for m in flag.evidence]}  # fmt: skip
    if words == NO_LONGER:
        told["ended_at"] = flag.ended_at
    return NewEntry(episode_key, flag.marker, now, words=words, raw=_json(told), action=Action.FLAG)


def _kept(message: Message) -> dict[str, Value]:
    """The values of a message as JSON can hold them: what is not a number is absent."""
    return {k: None if isinstance(v, float) and not isfinite(v) else v for k, v in message.values.items()}


def _json(told: dict[str, Any]) -> str:
    return json.dumps(told, ensure_ascii=False, separators=(",", ":"), allow_nan=False)
