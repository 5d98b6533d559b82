"""What every command needs: the store, who, now, and how to answer."""

from __future__ import annotations

import argparse
import getpass
import json
import os
import sys
from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING, Any

from app.look.formats import plain
from app.session.clock import real_now
from core.record.instant import Instant

if TYPE_CHECKING:
    from app.words import Reader
    from core.record.message import Message
    from storage.store import Store

STORE_NAME = "ward.luffmark"


@dataclass(frozen=True, slots=True)
class Context:
    """The options that stand everywhere. `store_given` is False where the default path is meant."""

    store_path: Path
    store_given: bool
    by: str
    passphrase_fd: int | None
    json: bool
    gas_unit: str
    zone: str
    pin_fd: int | None = None
    by_is_login: bool = False
    _wrote: list[bool] = field(default_factory=list)

    @classmethod
    def of(cls, args: argparse.Namespace) -> Context:
        """The context of parsed arguments."""
        given = getattr(args, "store", None)
        return cls(
            given or default_store(), given is not None, getattr(args, "by", None) or _login(),
            getattr(args, "passphrase_fd", None), getattr(args, "json", False),
            getattr(args, "gas_unit", None) or "mmHg", getattr(args, "zone", None) or "",
            getattr(args, "pin_fd", None), not hasattr(args, "by"),
        )  # fmt: skip

    def now(self) -> Instant:
        """The computer's clock."""
        return real_now()

    def local_zone(self) -> str:
        """The zone of wall-clock times: as asked for, else this computer's.

        Raises:
            RecordError: `row.unknown_zone`.
        """
        from app.session.local_zone import is_zone, local_zone
        from core.record.message import refuse

        if not self.zone:
            return local_zone()
        if not is_zone(self.zone):
            raise refuse("row.unknown_zone", value=self.zone, accepted="a time zone, e.g. Europe/Oslo")
        return self.zone

    def reader(self) -> Reader:
        """For whom sentences are written."""
        from app.words import Reader

        return Reader(self.local_zone(), self.gas_unit)

    def passphrase(self) -> str | None:
        """The passphrase from its descriptor, its line end taken off; None where none was given."""
        return line_of(self.passphrase_fd)

    def open(self, *, read_only: bool = False, proven: bool = False, check: bool = True) -> Store:
        """The store, opened. What a person should know of how it opened goes to stderr. To write into a store whose
        people sign in, a person gives initials and PIN, unless another proof is checked after (`proven`). `check`:
        whether a plain store is held against its chain first.

        Raises:
            RecordError: `people.*`.
        """
        from app.operations.store import check_if_quick
        from app.words import sentence
        from storage.store import Store

        if not read_only:
            self._check_named()
        store = Store.open(self.store_path, passphrase=self.passphrase(), read_only=read_only)
        for notice in (*store.notices, *_policies_passed_over(store)):
            remark(sentence(notice, self.reader()))
        if check:
            for wrong in check_if_quick(store, self.by, self.now(), None).value:
                remark(f"The store is not sound, figures of it may be wrong: {sentence(wrong, self.reader())}")
        if not (read_only or proven):
            try:
                self.prove(store)
            except BaseException:
                store.close()
                raise
        if not read_only:
            self._wrote.append(True)
        return store

    def _check_named(self) -> None:
        """Nothing is written by nobody.

        Raises:
            RecordError: `people.nobody`.
        """
        from core.record.message import refuse

        if not self.by:
            raise refuse("people.nobody", accepted="--by INITIALS")

    def prove(self, store: Store) -> None:
        """Nobody acts as somebody else where people have PINs.

        Raises:
            RecordError: `people.*`.
        """
        from core.record.message import refuse
        from storage import people

        known = people.of_store(store)
        if all(p.retired for p in known.values()):
            return
        if self.by not in known:
            people.active(known, f"{self.by} ")
            raise refuse("people.unknown", value=self.by, accepted=self.by.upper())
        pin = line_of(self.pin_fd)
        if pin is None and sys.stdin.isatty():
            pin = getpass.getpass(f"PIN of {self.by}: ")
        if pin is None:
            raise refuse("people.pin_needed")
        people.sign_in(store, self.by, pin, self.now())

    def open_or_create(self, *, imported: bool = False) -> Store:
        """The store, made first where there is none; a new encrypted one tells its recovery code once."""
        from storage.store import Store

        if self.store_path.exists():
            return self.open()
        self._check_named()
        self.store_path.parent.mkdir(parents=True, exist_ok=True)
        store = Store.create(self.store_path, passphrase=self.passphrase(), now=self.now(), by=self.by,
                             imported=imported)  # fmt: skip
        self._wrote.append(True)
        unprotected = "" if store.is_encrypted else ", not encrypted: who gets at the file can read it"
        remark(f"New store: {self.store_path}{unprotected}")
        if not imported:  # recording times of files stand only in a store that holds nothing yet
            self.copy_policy(store)
        if store.recovery_code:
            remark(f"Recovery code, shown once, keep it safe: {store.recovery_code}")
        return store

    def copy_policy(self, store: Store) -> None:
        """Give a store without a policy its copy of the shipped one."""
        from app.operations import policy

        policy.begin(store, self.by, self.now(), None)

    def answer(self, text: str, value: Any) -> None:
        """Print the answer: the text, or the value as JSON where JSON was asked for."""
        if self.json:
            json.dump(value, sys.stdout, ensure_ascii=False, indent=2, allow_nan=False)
            sys.stdout.write("\n")
        else:
            print(plain(text))
        if self._wrote and self.by_is_login:
            self._wrote.clear()
            remark(f"Done as {self.by} (login name). --by INITIALS names another.")


def _policies_passed_over(store: Store) -> tuple[Message, ...]:
    """Newer policies of the store that cannot be read; a damaged store says so itself when it is used."""
    from app.operations import policy
    from app.policy.names import use
    from storage.errors import StoreError

    try:
        found = policy.found(store)
    except StoreError:
        return ()
    use(found.policy)
    return found.passed_over


def line_of(descriptor: int | None) -> str | None:
    """One line of a descriptor, its line end taken off; None where none was given."""
    if descriptor is None:
        return None
    with os.fdopen(os.dup(descriptor), "r", encoding="utf-8") as stream:
        return stream.readline().rstrip("\r\n")


def default_store() -> Path:
    """Where the user's store lies unless another is named."""
    from platformdirs import user_data_path

    return user_data_path("luffmark", appauthor=False) / STORE_NAME


def remark(text: str) -> None:
    """A line on stderr that is no refusal."""
    print(plain(text), file=sys.stderr)


def refused(error: BaseException) -> int:
    """Say on one line why it was refused; exit code 1."""
    from app.session.failure import failure_of
    from app.words import sentence

    failure = failure_of(error)
    print(f"luffmark: {plain(sentence(failure.message))}", file=sys.stderr)
    if failure.is_ours and os.environ.get("LUFFMARK_TRACE"):
        print(failure.trace, file=sys.stderr)
    return 1


def _login() -> str:
    try:
        return getpass.getuser()
    except (KeyError, OSError):
        return ""
