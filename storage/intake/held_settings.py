"""Settings that a device repeats in every row of its trends: an entry where they change, none where they do not."""

from __future__ import annotations

from core.record.entries import Entry
from core.record.instant import Instant
from core.record.knowledge import VALUE_ACTIONS, standing
from storage.intake.row_reading import EntryRow
from storage.store import Store

_Key = tuple[str, str]
_Value = tuple[float | None, str | None]


class SettingChanges:
    """Gathers what a device wrote of settings; `rows` keeps those that differ from what was in force."""

    def __init__(self, existing: Store | None) -> None:
        self._existing = existing
        self._seen: dict[_Key, list[EntryRow]] = {}
        self._held: dict[str, list[Entry]] = {}
        self.repeated = 0

    def note(self, row: EntryRow) -> None:
        """Note one."""
        entry = row.draft.entry
        self._seen.setdefault((entry.episode, entry.channel), []).append(row)

    def rows(self) -> list[EntryRow]:
        """The changes, in order of time. A row that the store has itself is left in, to be counted as held."""
        out: list[EntryRow] = []
        for (episode, channel), rows in self._seen.items():
            last: _Value | None = None
            for row in sorted(rows, key=lambda r: r.draft.entry.at):
                entry = row.draft.entry
                in_force = self._in_force(episode, channel, entry.at)
                value = (entry.number, entry.words)
                if in_force is not None and (last is None or in_force.at > self._last_at):
                    last = (in_force.number, in_force.words)
                if value != last:
                    out.append(row)
                    last, self._last_at = value, entry.at
        return sorted(out, key=lambda r: r.line)

    _last_at: Instant = -(1 << 62)

    def _in_force(self, episode: str, channel: str, at: Instant) -> Entry | None:
        """The newest value that stands in the store at or before a moment."""
        if self._existing is None:
            return None
        if episode not in self._held:
            found = [s.entry for s in standing(self._existing.entries(episode))]
            self._held[episode] = [e for e in found if e.episode == episode and e.action in VALUE_ACTIONS]
        newest = None
        for e in self._held[episode]:
            if e.channel == channel and e.at <= at:
                newest = e
        return newest
