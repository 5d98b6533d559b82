"""How an open store holds the rows it reads against what was written."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path

import sqlalchemy as sa

from core.record.entries import Entry
from storage import opening, row_proofs
from storage import proven_reading as proven
from storage import reading_ledger as reading
from storage.errors import StoreError


@dataclass(frozen=True)
class StoreProven:
    """The part of an open store that proves what it reads. `storage.store.Store` is the whole."""

    path: Path
    _opened: opening.Opened

    @property
    def is_encrypted(self) -> bool:
        """Whether the file is encrypted."""
        return self._opened.key is not None

    @property
    def proves_rows(self) -> bool:
        """Whether each row is held against what was written as it is read: by its page in an encrypted store, by the
        proofs beside it in a plain one; an older program's has none until it is opened for writing.

        Raises:
            StoreError: `store.not_as_written`.
        """
        if self.is_encrypted:
            return True
        with self._opened.database.read() as connection:
            return row_proofs.covers(connection)

    def complete_proofs(self) -> None:
        """Make the proofs of rows that an older program's plain store lacks. None where its chain is broken (they
        would vouch for what is wrong) or another program holds it."""
        from storage.verify import chain_is_whole

        database = self._opened.database
        try:
            with database.read() as connection:
                if row_proofs.covers(connection) or not chain_is_whole(connection):
                    return
            with database.write() as connection:
                row_proofs.rebuild(connection)
        except StoreError:
            return

    def _held(self, connection: sa.Connection) -> bool:
        """Whether rows read now are to be held against the proofs beside them."""
        return not self.is_encrypted and row_proofs.covers(connection)

    def _entries(self, connection: sa.Connection, episode: str, head: int) -> tuple[Entry, ...]:
        read = proven.episode_entries if self._held(connection) else reading.episode_entries
        return read(connection, episode, head)

    def _rows_of(self, connection: sa.Connection) -> reading.ReadChunks:
        return proven.chunk_rows if self._held(connection) else reading.chunk_rows
