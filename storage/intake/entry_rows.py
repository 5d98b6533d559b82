"""Judges a file's entry rows together and against the store: repeats, replacements, pressures, gases."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import replace
from uuid import NAMESPACE_URL, uuid5

from core.record.channels import CHANNELS, Kind
from core.record.entries import Action, Entry, NewEntry
from core.record.instant import Instant
from core.record.knowledge import standing
from core.record.message import Message, Value
from storage.draft_batch import DraftEntry
from storage.intake.findings import Findings
from storage.intake.gas_rows import gas_row_doubts
from storage.intake.pressures import Contradiction, contradictions
from storage.intake.row_reading import EntryRow
from storage.intake.sample_spool import LeakUse
from storage.intake.shared_labels import shared_labels
from storage.rules import WITHDRAWN_WHOLE, Lookup, Replaced, problem
from storage.store import Store

_Key = tuple[str, Instant, str, float | None, str | None, str, Action, str]
_IN_FILE = 1 << 40
"""Sequences that a file's rows would take: later than any of the store."""


_UNKNOWN = 1 << 62
"""The recording time of a row that states none: now, which is later than any."""


class HeldRows:
    """What the store holds of an episode: the keys of its rows, but for those withdrawn with their whole file."""

    def __init__(self, held: tuple[Entry, ...]) -> None:
        self._ids = {e.id for e in held}
        self._withdrawn: set[str] = set()
        for e in sorted(held, key=lambda e: -e.seq):  # from the end of each chain to what it began with
            whole = e.action is Action.WITHDRAW and e.reason == WITHDRAWN_WHOLE
            if e.replaces and (whole or e.id in self._withdrawn):
                self._withdrawn |= {e.id, e.replaces}
        self.keys = {_key_of(e) for e in held if e.id not in self._withdrawn}

    def id_for(self, known: str) -> str | None:
        """The id under which a row whose id the store knows may come again; None where what it brought stands."""
        candidate, times = known, 0
        while times == 0 or candidate in self._ids:
            if candidate not in self._withdrawn:
                return None
            times += 1
            candidate = str(uuid5(NAMESPACE_URL, f"luffmark:again:{known}:{times}"))
        return candidate


def _renamed(row: EntryRow, anew: Mapping[str, str]) -> EntryRow:
    """A row with its new id, and with those of the rows that it replaces."""
    draft, replaces = row.draft, row.draft.entry.replaces
    entry = replace(draft.entry, replaces=anew[replaces]) if replaces in anew else draft.entry
    return replace(row, draft=replace(draft, entry=entry, id=anew.get(draft.id, draft.id)))


def _key_of(e: NewEntry) -> _Key:
    return (e.episode, e.at, e.channel, e.number, e.words, e.by, e.action, e.replaces)


