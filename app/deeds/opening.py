"""Which store is open, and who logs in it."""

from __future__ import annotations

from dataclasses import dataclass, field
from functools import partial
from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QFileDialog

from app.deeds.doer import Doer
from app.keeping.left_behind import SAMPLE, OwnFolder
from app.session.clock import REAL, running_from
from app.session.local_zone import local_zone
from app.session.model import SessionModel
from app.session.runner import Opener, Runner
from app.session.state import Session
from storage.store import Store

if TYPE_CHECKING:
    from app.dialogs.passphrase import OpenStoreDialog


@dataclass(frozen=True, slots=True)
class _Opening:
    path: Path
    passphrase: str | None = field(repr=False)
    create: bool


class OpeningDeeds(Doer):
    """Opens stores; making a new one builds on it."""

    _sample: OwnFolder | None = None
    _last: _Opening | None = None
    _asking: OpenStoreDialog | None = None

    def do_open_store(self) -> None:
        """Ask which, open it."""
        chosen, _ = QFileDialog.getOpenFileName(
            self.window,
            self.tr("Open store"),
            str(usual_folder()),
            self.tr("Stores (*.luffmark);;All files (*)"),
        )
        if chosen:
            self.open_path(Path(chosen))

    @property
    def last_path(self) -> Path | None:
        """The store that was tried last."""
        return self._last.path if self._last is not None else None

    def open_recent(self, path: str) -> None:
        """Open a store of the list of recent ones."""
        self.open_path(Path(path))

    def open_again(self) -> None:
        """Try the store that was tried last once more."""
        if self._last is not None:
            self.open_path(self._last.path, passphrase=self._last.passphrase)

    def open_path(self, path: Path, *, passphrase: str | None = None, create: bool = False) -> None:
        """Open a store, or make it first."""
        self._last = _Opening(path, passphrase, create)
        opener: Opener = partial(_create if create else _open, path, passphrase, self.window.preferences.person)
        session = Session(path, zone=local_zone(), clock=REAL, person=self.window.preferences.person)
        self.window.prefer(recent_stores=self.window.preferences.with_store(str(path)).recent_stores)
        self.show(session, opener)

    def do_sample_shift(self) -> None:
        """Open the invented night in a throw-away store, at a pretended moment late in it."""
        from app import demo

        self.forget_sample()
        self._sample = OwnFolder(SAMPLE)
        session = Session(
            self._sample.path / demo.STORE_NAME,
            zone=demo.ZONE,
            clock=running_from(demo.demo_now()),
            person=demo.BY,
            is_demo=True,
        )
        self.show(session, partial(_make_sample, self._sample.path))

    def forget_sample(self) -> None:
        """Throw the sample's store away; its session must be closed."""
        if self._sample is not None:
            self._sample.forget()
            self._sample = None

    def show(self, session: Session, opener: Opener) -> None:
        """Show a session whose store the worker opens."""
        self.window.close_model()
        self.window.show_model(SessionModel(session, Runner(opener), self.window))

    def ask_passphrase(self, said: str = "") -> None:
        """The store is encrypted: ask, and open it again. `said`: what was wrong with the last try."""
        from app.dialogs.passphrase import OpenStoreDialog

        last = self._last
        if last is None:
            return
        self.window.close_model()
        self.window.show_first_page()
        self._asking = OpenStoreDialog(last.path.name, said, self.window.theme, self.window)
        self._asking.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self._asking.accepted.connect(self._passphrase_given)
        self._asking.open()

    def _passphrase_given(self) -> None:
        if self._last is not None and self._asking is not None:
            passphrase, self._asking = self._asking.passphrase, None
            self.open_path(self._last.path, passphrase=passphrase)

    def become(self, person: str) -> None:
        """Log as a person from now on."""
        self.model.set_person(person)
        if not self.model.session.is_demo:
            self.window.prefer(person=person)


def usual_folder() -> Path:
    """Where stores lie unless another place is chosen."""
    from platformdirs import user_data_path

    folder = user_data_path("luffmark", appauthor=False)
    folder.mkdir(parents=True, exist_ok=True)
    return folder


def _open(path: Path, passphrase: str | None, _by: str) -> Store:
    return Store.open(path, passphrase=passphrase)


def _create(path: Path, passphrase: str | None, by: str) -> Store:
    from app.operations import policy

    store = Store.create(path, passphrase=passphrase, now=REAL.now(), by=by)
    policy.begin(store, by, REAL.now(), None)
    return store


def _make_sample(folder: Path) -> Store:
    from app import demo

    return Store.open(demo.make_demo_store(folder))
