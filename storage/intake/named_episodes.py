"""Whose the rows of a table are: what stands in its column of episodes is a key, or what a ward calls a bed.

A bed's name is no key: the patient in it changes, and a name taken for a key would begin a second record beside the
patient's own. So a name that no episode has as its key, while the ward calls one that goes on so, is asked about.
"""

from __future__ import annotations

from collections.abc import Mapping

from core.record.instant import Instant
from core.record.labels import alike
from core.record.message import RecordError, refuse
from storage.intake.shared_labels import end_of_support, labels_of_open
from storage.store import Store

_MOST_KEY = 200
_MOST_NAMED = 3


def open_labels(existing: Store | None) -> dict[str, list[str]]:
    """The keys of the episodes that go on, by each label they bear or bore, as people compare labels."""
    found: dict[str, list[str]] = {}
    for key, label in dict.fromkeys(labels_of_open(existing)):
        found.setdefault(label, []).append(key)
    return found


class NamedEpisodes:
    """Finds episodes by what a table calls them. `said` is what a person says now: name to episode."""

    def __init__(self, existing: Store | None, said: Mapping[str, str]) -> None:
        self._existing, self._said = existing, dict(said)
        self._labels: dict[str, list[str]] | None = None
        self._found: dict[str, str | RecordError] = {}
        self._open: set[str] | None = None
        self._ended: dict[str, Instant | None] = {}
        self.unknown: dict[str, int] = {}
        """The names that a person has to answer for, each with how often it was met."""

    def episode(self, name: str) -> str:
        """The episode that a name means: what was said of it, the one of that key, or a new one.

        Raises:
            RecordError: `entry.no_episode`; `table.names_a_bed` where the ward calls an open episode so.
        """
        if name not in self._found:
            try:
                self._found[name] = self._find(name)
            except RecordError as error:
                self._found[name] = error
        found = self._found[name]
        if isinstance(found, RecordError):
            if found.message.key == "table.names_a_bed":
                self.unknown[name] = self.unknown.get(name, 0) + 1
            raise found
        return found

    def ended_at(self, key: str) -> Instant | None:
        """When the support of a known episode ended; None where it goes on, or nothing is recorded of it."""
        if self._existing is None:
            return None
        if self._open is None:
            self._open = set(self._existing.open_episode_keys())
        if key not in self._ended:
            over = key not in self._open and self._existing.has_episode(key)
            self._ended[key] = end_of_support(self._existing.entries(key), key) if over else None
        return self._ended[key]

    def _find(self, name: str) -> str:
        key = self._said.get(name, name)
        if not key or len(key) > _MOST_KEY:
            raise refuse("entry.no_episode", value=key[:80], accepted=f"a key of 1 to {_MOST_KEY} letters")
        if name in self._said or self._existing is None or self._existing.has_episode(key):
            return key
        if self._labels is None:
            self._labels = open_labels(self._existing)
        called = self._labels.get(alike(key))
        if called:
            raise refuse("table.names_a_bed", value=key, episodes=", ".join(called[:_MOST_NAMED]),
                         accepted="one of them, or a key of its own, said for this file")  # fmt: skip
        return key