class EntryRows:
    """The rows of one file. `judged` gives the entries to add; `repeated` counts those the store has."""

    def __init__(
        self, rows: list[EntryRow], leak_uses: Mapping[tuple[str, str], LeakUse], existing: Store | None,
        findings: Findings,
    ) -> None:  # fmt: skip
        self._rows, self._leak_uses, self._existing, self._findings = rows, leak_uses, existing, findings
        self._held: dict[str, tuple[Entry, ...]] = {}
        self.repeated = 0

    def judged(self) -> tuple[DraftEntry, ...]:
        """The entries to add, in an order in which what is replaced comes first."""
        rows = self._in_order(self._without_held(self._without_repeats(self._rows)))
        rows = self._keeping_rules([*rows, *self._leak_definitions()])
        self._find_contradictions(rows)
        rows = self._with_doubts(rows)
        self._find_two_values(rows)
        rows = self._with_second_values(rows)
        self._find_shared_labels(rows)
        return tuple(r.draft for r in rows)

    def _held_entries(self, episode: str) -> tuple[Entry, ...]:
        if self._existing is None:
            return ()
        if episode not in self._held:
            self._held[episode] = self._existing.entries(episode)
        return self._held[episode]

    def _without_repeats(self, rows: Iterable[EntryRow]) -> list[EntryRow]:
        """A row that stands twice in the file is refused where it stands again; so is an id."""
        seen: dict[object, int] = {}
        out = []
        for row in rows:
            same: object = row.draft.id or _key_of(row.draft.entry)
            first = seen.setdefault(same, row.line)
            if first != row.line:
                message = Message("row.repeated", {"first_line": first, "accepted": "each row once"})
                self._findings.refuse(row.line, "id" if row.draft.id else "", _shown(row), message)
            else:
                out.append(row)
        return out

    def _without_held(self, rows: list[EntryRow]) -> list[EntryRow]:
        """Rows that the store has are counted and skipped, even those corrected there since.

        Those that were withdrawn with their whole file may come again; where a row has an id, under a new one.
        """
        if self._existing is None:
            return rows
        ids = self._existing.known_entry_ids([r.draft.id for r in rows if r.draft.id])
        held = {e: HeldRows(self._held_entries(e)) for e in {r.draft.entry.episode for r in rows}}
        out: list[EntryRow] = []
        anew: dict[str, str] = {}
        for row in rows:
            entry, own = row.draft.entry, row.draft.id
            of = held[entry.episode]
            new_id = of.id_for(own) if own in ids else own
            if new_id is None or (not own and _key_of(entry) in of.keys):
                self.repeated += 1
                continue
            if new_id != own:
                anew[own] = new_id
            out.append(row)
        return [_renamed(row, anew) for row in out] if anew else out

    @staticmethod
    def _in_order(rows: list[EntryRow]) -> list[EntryRow]:
        """By recording time where every row has one, else as the file has them."""
        if rows and all(r.draft.source_recorded_at is not None for r in rows):
            return sorted(rows, key=lambda r: r.draft.source_recorded_at or 0)
        return rows

    def _keeping_rules(self, rows: list[EntryRow]) -> list[EntryRow]:
        known: dict[str, Replaced] = {}
        lookup = self._lookup(known)
        out = []
        for row in rows:
            entry = row.draft.entry
            error = problem(entry, lookup)
            if error is not None:
                column = "replaces" if "replaces" in error.message.key else "value"
                self._findings.refuse(row.line, column, _shown(row), error.message)
                continue
            if row.draft.id:
                known[row.draft.id] = Replaced(entry.episode, entry.channel, entry.action)
            out.append(row)
        return out

    def _lookup(self, in_file: Mapping[str, Replaced]) -> Lookup:
        def look(entry_id: str) -> Replaced | None:
            if entry_id in in_file or self._existing is None:
                return in_file.get(entry_id)
            return self._existing.replaced(entry_id)

        return look

    def _leak_definitions(self) -> list[EntryRow]:
        """A definition of leak that the file's leak rows state becomes an entry where it is not yet in force."""
        out: list[EntryRow] = []
        uses = sorted(self._leak_uses.items(), key=lambda item: (item[1].first, item[1].line))
        before: dict[str, tuple[str, LeakUse]] = {}
        for (episode, definition), use in uses:
            earlier = before.get(episode)
            if earlier is not None and use.first <= earlier[1].last:
                values = {"episode": episode, "first": earlier[0], "second": definition}
                self._findings.doubt(
                    use.line, "leak_definition", definition, Message("leak.definitions_mixed", values)
                )
            in_force = earlier[0] if earlier else self._definition_in_force(episode, use.first)
            before[episode] = (definition, use)
            if definition != in_force:
                new = NewEntry(episode, "leak_definition", use.first, words=definition, raw=definition)
                out.append(EntryRow(use.line, DraftEntry(new)))
        return out

    def _definition_in_force(self, episode: str, at: Instant) -> str | None:
        stated = [r.draft.entry for r in self._rows if r.draft.entry.episode == episode]
        entries = [s.entry for s in standing(self._held_entries(episode))] + stated
        found = [e for e in entries if e.channel == "leak_definition" and e.at <= at and e.words]
        return max(found, key=lambda e: e.at).words if found else None

    def combined(self, episode: str, rows: Iterable[tuple[int, EntryRow]]) -> list[Entry]:
        """The store's entries of an episode with the file's own, each with its place, behind them."""
        return list(self._held_entries(episode)) + [_as_recorded(row, _IN_FILE + i) for i, row in rows]

    def _find_contradictions(self, rows: list[EntryRow]) -> None:
        touched = {r.draft.entry.episode for r in rows if r.draft.entry.channel in ("ipap", "epap", "mode")}
        of = _by_episode(rows)
        for episode in sorted(touched):
            for found in contradictions(self.combined(episode, of[episode]), _IN_FILE):
                self._note(found, rows)

    def _note(self, found: Contradiction, rows: list[EntryRow]) -> None:
        row = rows[found.seq - _IN_FILE]
        values: dict[str, Value] = {"ipap": found.ipap, "epap": found.epap, "accepted": "IPAP above EPAP"}
        column, shown = "value", _shown(row)
        if found.refused:
            self._findings.refuse(row.line, column, shown, Message("settings.ipap_not_above_epap", values))
        else:
            self._findings.doubt(row.line, column, shown, Message("settings.late_contradiction", values))

    def _with_doubts(self, rows: list[EntryRow]) -> list[EntryRow]:
        """Rows with what is doubtful noted: soft limits, and gases whose values do not belong together."""
        for row in rows:
            for message in row.doubts:
                self._findings.doubt(row.line, "value", _shown(row), message)
        out = list(rows)
        entries = [r.draft.entry for r in rows]
        of = _by_episode(rows)
        for i, message in gas_row_doubts(entries, lambda key: self.combined(key, of[key]), self._existing):
            self._findings.doubt(rows[i].line, "value", _shown(rows[i]), message)
            if not out[i].draft.entry.doubt:
                entry = replace(out[i].draft.entry, doubt=message.key)
                out[i] = replace(out[i], draft=replace(out[i].draft, entry=entry))
        return out

    def _find_two_values(self, rows: list[EntryRow]) -> None:
        """Two different numbers or choices of one channel at one moment: the later row counts, and it is said."""
        seen: dict[tuple[str, str, Instant], EntryRow] = {}
        for row in rows:
            e = row.draft.entry
            if e.action is not Action.ASSERT or e.channel in ("note", "told", "drug") or e.number is None:
                continue
            first = seen.setdefault((e.episode, e.channel, e.at), row)
            if first is not row and first.draft.entry.number != e.number:
                values: dict[str, Value] = {
                    "channel": e.channel,
                    "first_line": first.line,
                    "first": first.draft.entry.number,
                }
                self._findings.doubt(row.line, "value", _shown(row), Message("row.two_values", values))

    def _find_shared_labels(self, rows: list[EntryRow]) -> None:
        """Two open episodes under one label: the same patient under two keys, or two patients in one bed?"""
        of = _by_episode(rows)
        entries = [r.draft.entry for r in rows]
        for i, message in shared_labels(entries, lambda key: self.combined(key, of[key]), self._existing):
            self._findings.doubt(rows[i].line, "value", _shown(rows[i]), message)

    def _with_second_values(self, rows: list[EntryRow]) -> list[EntryRow]:
        """A row that gives another value than the store has for that very moment is taken and marked: nobody is there
        to ask which is right."""
        held: dict[str, dict[tuple[str, Instant], float | str | None]] = {}
        out = list(rows)
        for i, row in enumerate(rows):
            e = row.draft.entry
            if e.action is not Action.ASSERT or CHANNELS[e.channel].kind not in (Kind.NUMBER, Kind.CHOICE):
                continue
            if e.episode not in held:
                stands = standing(self._held_entries(e.episode))
                held[e.episode] = {(s.entry.channel, s.entry.at): _value(s.entry) for s in stands}
            first = held[e.episode].get((e.channel, e.at))
            if first is None or first == _value(e):
                continue
            values: dict[str, Value] = {"channel": e.channel, "first": first, "at": e.at}
            self._findings.doubt(row.line, "value", _shown(row), Message("doubt.second_value", values))
            if not e.doubt:
                out[i] = replace(row, draft=replace(row.draft, entry=replace(e, doubt="doubt.second_value")))
        return out


def _value(e: NewEntry) -> float | str | None:
    return e.words if e.number is None else e.number


def _by_episode(rows: Iterable[EntryRow]) -> dict[str, list[tuple[int, EntryRow]]]:
    """Rows with their places, by episode: a file of thousands of episodes is gone through once."""
    found: dict[str, list[tuple[int, EntryRow]]] = {}
    for i, row in enumerate(rows):
        found.setdefault(row.draft.entry.episode, []).append((i, row))
    return found


def _as_recorded(row: EntryRow, seq: int) -> Entry:
    e = row.draft.entry
    return Entry(
        e.episode, e.channel, e.at, e.number, e.words, e.raw, e.raw_unit, e.decimals, e.zone, e.by, e.note,
        e.doubt, e.action, e.replaces, e.reason, e.source, seq, row.draft.id or f"row {seq}",
        row.draft.source_recorded_at or _UNKNOWN,
    )  # fmt: skip


def _shown(row: EntryRow) -> str:
    e = row.draft.entry
    return f"{e.raw} {e.raw_unit}".strip() or e.channel
