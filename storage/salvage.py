"""A way out of a damaged file: what can be read goes into a new store, and what was lost is said.

A row of an encrypted store that can be read is what was written: each page carries its own proof. In a plain store
only a batch whose digest still fits is proved; entries of any other are kept and marked doubtful, since a value may
have changed without a trace.
"""

from __future__ import annotations

import json
from collections.abc import Iterator
from dataclasses import dataclass, field, replace
from hashlib import sha256
from itertools import groupby
from pathlib import Path
from typing import TYPE_CHECKING, Any

from core.record.instant import Instant
from core.record.message import RecordError
from storage import keys, redraft, rules, settings_kept
from storage import schema as s
from storage.chain import batch_hash, row_digest, rows_digest
from storage.chunks import decode
from storage.damaged_reading import DamagedLedger, key_of
from storage.draft_batch import DraftBatch, DraftChunk, DraftEntry, SourceFacts
from storage.errors import StoreError, store_error
from storage.leaf_rows import Row
from storage.store_file import remove_store

if TYPE_CHECKING:
    from storage.store import Store

SALVAGED = "salvaged"
DOUBT = "doubt.salvaged"
WHY = "what it replaced was lost"
_BATCHES_AT_ONCE = 200


@dataclass(slots=True)
class Salvaged:
    """What was saved and what was lost. `lost_rows` were there and cannot be read, or make no sense.

    `doubtful` entries were kept and marked; `unlinked` lost what they replaced; `withdrawals_lost` took back an entry
    that is lost too; `removed` were removed on purpose before. `lost_at` are the recording times of the batches that
    lost rows, first and last. `tail_unknown`: a page is lost, so more may have been recorded than is known of.
    """

    new: Path
    recovery_code: str = field(default="", repr=False)
    episodes: int = 0
    entries: int = 0
    samples: int = 0
    others: int = 0
    lost_rows: int = 0
    lost_batches: int = 0
    lost_kept: int = 0
    doubtful: int = 0
    unlinked: int = 0
    withdrawals_lost: int = 0
    removed: int = 0
    tail_unknown: bool = False
    lost_at: tuple[Instant, Instant] | None = None


def salvage(
    old: Path, new: Path, passphrase: str | None, *, by: str, now: Instant, cost: keys.Cost = keys.DEFAULT_COST
) -> Salvaged:
    """Save what can be read of a damaged store into a new one, encrypted by the same passphrase. `old` is only read.

    Raises:
        StoreError: `store.missing`, `store.exists`, `key.*`, or `store.damaged` where no row can be read: then only a
            backup helps.
    """
    from storage.store import Store

    if not old.is_file():
        raise store_error("store.missing", path=old.name)
    key = key_of(old, passphrase)
    ledger = DamagedLedger(old, key)
    try:
        facts = ledger.facts()
        made = Store.create(new, passphrase=passphrase, now=now, by=by, imported=facts.get("imported") == "yes",
                            cost=cost)  # fmt: skip
        try:
            with made:
                found = _Salvage(ledger).into(made)
                found.recovery_code = made.recovery_code or ""
                detail = {"from": facts.get("store_id", ""), "entries": found.entries, "lost_rows": found.lost_rows,
                          "lost_batches": found.lost_batches, "doubtful": found.doubtful}  # fmt: skip
                made.record_event(SALVAGED, person=by, now=now, detail=json.dumps(detail))
        except BaseException:
            remove_store(new)
            raise
    finally:
        ledger.close()
    return found


