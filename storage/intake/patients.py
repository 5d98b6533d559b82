"""From a patient's identifier in another system to the episode here: a person says it once, and it is kept.

What was confirmed is an entry of channel `identifier` in the episode. One patient can have several episodes; the
one that is open is meant, and where that does not decide, a person has to say.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence

from core.record.entries import NewEntry
from core.record.instant import Instant
from core.record.message import RecordError, refuse
from storage.draft_batch import DraftEntry
from storage.intake.row_reading import EntryRow
from storage.store import Store

CHANNEL = "identifier"


def identifier_text(system: str, value: str) -> str:
    """How an identifier is kept: its system and value.

    >>> identifier_text("WARD-7", " 0042 "), identifier_text("", "0042")
    ('WARD-7|0042', '0042')
    """
    return f"{system.strip()}|{value.strip()}" if system.strip() else value.strip()


class Patients:
    """Finds episodes by identifier. `said` is what a person says now: identifier to episode ('*' for any)."""

    def __init__(self, existing: Store | None, said: Mapping[str, str], now: Instant) -> None:
        self._existing, self._said, self._now = existing, dict(said), now
        self._anyone: tuple[str, ...] | None = None
        self._known: dict[str, list[str]] | None = None
        self._found: dict[tuple[str, ...], str | RecordError] = {}
        self.unknown: dict[str, int] = {}
        self._confirmed: dict[str, tuple[str, int]] = {}

    def episode(self, identifiers: Sequence[str], line: int) -> str:
        """The episode of a patient with these identifiers.

        Raises:
            RecordError: `patient.no_identifier`, `patient.unknown`, `patient.several_episodes`.
        """
        key = tuple(identifiers)
        if key not in self._found:
            try:
                self._found[key] = self._find(key, line)
            except RecordError as error:
                self._found[key] = error
        found = self._found[key]
        if isinstance(found, RecordError):
            if key:
                self.unknown[key[0]] = self.unknown.get(key[0], 0) + 1
            raise found
        return found

    def _find(self, identifiers: tuple[str, ...], line: int) -> str:
        if not identifiers and "*" not in self._said:
            raise refuse("patient.no_identifier", accepted="an identifier, or an episode named at intake")
        for text in identifiers:
            if text in self._said:
                return self._confirm(text, self._said[text], line)
        held = {key: text for text in identifiers for key in self._held().get(text, ())}
        anyone = self._said.get("*")
        if anyone and (not held or anyone in held):
            return self._for_anyone(identifiers, anyone, line)
        if len(held) > 1:
            still_open = set(self._existing.open_episode_keys()) if self._existing is not None else set()
            held = {k: t for k, t in held.items() if k in still_open} or held
        if len(held) == 1 and not anyone:
            return next(iter(held))
        if held:
            raise refuse("patient.several_episodes", value=identifiers[0], episodes=", ".join(held),
                         accepted="one of them, named at intake")  # fmt: skip
        raise refuse("patient.unknown", value=identifiers[0], accepted="the episode it belongs to, named once")

    def _for_anyone(self, identifiers: tuple[str, ...], episode: str, line: int) -> str:
        """The episode named for the whole file: it stands for one patient, never for two."""
        if self._anyone is None:
            self._anyone = identifiers
        if not set(self._anyone) & set(identifiers) and self._anyone != identifiers:
            raise refuse("patient.more_than_one", value=identifiers[0] if identifiers else "",
                         accepted="the episode of each, named by identifier")  # fmt: skip
        return self._confirm(identifiers[0] if identifiers else "", episode, line)

    def _confirm(self, identifier: str, episode: str, line: int) -> str:
        if identifier and episode not in self._held().get(identifier, ()):
            self._confirmed.setdefault(identifier, (episode, line))
        return episode

    def _held(self) -> dict[str, list[str]]:
        if self._known is None:
            self._known = {}
            for episode, words in self._existing.texts_of(CHANNEL) if self._existing is not None else ():
                self._known.setdefault(words, []).append(episode)
        return self._known

    def confirmations(self, by: str) -> list[EntryRow]:
        """The entries that keep what a person said of identifiers."""
        return [
            EntryRow(line, DraftEntry(NewEntry(episode, CHANNEL, self._now, words=text, raw=text, by=by)))
            for text, (episode, line) in self._confirmed.items()
        ]
