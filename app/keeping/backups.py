"""Automatic backups while a store is open: looked for every few minutes, taken once an hour; a failure is said."""

from __future__ import annotations

from hashlib import sha256
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, QTimer, Signal

from app.operations import backup as operations
from app.operations.backup import Rotated, Rotation
from app.operations.outcome import Outcome
from app.session.failure import Failure

if TYPE_CHECKING:
    from app.session.model import SessionModel

LOOK_MS, FIRST_MS = 5 * 60_000, 20_000
"""How often it is looked whether one is due, and how soon after opening: not in the way of the first screen."""


def usual_folder(store: Path) -> Path:
    """Where a store's backups lie unless another folder is chosen."""
    return store.parent / "backups"


def folder_for(chosen: str, store: Path) -> Path:
    """Where a store's backups lie. In a chosen folder each store has one of its own: of two wards' stores with one
    name, neither may expire the other's backups.

    >>> folder_for("", Path("/data/ward.luffmark")).as_posix()
    '/data/backups'
    """
    if not chosen:
        return usual_folder(store)
    own = sha256(str(store.absolute()).encode("utf-8", "replace")).hexdigest()[:8]
    return Path(chosen) / f"{store.stem}-{own}"


class BackupKeeper(QObject):
    """Follows one open store. `stands` after each look; `failed` with what went wrong."""

    stands = Signal(object)
    """`Rotated`."""
    failed = Signal(object)
    """`Failure`."""

    def __init__(self, model: SessionModel, folder: str, witness: str, parent: QObject) -> None:
        super().__init__(parent)
        self._model = model
        self.folder = folder_for(folder, model.session.store_path)
        self.witness = witness
        self.newest: Rotated | None = None
        self.expire = True
        """Whether old ones may go: not once the store was found damaged."""
        self._look = QTimer(self)
        self._look.setInterval(LOOK_MS)
        self._look.timeout.connect(self.look)
        self._first = QTimer(self)
        self._first.setSingleShot(True)
        self._first.setInterval(FIRST_MS)
        self._first.timeout.connect(self._look_first)

    def start(self) -> None:
        """Begin to look. A store that cannot be written to has nothing new; the sample is thrown away."""
        session = self._model.session
        if not (session.read_only or session.is_demo):
            self._look.start()
            self._first.start()

    def stop(self) -> None:
        """Look no more."""
        self._look.stop()
        self._first.stop()

    def look(self) -> None:
        """Take a backup if one is due."""
        self._ask(now=False)

    def _look_first(self) -> None:
        """Soon after opening every page is read once: by a backup, or by itself where none is due."""
        self._ask(now=False, pages=True)

    def take_now(self) -> None:
        """Take a backup, due or not."""
        self._ask(now=True)

    def _ask(self, *, now: bool, pages: bool = False) -> None:
        request = Rotation(self.folder, now, self.witness, pages, self.expire)
        self._model.ask(operations.rotate, request, done=self._done, failed=self._failed)

    def _done(self, outcome: Outcome[Rotated]) -> None:
        self.newest = outcome.value
        self.stands.emit(outcome.value)

    def _failed(self, failure: Failure) -> None:
        self.failed.emit(failure)
