"""Operations that keep a store safe: backups by hand and by the clock, and a new store of a backup."""

from __future__ import annotations

import shutil
from collections.abc import Mapping
from dataclasses import dataclass, field
from pathlib import Path
from typing import TYPE_CHECKING

from app.operations.outcome import Outcome
from app.operations.people import require_lead
from app.operations.store import check_if_quick
from core.record.instant import Instant
from core.record.message import Message, Value, refuse
from storage.errors import StoreError

if TYPE_CHECKING:
    from storage.restore_report import Newer
    from storage.store import Store

RESTORED = "restored from a backup"
LEAST_FREE, TIMES_STORE = 500_000_000, 4
"""Below the greater of so many bytes and so many times the store's size, the disk counts as nearly full."""


@dataclass(frozen=True, slots=True)
class BackupFacts:
    """A backup that was written: where, how large, the head it holds, and what is wrong with what it copied.

    `key_file` stands beside an encrypted one, which opens with it alone.
    """

    path: Path
    size: int
    printed_head: str
    damage: tuple[Message, ...] = ()
    key_file: Path | None = None


@dataclass(frozen=True, slots=True)
class Rotation:
    """Where rotating backups lie. `now`: take one whether or not the last is an hour old. `witness`: a file that the
    printed head is added to after each, "" for none. `pages`: where none is due, read every page all the same."""

    folder: Path
    now: bool = False
    witness: str = ""
    pages: bool = False
    expire: bool = True
    """Whether those whose time is over go: not while the store is known to be damaged, they may be the good ones."""


@dataclass(frozen=True, slots=True)
class Rotated:
    """How the rotating backups stand: the newest one, whether it was taken just now, and what is to be told."""

    newest: Path | None
    at: Instant | None
    taken: bool
    notices: tuple[Message, ...] = ()


@dataclass(frozen=True, slots=True)
class RestoreRequest:
    """A backup, the store to be made of it, the passphrase where it is encrypted, and the old store if it opens.

    `proven`: who restores has proved who they are already, to an open store or a command; else `pin` does.
    """

    backup: Path
    new: Path
    passphrase: str | None = field(default=None, repr=False)
    against: Path | None = None
    proven: bool = False
    pin: str = field(default="", repr=False)


@dataclass(frozen=True, slots=True)
class Restored:
    """A store made of a backup. `newer`: what the old store holds beyond it; None where there was none to compare.

    `same`: whether the old store still holds the backup's head, so that the one continues the other. `unchecked`:
    what could not be checked for want of the passphrase. `labels`: what episodes are called, by key.
    """

    new: Path
    printed_head: str
    newer: Newer | None = None
    same: bool = True
    not_compared: Message | None = None
    unchecked: Message | None = None
    labels: Mapping[str, str] = field(default_factory=dict)


def write(store: Store, who: str, now: Instant, request: Path) -> Outcome[BackupFacts]:
    """Write a backup; an existing file is never overwritten. A copy of a damaged store is written all the same, for
    it may be all that is left: `damage` says that it holds the same damage.

    Raises:
        StoreError: `store.exists`, `store.no_folder`, `store.disk_full`, `store.backup_failed`.
    """
    head = store.printed_head()
    store.backup(request)
    wrong = check_if_quick(store, who, now, None).value
    beside = key_file_of(request)
    return Outcome(BackupFacts(request, request.stat().st_size, head, wrong, beside), store.head())


def key_file_of(backup: Path) -> Path | None:
    """The key file beside an encrypted backup; None for a plain one."""
    from storage.keys import envelope_path

    beside = envelope_path(backup)
    return beside if beside.exists() else None


def rotate(store: Store, who: str, now: Instant, request: Rotation) -> Outcome[Rotated]:
    """Take a rotating backup where one is due; those whose time is over go once the new one has been opened.

    Raises:
        StoreError: `store.backup_failed`, `store.disk_full`, `store.no_folder`.
    """
    from storage import backup_rotation, witness

    taken = request.now or backup_rotation.is_due(request.folder, store.path, now)
    if taken:
        request.folder.mkdir(parents=True, exist_ok=True)
        backup_rotation.rotate(store, request.folder, now, expire=request.expire)
        if request.witness:
            witness.add(Path(request.witness), store, now)
    elif request.pages:
        store.check_pages()
    found = backup_rotation.backups_in(request.folder, store.path)
    newest = max(found, default=None)
    notices = low_disk(store.path, request.folder)
    return Outcome(Rotated(found[newest] if newest is not None else None, newest, taken, notices), store.head())