class _Salvage:
    """One pass over a damaged ledger."""

    def __init__(self, ledger: DamagedLedger) -> None:
        self._ledger, self._proved = ledger, ledger.proved
        self._headers = ledger.headers()
        self._known: dict[str, rules.Replaced] = {}
        self._sources: dict[int, str] = {}
        self._seen: set[int] = set()
        self._erased: dict[int, tuple[int, str]] = {}
        self._episodes: set[str] = set()
        self._found = Salvaged(Path())

    def into(self, store: Store) -> Salvaged:
        """Write it all into a new store; what was saved and lost."""
        self._erased = {row["removed_seq"]: (row["removed_batch"], row["removed_digest"])
                        for name, row in self._ledger.rows() if name == s.erasure.name}  # fmt: skip
        drafts: list[DraftBatch] = []
        times: list[Instant] = []
        for draft, at in self._batches():
            drafts.append(draft)
            times.append(at)
            if len(drafts) == _BATCHES_AT_ONCE:
                store.append_drafts(drafts, times)
                drafts, times = [], []
        if drafts:
            store.append_drafts(drafts, times)
        self._keep_texts(store)
        self._count_lost()
        self._found.new = store.path
        self._found.episodes = len(self._episodes)
        self._found.removed = len(self._erased)
        return self._found

    def _batches(self) -> Iterator[tuple[DraftBatch, Instant]]:
        at: Instant = 0
        for number, rows in groupby(self._ledger.rows(), key=lambda found: found[1]["batch_seq"]):
            own = list(rows)
            self._seen.update(row["seq"] for _, row in own)
            header = self._headers.get(number)
            at = max(at, header["recorded_at"]) if header else at
            made = self._draft(header, own)
            if made.entries or made.chunks or made.documents or made.policies or made.events:
                yield made, at

    def _draft(self, header: Row | None, rows: list[tuple[str, Row]]) -> DraftBatch:
        sound = self._proved or (header is not None and self._is_whole(header, rows))
        entries: list[DraftEntry] = []
        chunks: list[DraftChunk] = []
        source: SourceFacts | None = None
        parts: dict[str, list[Any]] = {"document": [], "policy": [], "person_event": []}
        for name, row in rows:
            if name == "source":
                self._sources[row["seq"]] = row["id"]
                if source is None or (header is not None and row["id"] == header["source_id"]):
                    source = redraft.source_of(row)
            elif name == "entry" and (entry := self._entry(row, sound)) is not None:
                entries.append(entry)
            elif name == "chunk" and (chunk := self._chunk(row)) is not None:
                chunks.append(chunk)
            elif name in parts and (part := self._other(name, row, sound)) is not None:
                parts[name].append(part)
        by = header["by"] if header else next((e.entry.by for e in entries), "")
        operation = header["operation"] if header else SALVAGED
        return DraftBatch(by, operation, tuple(entries), tuple(chunks), source, tuple(parts["document"]),
                          tuple(parts["policy"]), tuple(parts["person_event"]))  # fmt: skip

    def _is_whole(self, header: Row, rows: list[tuple[str, Row]]) -> bool:
        """Whether a batch is all there and unchanged, rows that were removed on purpose counted by their digests."""
        digests = {row["seq"]: row_digest(name, row) for name, row in rows}
        first, last = header["first_seq"], header["last_seq"]
        if last - first > len(digests) + len(self._erased):
            return False
        for seq in range(first, last + 1):
            if seq not in digests and seq in self._erased:
                digests[seq] = self._erased[seq][1]
        if sorted(digests) != list(range(first, last + 1)) or batch_hash(header) != header["hash"]:
            return False
        try:
            return bool(rows_digest(digests[n] for n in sorted(digests)) == header["digest"])
        except ValueError:
            return False

    def _entry(self, row: Row, sound: bool) -> DraftEntry | None:
        try:
            draft = redraft.entry_of(row)
        except ValueError:
            self._found.lost_rows += 1
            return None
        made = redraft.rooted(draft, self._known, WHY)
        if made is None:
            self._found.withdrawals_lost += 1
            return None
        doubtful = not sound and not made.entry.doubt
        if doubtful:
            made = replace(made, entry=replace(made.entry, doubt=DOUBT))
        if made.id in self._known or len(made.id) > 36 or rules.problem(made.entry, self._known.get) is not None:
            self._found.lost_rows += 1
            return None
        self._known[made.id] = rules.Replaced(made.entry.episode, made.entry.channel, made.entry.action)
        self._episodes.add(made.entry.episode)
        self._found.entries += 1
        self._found.doubtful += doubtful
        self._found.unlinked += made.entry.action is not draft.entry.action
        return made

    def _chunk(self, row: Row) -> DraftChunk | None:
        try:
            t, _v, _decimals = decode(bytes(row["blob"]), row["t0"], bytes(row["sha"]))
            fits = t.size == row["n"] and t.size > 0 and t[0] == row["t0"] and t[-1] == row["t1"]
        except (StoreError, RecordError):
            fits = False
        if not fits or not rules.is_device_channel(row["channel"]) or not row["episode_id"].strip():
            self._found.lost_rows += 1
            return None
        self._episodes.add(row["episode_id"])
        self._found.samples += row["n"]
        return redraft.chunk_of(row, self._sources.get(row["source_seq"], f"lost-{row['source_seq']}"))

    def _other(self, name: str, row: Row, sound: bool) -> Any:
        """A document that is what was kept; a policy or an event of a batch that is proved: they give rights."""
        if name == "document" and sha256(bytes(row["data"])).digest() != bytes(row["sha"]):
            self._found.lost_rows += 1
            return None
        if name != "document" and not sound:
            self._found.lost_rows += 1
            return None
        self._found.others += 1
        makers = {"document": redraft.document_of, "policy": redraft.policy_of, "person_event": redraft.event_of}
        return makers[name](row)

    def _keep_texts(self, store: Store) -> None:
        """Layouts and drafts whose digest fits."""
        for table, put in ((s.layout, store.put_layout), (s.draft, store.put_draft)):
            for row in self._ledger.kept(table):
                if row["sha"] == settings_kept.digest(str(row["name"]), str(row["text"])):
                    put(row["name"], row["text"])
                else:
                    self._found.lost_kept += 1

    def _count_lost(self) -> None:
        """Rows that batches say were there and that no table gave, and batches that lost any."""
        if not self._seen and (self._ledger.top or not self._ledger.tail_is_known):
            raise store_error("store.damaged", path=self._ledger.path.name, detail="no row can be read")
        gone = self._ledger.top - sum(n <= self._ledger.top for n in self._seen | self._erased.keys())
        self._found.lost_rows += gone
        self._found.tail_unknown = not self._ledger.tail_is_known
        times: list[Instant] = []
        for header in self._headers.values():
            count = header["last_seq"] - header["first_seq"] + 1
            if not 0 < count <= self._ledger.top:
                continue
            own = range(header["first_seq"], header["last_seq"] + 1)
            if any(n not in self._seen and n not in self._erased for n in own):
                times.append(header["recorded_at"])
        expected = max(self._headers, default=0)
        self._found.lost_batches = expected - len(self._headers)
        self._found.lost_at = (min(times), max(times)) if times else None
