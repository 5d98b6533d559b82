"""What keeps the store safe while the window is open: notices, the lock, drafts, backups."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, QTimer, Signal

from app.keeping.backups import BackupKeeper
from app.keeping.chain_watch import ChainWatch
from app.keeping.draft_keeper import DraftKeeper
from app.keeping.form_drafts import LostForm
from app.keeping.left_behind import sweep
from app.keeping.lock_page import Way, Why
from app.keeping.locking import Locking
from app.keeping.notice_strip import NoticeStrip
from app.keeping.notice_strip import Way as WayOn
from app.keeping.notices import Surroundings
from app.keeping.steps import STANDING, Step, steps_out_of, word_of
from app.look.theme import Theme
from app.operations import store as store_operations
from app.operations.outcome import Outcome
from app.session.failure import Failure
from app.session.model import SessionModel
from app.session.state import Changed, Session, What
from app.words import sentence
from core.record.message import Message

if TYPE_CHECKING:
    from app.operations.backup import Rotated
    from app.window.opened import Opened
    from app.window.shell import Shell

BUSY = "store.busy_for_now"
BACKUP, DISK, DRAFT, FORM, DAMAGED, LEFT = "backup", "disk", "draft", "form", "damaged", "left"
UNREAD = "unread"
"""Subjects of notices that are no message of the store."""
FORM_AGAIN = "form_again"
RETRY_MS = 5_000
"""How often a store that another program holds is tried again."""


class Keeping(QObject):
    """Stands beside the window. `opened` and `closing` tell it which session it guards."""

    step_wanted = Signal(str)
    """A way out of some trouble was chosen."""
    form_found = Signal(object)
    """A `LostForm`: what a program that ended was filling in."""
    form_wanted = Signal()
    """The form that was found is to be opened again."""

    def __init__(self, window: Shell) -> None:
        super().__init__(window)
        self._window = window
        self._model: SessionModel | None = None
        self.drafts: DraftKeeper | None = None
        self.backups: BackupKeeper | None = None
        self.chain: ChainWatch | None = None
        self._busy, self._left = False, ""
        self._told: tuple[str, ...] = ()
        self._disk: Message | None = None
        self._disks: tuple[Message, ...] = ()
        self.notices = NoticeStrip(window.theme)
        self.notices.again_wanted.connect(self._try_again)
        self.notices.way_wanted.connect(self._take_way)
        self.surroundings = Surroundings(self)
        self.surroundings.told.connect(self._surroundings_told)
        self._retry = QTimer(self)
        self._retry.setInterval(RETRY_MS)
        self._retry.timeout.connect(self._try_again)
        self.locking = Locking(window)
        self.locking.begins.connect(self._keep_drafts)
        self.lock, self.watch = self.locking.lock, self.locking.watch

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size."""
        self.notices.set_theme(theme)
        self.lock.page.set_theme(theme)

    def clean_up(self) -> None:
        """Remove what a killed program left in the temporary folder, and say so where it was of a patient."""
        found = sweep()
        told = []
        if found.handovers:
            told.append(self.tr("The program was killed while a closed handover was open in another program: its "
                                "copy in the temporary folder was removed now."))  # fmt: skip
        if found.stuck:
            text = self.tr("A copy of a closed handover cannot be removed: {path}. Close the program that shows it.")
            told += [text.format(path=path) for path in found.stuck]
        self._left = " ".join(told)
        if self._model is not None:
            self.notices.tell(LEFT, self._left)
        elif self._left and self._window.first is not None:
            self._window.first.say(self._left)

    def opened(self, opened: Opened) -> None:
        """A session is shown."""
        self._model = opened.model
        self.locking.opened(opened.model)
        self.notices.forget()
        self.notices.tell(LEFT, self._left)
        self.drafts = DraftKeeper(opened, self)
        self.drafts.recovered.connect(self._recovered)
        self.drafts.forms.found.connect(self._form_found)
        kept = self._window.preferences
        self.backups = BackupKeeper(opened.model, kept.backup_folder, kept.witness_file, self)
        self.backups.stands.connect(self._backups_stand)
        self.backups.failed.connect(self._backup_failed)
        self.chain = ChainWatch(opened.model, self)
        self.chain.unsound.connect(self._unsound)
        opened.model.changed.connect(self._changed)
        opened.model.runner.troubled.connect(self._troubled)
        opened.feed.unread.connect(self._unread)
        self.surroundings.start(opened.model.session.store_path)

    def closing(self) -> None:
        """The session ends; what is typed is kept."""
        self._retry.stop()
        self.surroundings.stop()
        if self.drafts is not None:
            self.drafts.close()
            self.drafts.deleteLater()
        if self.backups is not None:
            self.backups.stop()
            self.backups.deleteLater()
            self.backups = None
        if self.chain is not None:
            self.chain.stop()
            self.chain.deleteLater()
            self.chain = None
        self._model, self.drafts, self._busy, self._told = None, None, False, ()
        self._disk, self._disks, self._left = None, (), ""
        self.locking.closing()
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

    def title(self, session: Session | None) -> str:
        """The window's title: which store, and whether anybody could read its file. Locked, it names nothing."""
        if session is None:
            return "Luffmark"
        name = session.store_path.name
        if self.lock.is_locked:
            return self.tr("Luffmark - locked")
        if session.is_demo:
            return self.tr("Sample shift: invented, nothing is kept - Luffmark")
        if session.encrypted is not False:
            return self.tr("{store} - Luffmark").format(store=name)
        return self.tr("{store} (not encrypted) - Luffmark").format(store=name)

    # the lock

    @property
    def way(self) -> Way:
        """What opens the window again once it is locked."""
        return self.locking.way

    def lock_now(self, person: str = "", why: Why = Why.ASKED) -> None:
        """Hide every screen until somebody proves who they are; what is typed is kept first."""
        self.locking.lock_now(person, why)

    def _keep_drafts(self) -> None:
        if self.drafts is not None:
            self.drafts.keep()

    def follow_preferences(self) -> None:
        """Lock, or hide the screen, after the minutes that are preferred now."""
        self.locking.follow_preferences()

    def take_proof(self, initials: str) -> None:
        """Somebody has just made their PIN."""
        self.locking.take_proof(initials)

    # news

    def _changed(self, changed: Changed) -> None:
        if changed.touches(What.STORE):
            self._described()
        elif changed.touches(What.POLICY):
            self._tell_notices()
        self.locking.ask_for_proof()

    def _described(self) -> None:
        """The store says how it opened, and whether people sign in."""
        if self._model is None or self.drafts is None:
            return
        session = self._model.session
        self._busy = any(n.key == BUSY for n in session.notices)
        self._tell_notices()
        self.notices.can_retry(self._busy)
        if self._busy:
            self._retry.start()
        if self.forbids_recording:
            self._window.close_or_open_strip()
        self.follow_preferences()
        if not session.read_only:
            self.drafts.look_for_lost()
        if self.backups is not None:
            self.backups.start()
        if self.chain is not None:
            self.chain.start()

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
        if key == self.surroundings.DISK:
            self._disk = happened
            self._tell_disks()
        else:
            self.notices.tell(key, sentence(happened, self._window.plain_reader) if happened is not None else "")

    def _tell_disks(self) -> None:
        """One notice of all disks: of the store's own disk either watcher may tell, and one word is enough."""
        told = [self._disk] if self._disk is not None else []
        own = str(self._model.session.store_path.parent) if self._model is not None else ""
        told += [m for m in self._disks if self._disk is None or m.values.get("path") != own]
        text = " ".join(sentence(m, self._window.plain_reader) for m in told)
        self.notices.tell(DISK, text, lasting=bool(self._disks))

    def _backups_stand(self, found: Rotated) -> None:
        self.notices.tell(BACKUP, "")
        self._disks = found.notices
        self._tell_disks()

    def _backup_failed(self, failure: Failure) -> None:
        """Silence would be taken for a backup. Why is said with it, or already stands there."""
        why = sentence(failure.message, self._window.reader) if failure.message.key not in STANDING else ""
        told = f"{self.tr('No backup was taken.')} {why}".rstrip()
        self.notices.tell(BACKUP, told, ways=ways_out_of(failure.message.key))

    def _troubled(self, failure: Failure) -> None:
        """Whoever met the trouble may have said so in passing; it stands here for as long as the store is open."""
        if failure.message.key in STANDING:
            told = sentence(failure.message, self._window.reader)
            self.notices.tell(DAMAGED, told, lasting=True, ways=ways_out_of(failure.message.key))

    def _unread(self, episodes: tuple[str, ...]) -> None:
        """A ward that lacks a patient must not be taken for whole."""
        told = Message("ward.unread", {"episodes": ", ".join(episodes)})
        text = sentence(told, self._window.reader) if episodes else ""
        self.notices.tell(UNREAD, text, lasting=True, ways=ways_out_of("store.damaged"))

    def _unsound(self, found: tuple[Message, ...]) -> None:
        """A plain store holds what was never recorded: whoever reads figures must know, and no backup may go."""
        if self.backups is not None:
            self.backups.expire = False
        told = self.tr("The store is not sound, figures of it may be wrong: {what} Backups made before are kept.")
        first = sentence(found[0], self._window.plain_reader)
        self.notices.tell(DAMAGED, told.format(what=first), lasting=True, ways=ways_out_of("store.damaged"))

    def tell_unsound(self, findings: int) -> None:
        """The check found something: that stands here, with the ways out, until the store is closed."""
        told = self.tr("The check of this store found that it is not sound (findings: {count}).")
        self.notices.tell(DAMAGED, told.format(count=findings), lasting=True, ways=ways_out_of("store.damaged"))

    def _take_way(self, key: str) -> None:
        if key == FORM_AGAIN:
            self.form_wanted.emit()
            self.notices.tell(FORM, "")
        else:
            self.step_wanted.emit(key)

    def _recovered(self, label: str) -> None:
        told = self.tr(
            "A line for {label} was being typed when the program ended. It is back; nothing of it is recorded."
        )
        self.notices.tell(DRAFT, told.format(label=label))

    def _form_found(self, lost: LostForm) -> None:
        self.form_found.emit(lost)
        told = self.tr("A form was being filled in when the program ended: {form}. Nothing of it is recorded.")
        again = WayOn(FORM_AGAIN, self.tr("Open the form again"))
        self.notices.tell(FORM, told.format(form=lost.title), ways=(again,))

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


def ways_out_of(key: str) -> tuple[WayOn, ...]:
    """The steps that lead out of a trouble with the store that is open, as buttons."""
    return tuple(WayOn(step.value, word_of(step)) for step in steps_out_of(key) if step is not Step.AGAIN)