def add_witness(store: Store, who: str, now: Instant, request: str) -> Outcome[str]:
    """Add the store's head to a witness file; the line.

    Raises:
        StoreError: `witness.unwritable`.
    """
    from storage import witness

    return Outcome(witness.add(Path(request), store, now), store.head())


def low_disk(store: Path, *folders: Path) -> tuple[Message, ...]:
    """What to say of disks that are nearly full: the store's own and those of other folders."""
    needed = max(LEAST_FREE, TIMES_STORE * store.stat().st_size)
    told: dict[int, Message] = {}
    for place in (store.parent, *folders):
        if place.is_dir():
            free = shutil.disk_usage(place).free
            if free < needed:
                values: dict[str, Value] = {"path": str(place), "free_mb": free // 1_000_000,
                                        "needed_mb": needed // 1_000_000}  # fmt: skip
                told.setdefault(place.stat().st_dev, Message("store.low_disk", values))
    return tuple(told.values())


def restore(store: object, who: str, now: Instant, request: RestoreRequest) -> Outcome[Restored]:
    """Make a new store of a backup and say what the old one holds beyond it. Needs no open store.

    Where people sign in, a ward lead restores, or whoever has the recovery code; the new store keeps that it was
    done, where it can be opened.

    Raises:
        StoreError: `store.exists`, `store.missing`, `store.not_a_store`, `store.damaged`, `key.*`.
        RecordError: `people.lead_needed`, `people.unknown`, `people.wrong_pin`.
    """
    from storage.looking_into import looked_into
    from storage.store import Store

    if not is_encrypted_and_closed(request.backup, request.passphrase):
        with looked_into(request.backup, request.passphrase, request.new) as source:
            _require_right(source, who, request)
    unchecked = Store.restore(request.backup, request.new, passphrase=request.passphrase)
    if unchecked is not None:
        return Outcome(Restored(request.new, "", unchecked=unchecked), 0)
    with Store.open(request.new, passphrase=request.passphrase) as made:
        found = _compared(made, request)
        detail = f"{request.backup.name}, head {found.printed_head}"
        receipt = made.record_event(RESTORED, person=who, now=now, detail=detail)
    return Outcome(found, receipt.last_seq)


def _require_right(source: Store, who: str, request: RestoreRequest) -> None:
    """Refuse who may not restore. The night must not wait for a lead where the recovery code is at hand."""
    from storage import people

    known = people.of_store(source)
    if not known or any(people.is_code(source, secret) for secret in (request.passphrase or "", request.pin)):
        return
    if not request.proven:
        person = people.active(known, who)
        if not people.fits(person.pin, request.pin):
            raise refuse("people.wrong_pin", person=person.initials)
        who = person.initials
    require_lead(source, who)


def is_encrypted_and_closed(path: Path, passphrase: str | None) -> bool:
    """Whether a backup is there and cannot be looked into for want of its passphrase."""
    from storage.store_file import is_encrypted

    return not path.is_file() or (is_encrypted(path) and passphrase is None)


def _compared(made: Store, request: RestoreRequest) -> Restored:
    """The old store may have another passphrase by now, or no key file: its data key is still the backup's."""
    printed, labels = made.printed_head(), dict(made.texts_of("label"))
    if request.against is None or not request.against.is_file():
        return Restored(request.new, printed, labels=labels)
    try:
        found = made.compare_with(request.against)
    except StoreError as error:
        return Restored(request.new, printed, not_compared=error.message, labels=labels)
    later = {e.episode: t.raw for e in found.newer.episodes for t in e.told if t.channel == "label"}
    return Restored(request.new, printed, found.newer, found.same, labels=labels | later)
