"""What keeps a store safe: checking it whole, backups and restoring, the secrets that open it."""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass
from pathlib import Path

from core.record.message import Message
from storage import keys, restore_report
from storage import schema as s
from storage.chain import GENESIS, last_batch
from storage.engine import page_findings
from storage.errors import StoreError, store_error
from storage.store_file import newer_notice
from storage.store_kept import StoreKept


@dataclass(frozen=True)
class StoreCare(StoreKept):
    """The part of an open store that cares for its file. `storage.store.Store` is the whole."""

    @property
    def read_only(self) -> bool:
        """Whether nothing can be written; `notices` say why where nobody asked for it."""
        return self._opened.database.read_only

    def verify(self, step: Callable[[], None] = lambda: None) -> tuple[Message, ...]:
        """Check the store whole; one message per finding, none when all is well. `step`: called again and again;
        what it raises stops the check.

        Raises:
            StoreError: `store.newer` for a store of a newer format: its rows may hold more than is known here.
        """
        from storage.verify import findings

        if newer := newer_notice(self._opened.facts, self.path):
            raise store_error("store.newer", **newer.values, accepted=s.FORMAT)

        return findings(self._opened.database, encrypted=self.is_encrypted, step=step)

    def check_pages(self) -> None:
        """Read every page and hold it against its proof (encrypted) or its form (plain): quicker than `verify`.

        Raises:
            StoreError: `store.damaged` naming what the first bad page is.
        """
        with self._opened.database.read() as connection:
            found = page_findings(connection, encrypted=self.is_encrypted)
        if found:
            raise store_error("store.damaged", path=self.path.name, detail=found[0])

    def backup(self, path: Path | str) -> None:
        """Write a backup, encrypted as the store is, while others go on working.

        Raises:
            StoreError: `store.exists`, `store.disk_full`.
        """
        from storage.backup import backup

        backup(self.path, self._opened.key, Path(path))

    @classmethod
    def restore(
        cls, backup_path: Path | str, new_path: Path | str, *, passphrase: str | None = None
    ) -> Message | None:
        """Make a new store of a backup; an existing file is never overwritten. One that is damaged is refused:
        a plain one always, an encrypted one when its passphrase is given. What was not checked for want of the
        passphrase; None where all was.

        Raises:
            StoreError: `store.exists`, `store.missing`, `store.not_a_store`, `store.damaged`, `key.*`.
        """
        from storage.restore import restore

        return restore(Path(backup_path), Path(new_path), passphrase)

    def compare_with(self, old: Path) -> restore_report.Compared:
        """What an older or damaged copy of this store holds beyond it, read as far as it can be.

        Raises:
            StoreError: nothing of it can be read.
        """
        with self._opened.database.read() as connection:
            last = last_batch(connection)
        head, digest = (0, GENESIS) if last is None else (int(last["last_seq"]), str(last["hash"]))
        return restore_report.compare(old, self._opened.key, head, digest)

    def change_passphrase(self, secret: str, new: str, cost: keys.Cost = keys.DEFAULT_COST) -> None:
        """Give the store a new passphrase; `secret` is the old one or the recovery code.

        Raises:
            StoreError: `key.wrong_passphrase`, `store.not_encrypted`.
        """
        self._refuse_read_only()
        envelope = keys.envelope_path(self.path)
        keys.write_envelope(envelope, keys.change_passphrase(self._envelope(), secret, new, cost))

    def new_recovery_code(self, secret: str, cost: keys.Cost = keys.DEFAULT_COST) -> str:
        """Make a new recovery code; the old one opens nothing any more. It is given out here and kept nowhere.

        Raises:
            StoreError: `key.wrong_passphrase`, `store.not_encrypted`, `store.read_only`.
        """
        self._refuse_read_only()
        text, code = keys.change_recovery_code(self._envelope(), secret, cost)
        keys.write_envelope(keys.envelope_path(self.path), text)
        return code

    def set_second_passphrase(self, secret: str, second: str | None, cost: keys.Cost = keys.DEFAULT_COST) -> None:
        """Let a second passphrase open the store too, as a ward lead's; None takes it away.

        Raises:
            StoreError: `key.wrong_passphrase`, `store.not_encrypted`, `store.read_only`.
            RecordError: `passphrase.too_short`.
        """
        self._refuse_read_only()
        text = keys.change_second(self._envelope(), secret, second, cost)
        keys.write_envelope(keys.envelope_path(self.path), text)

    @property
    def has_second_passphrase(self) -> bool:
        """Whether a second passphrase opens the store."""
        return self.is_encrypted and keys.has_second(self._envelope())

    def opens_with(self, secret: str) -> bool:
        """Whether a secret is the passphrase or the recovery code.

        Raises:
            StoreError: `store.not_encrypted`, or the envelope is missing or altered.
        """
        try:
            return keys.open_envelope(self._envelope(), secret) == self._opened.key
        except StoreError as error:
            if error.message.key != "key.wrong_passphrase":
                raise
            return False

    def is_recovery_code(self, secret: str) -> bool:
        """Whether a secret is the recovery code: it gives what the passphrase alone, which a ward shares, does not.

        Raises:
            StoreError: `store.not_encrypted`, or the envelope is missing or altered.
        """
        return self.opens_with(secret) and keys.is_recovery_code(self._envelope(), secret)

    def _envelope(self) -> str:
        if not self.is_encrypted:
            raise store_error("store.not_encrypted", path=self.path.name)
        return keys.read_envelope(keys.envelope_path(self.path))

    def _refuse_read_only(self) -> None:
        if self.read_only:
            raise store_error("store.read_only", path=self.path.name)
