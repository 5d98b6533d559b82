"""Results that come more than once: a correction supersedes, a deletion withdraws, a repeat is counted.

A result has an identity that does not change (`base`) and a version (`version`), both UUIDs made of what the sender
says. The first version takes the base as its entry's id, so that later ones find it in the store.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from enum import StrEnum
from uuid import NAMESPACE_URL, uuid5

from core.record.entries import Action, Entry, NewEntry
from core.record.instant import Instant
from core.record.message import Message
from storage.draft_batch import DraftEntry
from storage.intake.row_reading import EntryRow
from storage.rules import WITHDRAWN_WHOLE
from storage.store import Store


class Standing(StrEnum):
    """What the sender says of a result."""

    GIVEN = "given"
    CORRECTED = "corrected"
    GONE = "gone"


@dataclass(frozen=True, slots=True)
class Result:
    """One result as sent. For `GONE` the entry's value does not matter. `why` is the sender's status.

    `version` are the parts that tell this version from others of the same base.
    """

    line: int
    base: str
    version: tuple[str, ...]
    entry: NewEntry
    standing: Standing
    why: str
    issued: Instant | None = None
    doubts: tuple[Message, ...] = ()


_Value = tuple[float | None, str | None, bool]
PRELIMINARY = "result.preliminary"


def _value(entry: NewEntry) -> _Value:
    """What tells two versions apart: the value, and whether it was preliminary."""
    return entry.number, entry.words, entry.doubt == PRELIMINARY


@dataclass(slots=True)
class _Link:
    id: str
    value: _Value
    at: Instant
    gone: bool
    episode: str
    with_file: bool = False


def identity(*parts: str) -> str:
    """A UUID that is the same for the same parts wherever they are read.

    >>> identity("a", "b") == identity("a", "b") != identity("ab", "")
    True
    """
    return str(uuid5(NAMESPACE_URL, "luffmark:result:" + "\x1f".join(parts)))


class ResultVersions:
    """Turns results, in order of sending, into rows. `repeated` counts those that bring nothing new."""

    def __init__(self, existing: Store | None) -> None:
        self._existing = existing
        self._chains: dict[str, list[_Link]] = {}
        self._versions: set[str] = set()
        self._stored: dict[str, tuple[dict[str, Entry], dict[str, list[Entry]]]] = {}
        self.repeated = 0
        self.nothing_to_withdraw: list[Result] = []

    def add(self, result: Result) -> EntryRow | None:
        """The row that a result makes, or None where it brings nothing new."""
        chain = self._chain(result)
        if not chain:
            if result.standing is not Standing.GONE:
                return self._row(result, chain, result.base, Action.ASSERT)
            self.nothing_to_withdraw.append(result)
            return None
        fresh = 1 + max((i for i, link in enumerate(chain) if link.gone and link.with_file), default=-1)
        # where its file was withdrawn whole, what it brought may come again, as new versions
        parts = (result.base, *result.version, *((chain[fresh - 1].id,) if fresh else ()))
        version = identity(*parts)
        if version in self._versions or self._is_stored(version, result.entry.episode):
            self.repeated += 1
            return None
        self._versions.add(version)
        live = chain[fresh:]
        if result.standing is Standing.GONE:
            return self._gone(result, version, chain, live)
        held = [k for k in live if not k.gone and (k.value, k.at) == (_value(result.entry), result.entry.at)]
        if held and (result.standing is Standing.GIVEN or held[-1] is chain[-1]):
            self.repeated += 1
            return None
        return self._row(result, chain, version, Action.CORRECT)

    def _gone(self, result: Result, version: str, chain: list[_Link], live: list[_Link]) -> EntryRow | None:
        if not live:
            self.nothing_to_withdraw.append(result)
            return None
        if live[-1].gone:
            self.repeated += 1
            return None
        return self._row(result, chain, version, Action.WITHDRAW)

    def _row(self, result: Result, chain: list[_Link], entry_id: str, action: Action) -> EntryRow:
        entry = result.entry
        if action is not Action.ASSERT:
            entry = replace(entry, action=action, replaces=chain[-1].id, episode=chain[-1].episode,
                            reason=result.why)  # fmt: skip
        if action is Action.WITHDRAW:
            entry = replace(entry, number=None, words=None)
        chain.append(_Link(entry_id, _value(entry), entry.at, action is Action.WITHDRAW, entry.episode))
        return EntryRow(result.line, DraftEntry(entry, entry_id, result.issued), doubts=result.doubts)

    def _chain(self, result: Result) -> list[_Link]:
        """All versions of a result so far, the one that counts last; those of the store first."""
        if result.base not in self._chains:
            self._chains[result.base] = self._stored_chain(result.base, result.entry.episode)
        return self._chains[result.base]

    def _stored_chain(self, base: str, episode: str) -> list[_Link]:
        by_id, followers = self._of_store(episode)
        current = by_id.get(base)
        chain = []
        while current is not None:
            gone = current.action is Action.WITHDRAW
            chain.append(_Link(current.id, _value(current), current.at, gone, current.episode,
                               current.reason == WITHDRAWN_WHOLE))  # fmt: skip
            later = followers.get(current.id)
            current = later[-1] if later else None
        return chain

    def _is_stored(self, entry_id: str, episode: str) -> bool:
        return entry_id in self._of_store(episode)[0]

    def _of_store(self, episode: str) -> tuple[dict[str, Entry], dict[str, list[Entry]]]:
        if episode not in self._stored:
            held = self._existing.entries(episode) if self._existing is not None else ()
            followers: dict[str, list[Entry]] = {}
            for entry in held:
                if entry.replaces:
                    followers.setdefault(entry.replaces, []).append(entry)
            self._stored[episode] = ({e.id: e for e in held}, followers)
        return self._stored[episode]
