"""What keeps the store safe while the window is open: notices, the lock, sign-in, drafts, backups."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, QTimer

from app.backups import BackupKeeper
from app.draft_keeper import DraftKeeper
from app.failure import Failure
from app.lock import IdleWatch, Lock
from app.lock_page import Way
from app.notice_strip import NoticeStrip
from app.notices import Surroundings
from app.operations import store as store_operations
from app.operations.outcome import Outcome
from app.session import Changed, Session, SessionModel, What
from app.theme import Theme
from app.words import sentence
from core.record.message import Message

if TYPE_CHECKING:
    from app.opened import Opened
    from app.operations.backup import Rotated
    from app.window import MainWindow

BUSY = "store.busy_for_now"
BACKUP, DISK, DRAFT = "backup", "disk", "draft"
"""Subjects of notices that are no message of the store."""
RETRY_MS = 5_000
"""How often a store that another program holds is tried again."""


class Keeping(QObject):
    """Stands beside the window. `opened` and `closing` tell it which session it guards."""

    def __init__(self, window: MainWindow) -> None:
        super().__init__(window)
        self._window = window
        self._model: SessionModel | None = None
        self._drafts: DraftKeeper | None = None
        self.backups: BackupKeeper | None = None
        self._busy, self._proven = False, ""
        self._told: tuple[str, ...] = ()
        self.notices = NoticeStrip(window.theme)
        self.notices.again_wanted.connect(self._try_again)
        self.surroundings = Surroundings(self)
        self.surroundings.told.connect(self._surroundings_told)
        self._retry = QTimer(self)
        self._retry.setInterval(RETRY_MS)
        self._retry.timeout.connect(self._try_again)
        self.lock = Lock(window)
        self.lock.page.pin_given.connect(self._pin_given)
        self.lock.page.passphrase_given.connect(self._passphrase_given)
        self.lock.page.opened.connect(self._unlocked)
        self.watch = IdleWatch(self)
        self.watch.idle.connect(self._idle)

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size."""
        self.notices.set_theme(theme)
        self.lock.page.set_theme(theme)

    def opened(self, opened: Opened) -> None:
        """A session is shown."""
        self._model = opened.model
        self.notices.forget()
        self._drafts = DraftKeeper(opened, self)
        self._drafts.recovered.connect(self._recovered)
        kept = self._window.preferences
        self.backups = BackupKeeper(opened.model, kept.backup_folder, kept.witness_file, self)
        self.backups.stands.connect(self._backups_stand)
        self.backups.failed.connect(self._backup_failed)
        opened.model.changed.connect(self._changed)
        self.surroundings.start(opened.model.session.store_path)

    def closing(self) -> None:
        """The session ends; what is typed is kept."""
        self._retry.stop()
        self.watch.stop()
        self.surroundings.stop()
        if self._drafts is not None:
            self._drafts.close()
            self._drafts.deleteLater()
        if self.backups is not None:
            self.backups.stop()
            self.backups.deleteLater()
            self.backups = None
        self._model, self._drafts, self._busy, self._told, self._proven = None, None, False, (), ""
        self.lock.unlock()
        self.notices.forget()

    # what may be done

    @property
    def forbids_recording(self) -> bool:
        """Whether nothing can be recorded, whatever the person does here."""
        return bool(self.why_closed())

    def why_closed(self) -> str:
        """Why nothing can be recorded, in words; "" where it can."""
        if self._model is None:
            return ""
        if self._busy:
            return self.tr("Another program is writing: nothing can be recorded until that ends.")
        if self._model.session.read_only:
            return self.tr("Open for reading only: nothing can be recorded.")
        return ""

    def title(self, session: Session) -> str:
        """The window's title: which store, and whether anybody could read its file. Locked, it names nothing."""
        name = session.store_path.name
        if self.lock.is_locked:
            return self.tr("Luffmark - locked")
        if session.is_demo or session.encrypted is not False:
            return self.tr("{store} - Luffmark").format(store=name)
        return self.tr("{store} (not encrypted) - Luffmark").format(store=name)

    # the lock

    @property
    def way(self) -> Way:
        """What opens the window again once it is locked."""
        if self._model is None:
            return Way.NOTHING
        session = self._model.session
        if session.has_people:
            return Way.PIN
        return Way.PASSPHRASE if session.encrypted else Way.NOTHING

    def lock_now(self, person: str = "") -> None:
        """Hide every screen until somebody proves who they are."""
        if self._model is None or self.lock.is_locked:
            return
        if self._drafts is not None:
            self._drafts.keep()
        self.lock.lock(self.way, person)
        self._window.tell_locked()

    def set_lock_minutes(self, minutes: int) -> None:
        """Lock after another time."""
        if self._model is not None and self.way is not Way.NOTHING:
            self.watch.start(minutes)

    def _idle(self) -> None:
        if self._model is not None and self.way is not Way.NOTHING:
            self.lock_now(self._model.session.person)

    def _pin_given(self, initials: str, pin: str) -> None:
        from app.operations import people

        if self._model is not None:
            self._model.ask(people.sign_in, people.SignIn(initials, pin), done=self._signed_in, failed=self._refused)

    def _signed_in(self, outcome: Outcome[str]) -> None:
        if self._model is not None:
            self._proven = outcome.value
            self._model.set_person(outcome.value)
            self._window.prefer(person=outcome.value)
            self._unlocked()

    def _passphrase_given(self, secret: str) -> None:
        from app.operations import passphrase

        if self._model is not None:
            self._model.ask(passphrase.unlock, secret, done=self._opened_with, failed=self._refused)

    def _opened_with(self, _outcome: Outcome[None]) -> None:
        self._unlocked()

    def _refused(self, failure: Failure) -> None:
        self.lock.page.refuse(sentence(failure.message, self._window.reader))

    def _unlocked(self) -> None:
        self.lock.unlock()
        self.watch.touch()
        self._window.tell_locked()

    # news

    def _changed(self, changed: Changed) -> None:
        if changed.touches(What.STORE):
            self._described()
        elif changed.touches(What.POLICY):
            self._tell_notices()
        self._ask_for_proof()

    def _ask_for_proof(self) -> None:
        """Where people sign in, nobody logs who has not: the store was opened, or the first person was added."""
        if self._model is None or self.lock.is_locked:
            return
        session = self._model.session
        if session.has_people and (not self._proven or session.person != self._proven):
            self.lock_now(session.person)
            self._model.set_person("")

    def _described(self) -> None:
        """The store says how it opened, and whether people sign in."""
        if self._model is None or self._drafts is None:
            return
        session = self._model.session
        self._busy = any(n.key == BUSY for n in session.notices)
        self._tell_notices()
        self.notices.can_retry(self._busy)
        if self._busy:
            self._retry.start()
        if self.forbids_recording:
            self._window.close_or_open_strip()
        self.set_lock_minutes(self._window.preferences.lock_minutes)
        if not session.read_only:
            self._drafts.look_for_lost()
        if self.backups is not None:
            self.backups.start()

    def _tell_notices(self) -> None:
        if self._model is None:
            return
        for key in self._told:
            self.notices.tell(key, "")
        found = self._model.session.notices
        for notice in found:
            self.notices.tell(notice.key, sentence(notice, self._window.reader), lasting=True)
        self._told = tuple(n.key for n in found)

    def _surroundings_told(self, key: str, happened: Message | None) -> None:
        self.notices.tell(key, sentence(happened, self._window.plain_reader) if happened is not None else "")

    def _backups_stand(self, found: Rotated) -> None:
        self.notices.tell(BACKUP, "")
        told = " ".join(sentence(m, self._window.reader) for m in found.notices)
        self.notices.tell(DISK, told, lasting=True)

    def _backup_failed(self, failure: Failure) -> None:
        """Silence would be taken for a backup."""
        told = self.tr("No backup was taken.") + " " + sentence(failure.message, self._window.reader)
        self.notices.tell(BACKUP, told)

    def _recovered(self, label: str) -> None:
        told = self.tr(
            "A line for {label} was being typed when the program ended. It is back; nothing of it is recorded."
        )
        self.notices.tell(DRAFT, told.format(label=label))

    def _try_again(self) -> None:
        if self._model is not None:
            self._model.ask(store_operations.takes_writing, None, done=self._tried, failed=self._not_tried,
                            subject="takes writing")  # fmt: skip

    def _tried(self, outcome: Outcome[bool]) -> None:
        if outcome.value and self._busy:
            self._busy = False
            self._retry.stop()
            self.notices.tell(BUSY, "")
            self.notices.can_retry(False)
            self._window.close_or_open_strip()

    def _not_tried(self, failure: Failure) -> None:
        """It is still so; the notice stands."""
