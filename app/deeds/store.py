"""The store's own keeping: passphrase, lock, people, backups, damage, archive."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING, TypeVar

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QInputDialog

from app.deeds.doer import Doer
from app.deeds.file import FileDeeds
from app.deeds.recovery_codes import RecoveryCodes
from app.keeping.backups import folder_for
from app.keeping.keeper import Keeping
from app.keeping.lock_page import Way
from app.keeping.preferences import MOST_LOCK_MINUTES
from app.keeping.steps import Step
from app.operations.outcome import Outcome
from app.session.clock import REAL, Clock
from app.session.failure import Failure
from app.window.shell import Shell
from app.words import sentence
from core.record.message import Message
from storage.backup_rotation import backups_in

if TYPE_CHECKING:
    from app.dialogs.file_work import FileWork
    from app.dialogs.key_file import KeyFileDialog
    from app.dialogs.passphrase import ChangePassphraseDialog
    from app.dialogs.restore import RestoreDialog
    from app.dialogs.salvage import SalvageDialog

T = TypeVar("T", bound="FileWork")


class StoreDeeds(Doer):
    """Serves the menu Store."""

    _changing: ChangePassphraseDialog | None = None
    _witness = ""

    def __init__(self, window: Shell, keeping: Keeping, file: FileDeeds, codes: RecoveryCodes) -> None:
        super().__init__(window)
        self._keeping, self._file, self._codes = keeping, file, codes

    # the lock

    def do_lock(self) -> None:
        """Hide every screen."""
        self._keeping.lock_now(self.model.session.person)

    def do_lock_after(self) -> None:
        """Ask after how many minutes; where nobody signs in, after how many the screen is hidden."""
        kept, least = self.window.preferences.lock_minutes, 1
        told = self.tr("Minutes without key or mouse")
        if self._hides_alone:
            kept, least = self.window.preferences.hide_minutes, 0
            told = self.tr("This store has neither people nor a passphrase, so it cannot be locked. Its screen is\n"
                           "hidden, and any key or a click shows it again.\nMinutes without key or mouse (0: never, "
                           "for a display on a wall)")  # fmt: skip
        minutes, given = QInputDialog.getInt(self.window, self.tr("Lock after"), told, kept, least, MOST_LOCK_MINUTES)
        if given:
            self.lock_after(minutes)

    @property
    def _hides_alone(self) -> bool:
        return self.window.model is not None and self._keeping.way is Way.NOTHING

    def lock_after(self, minutes: int) -> None:
        """Lock, or hide where nobody signs in, after so many minutes from now on."""
        if self._hides_alone:
            self.window.prefer(hide_minutes=minutes)
        else:
            self.window.prefer(lock_minutes=minutes)
        self._keeping.follow_preferences()

    # backups and damage

    def do_backups(self) -> None:
        """List the backups; take one, restore one, choose the folder."""
        from app.dialogs.backups import BackupsDialog

        keeper = self._keeping.backups
        if keeper is None:
            return
        path = self.model.session.store_path
        dialog = BackupsDialog(keeper, path, self.window.reader, self.window.theme, self.window)
        dialog.restore_wanted.connect(self.restore)
        dialog.folder_wanted.connect(self.set_backup_folder)
        dialog.witness_wanted.connect(self.set_witness)
        dialog.open()

    def set_backup_folder(self, folder: Path) -> None:
        """Keep backups there from now on."""
        self.window.prefer(backup_folder=str(folder))
        if self._keeping.backups is not None:
            self._keeping.backups.folder = folder_for(str(folder), self.model.session.store_path)

    def set_witness(self, path: Path) -> None:
        """Add the printed head to this file after each backup."""
        from app.operations import backup

        self.window.prefer(witness_file=str(path))
        if self._keeping.backups is not None:
            self._keeping.backups.witness = str(path)
        self.model.ask(backup.add_witness, str(path), failed=self.window.show_failure)

    def do_restore(self) -> None:
        """Ask for a backup, restore it."""
        self.restore(None)

    def restore(self, backup: Path | None) -> RestoreDialog:
        """Restore a backup into a new store; the newest one is proposed."""
        from app.dialogs.restore import RestoreDialog

        path = self._store_path()
        dialog = RestoreDialog(backup or self._newest_backup(path), path, self._who(), self._clock(),
                               self.window.reader, self.window.theme, self.window,
                               folder=None if path is None else self._backup_folder(path))  # fmt: skip
        return self._work_on_files(dialog)

    def do_salvage(self) -> None:
        """Ask for a damaged store, save what can be read."""
        self.salvage(self._store_path())

    def salvage(self, old: Path | None) -> SalvageDialog:
        """Save what can be read of a damaged store."""
        from app.dialogs.salvage import SalvageDialog

        dialog = SalvageDialog(old, self._who(), self._clock(), self.window.reader, self.window.theme, self.window)
        return self._work_on_files(dialog)

    def do_key_file(self) -> None:
        """Put back the key file of a store."""
        self.put_key_file_back()

    def put_key_file_back(self) -> KeyFileDialog:
        """Put back a key file from the newest backup, or another."""
        from app.dialogs.key_file import KeyFileDialog

        path = self._store_path()
        dialog = KeyFileDialog(path, self._newest_backup(path), self._who(), self._clock(), self.window.reader,
                               self.window.theme, self.window)  # fmt: skip
        return self._work_on_files(dialog)

    def take_step(self, step: str) -> None:
        """A way out of some trouble was chosen."""
        file = self._file
        {
            Step.RESTORE: self.do_restore, Step.SALVAGE: self.do_salvage, Step.KEY_FILE: self.do_key_file,
            Step.AGAIN: file.open_again, Step.OPEN: file.do_open_store, Step.NEW: file.do_new_store,
        }[Step(step)]()  # fmt: skip

    def _work_on_files(self, dialog: T) -> T:
        dialog.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        dialog.made.connect(self._open_made)
        dialog.open()
        return dialog

    def _open_made(self, path: Path, passphrase: str | None) -> None:
        """What the person has just typed is not asked for again."""
        self._file.open_path(path, passphrase=passphrase)

    def _backup_folder(self, store: Path) -> Path:
        return folder_for(self.window.preferences.backup_folder, store)

    def _newest_backup(self, store: Path | None) -> Path | None:
        if store is None:
            return None
        folder = self._backup_folder(store)
        found = backups_in(folder, store) if folder.is_dir() else {}
        return found[max(found)] if found else None

    def _store_path(self) -> Path | None:
        """The store that is open, else the one that was tried last, else the one opened before."""
        if self.window.model is not None:
            return self.window.model.session.store_path
        recent = [Path(p) for p in self.window.preferences.recent_stores[:1]]
        return self._file.last_path or next(iter(recent), None)

    def _who(self) -> str:
        """Who works on files: nobody is known before a store is open, so the form asks."""
        return self.window.model.session.person if self.window.model is not None else ""

    def _clock(self) -> Clock:
        return self.window.model.session.clock if self.window.model is not None else REAL

    def do_check_store(self) -> None:
        """Check the store whole."""
        from app.operations import store

        self.window.say(self.tr("Checking the store..."))
        self._witness = self.window.preferences.witness_file
        self.model.ask(store.verify, self._witness or None, done=self._checked, subject="check store")

    def _checked(self, outcome: Outcome[tuple[Message, ...]]) -> None:
        if not outcome.value:
            sound = self.tr("The store is sound: pages, chain, safeguards and rules.")
            borne_out = self.tr("It holds every head of the witness file.") if self._witness else ""
            self.window.say(f"{sound} {borne_out}".rstrip())
            return
        from app.dialogs.table import TableDialog
        from app.telling.table import Table

        texts = [sentence(m, self.window.reader) for m in outcome.value]
        heads = (self.tr("No."), self.tr("Finding"))
        rows = tuple((str(n), text) for n, text in enumerate(texts, start=1))
        told = self.tr("The store is not sound. Restore the newest backup, or save what can be read.")
        TableDialog(Table(self.tr("Findings"), heads, rows, told), self.window.theme, self.window).open()
        self._keeping.tell_unsound(len(texts))

    def do_archive(self) -> None:
        """List the ended episodes; archive or remove them."""
        from app.dialogs.archive import ArchiveDialog

        ArchiveDialog(self.model, self.window.reader, self.window.theme, self.window).open()

    # people

    def do_people(self) -> None:
        """List the people; the dialog adds, retires and gives PINs."""
        from app.dialogs.people import PeopleDialog

        PeopleDialog(self.model, self.window.reader, self.window.theme, self.window).open()

    # passphrase

    def do_second_passphrase(self) -> None:
        """Set, change or take away the second passphrase."""
        from app.dialogs.second_passphrase import SecondPassphraseDialog

        if not self.model.session.encrypted:
            self.window.say(self.tr("This store is not encrypted: no passphrase opens it."))
            return
        SecondPassphraseDialog(self.model, self.window.reader, self.window.theme, self.window).open()

    def do_change_passphrase(self) -> None:
        """Ask for the old and the new one, change it."""
        from app.dialogs.passphrase import ChangePassphraseDialog

        if not self.model.session.encrypted:
            self.window.say(self.tr("This store is not encrypted: it has no passphrase to change."))
            return
        self._changing = ChangePassphraseDialog(self.change_passphrase, self.window.theme, self.window)
        self._changing.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self._changing.finished.connect(self._left)
        self._changing.open()

    def _left(self, _result: int) -> None:
        """Left, perhaps before the answer came: that is told all the same, and a new recovery code is shown."""
        self._changing = None

    def change_passphrase(self, secret: str, new: str, new_code: bool) -> None:
        """Change it; the dialog stays until that is done."""
        from app.operations import passphrase

        request = passphrase.ChangeRequest(secret, new, new_code)
        self.model.ask(passphrase.change, request, done=self._changed, failed=self._not_changed)

    def _changed(self, outcome: Outcome[str]) -> None:
        if self._changing is not None and not self._changing.is_filled_in:
            self._changing.accept()
        self.window.say(self.tr("The passphrase was changed. Backups made before keep the old one."))
        if outcome.value:
            self._codes.show(outcome.value)

    def _not_changed(self, failure: Failure) -> None:
        if self._changing is not None:
            self._changing.failed(failure)
        else:
            self.window.show_failure(failure)
