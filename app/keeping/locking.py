"""Who may see the window, and who logs: the lock, signing in, and the ways in when a PIN is missing."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, Signal

from app.keeping.lock import IdleWatch, Lock
from app.keeping.lock_page import Way, Why
from app.words import sentence
from core.record.message import Message

if TYPE_CHECKING:
    from app.dialogs.pin_by_code import PinByCodeDialog
    from app.operations.outcome import Outcome
    from app.session.failure import Failure
    from app.session.model import SessionModel
    from app.window.shell import Shell


class Locking(QObject):
    """Locks and unlocks a window. `opened` and `closing` tell it which session it guards."""

    begins = Signal()
    """Every screen is about to be hidden."""
    code_made = Signal(str)
    """The code by which people of a plain store get a PIN, to be shown this once."""

    def __init__(self, window: Shell) -> None:
        super().__init__(window)
        self._window = window
        self._model: SessionModel | None = None
        self._proven = ""
        self.by_code: PinByCodeDialog | None = None
        self.lock = Lock(window)
        page = self.lock.page
        page.pin_given.connect(self._pin_given)
        page.passphrase_given.connect(self._passphrase_given)
        page.opened.connect(self._unlocked)
        page.code_wanted.connect(self.ask_code)
        self.watch = IdleWatch(self)
        self.watch.idle.connect(self.idle)

    def opened(self, model: SessionModel) -> None:
        """A session is shown."""
        self._model = model

    def closing(self) -> None:
        """The session ends."""
        self.watch.stop()
        self._model, self._proven = None, ""
        if self.by_code is not None:
            self.by_code.reject()
        self.lock.unlock()

    @property
    def way(self) -> Way:
        """What opens the window again once it is locked."""
        if self._model is None:
            return Way.NOTHING
        session = self._model.session
        if session.has_people:
            return Way.PIN
        return Way.PASSPHRASE if session.encrypted else Way.NOTHING

    def lock_now(self, person: str = "", why: Why = Why.ASKED) -> None:
        """Hide every screen until somebody proves who they are."""
        if self._model is None or self.lock.is_locked:
            return
        self.begins.emit()
        self.lock.lock()
        more = ""
        if self._window.forget_handovers():
            more = self.tr("A closed handover was opened in another program: close it there too.")
        self.lock.page.begin(self.way, person, why, minutes=self.minutes, has_code=True, more=more)
        self._window.tell_locked()

    @property
    def minutes(self) -> int:
        """After how many minutes without key or mouse every screen is hidden; 0: never. The sample, which is nobody's
        record, stays in sight."""
        if self._model is None:
            return 0
        if self.way is not Way.NOTHING:
            return self._window.preferences.lock_minutes
        return 0 if self._model.session.is_demo else self._window.preferences.hide_minutes

    def follow_preferences(self) -> None:
        """Watch for stillness as the preferences say now, and as the store's people do."""
        if self.minutes:
            self.watch.start(self.minutes)
        else:
            self.watch.stop()

    def idle(self) -> None:
        """Nobody was there for too long."""
        if self._model is not None and self.minutes:
            self.lock_now(self._model.session.person, Why.IDLE)

    def ask_for_proof(self) -> None:
        """Where people sign in, nobody logs who has not: the store was opened, or the first person was added."""
        if self._model is None or self.lock.is_locked:
            return
        session = self._model.session
        if session.has_people and (not self._proven or session.person != self._proven):
            self.lock_now(session.person, Why.BEGIN)
            self._model.set_person("")

    def take_proof(self, initials: str) -> None:
        """Somebody has just proved who they are in another way: they made their PIN."""
        from app.operations import people

        if self._model is not None:
            self._proven = initials
            self._model.set_person(initials)
            self._window.prefer(person=initials)
            self.follow_preferences()
            self._model.ask(people.code_once, None, done=self._code_told)

    def _code_told(self, outcome: Outcome[str]) -> None:
        """A plain store has no recovery code of its own: its first ward lead is shown one, this once."""
        if outcome.value:
            self.code_made.emit(outcome.value)

    # by PIN

    def _pin_given(self, initials: str, pin: str) -> None:
        from app.operations import people

        if self._model is not None:
            self._model.ask(people.sign_in, people.SignIn(initials, pin), done=self._signed_in, failed=self._refused)

    def _signed_in(self, outcome: Outcome[str]) -> None:
        if self._model is not None:
            self.take_proof(outcome.value)
            self._unlocked()

    # by passphrase or code

    def _passphrase_given(self, secret: str) -> None:
        from app.operations import passphrase

        if self._model is not None:
            self._model.ask(passphrase.unlock, secret, done=self._opened_with, failed=self._refused)

    def _opened_with(self, _outcome: Outcome[None]) -> None:
        self._unlocked()

    def ask_code(self) -> None:
        """Nobody here has a PIN that fits: the recovery code gives one."""
        from app.dialogs.pin_by_code import PinByCodeDialog

        if self._model is None:
            return
        dialog = self.by_code = PinByCodeDialog(
            self._model, self.lock.page.initials.text(), self._window.reader, self._window.theme, self._window
        )
        self.lock.over = dialog
        dialog.signed_in.connect(self._by_code)
        dialog.finished.connect(self._code_done)
        dialog.open()

    def _by_code(self, initials: str) -> None:
        self.take_proof(initials)
        self._unlocked()

    def _code_done(self, _result: int) -> None:
        if self.by_code is not None:
            self.by_code.deleteLater()
        self.by_code, self.lock.over = None, None

    # the answer

    def _refused(self, failure: Failure) -> None:
        wait = failure.message.values.get("seconds")
        if failure.message.key == "people.wait" and isinstance(wait, int):
            values = {"person": failure.message.values.get("person"), "seconds": "{seconds}"}
            words = sentence(Message("people.wait_counted", values), self._window.reader)
            self.lock.page.refuse_for(words, wait)
        else:
            self.lock.page.refuse(sentence(failure.message, self._window.reader))

    def _unlocked(self) -> None:
        self.lock.unlock()
        self.watch.touch()
        self._window.tell_locked()
