"""What keeps the store safe while the window is open: it says what stands in the way of recording."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, QTimer

from app.failure import Failure
from app.notice_strip import NoticeStrip
from app.operations import store as store_operations
from app.operations.outcome import Outcome
from app.session import Changed, Session, SessionModel, What
from app.theme import Theme
from app.words import sentence

if TYPE_CHECKING:
    from app.window import MainWindow

BUSY = "store.busy_for_now"
PASSED_OVER = "policy.passed_over"
RETRY_MS = 5_000
"""How often a store that another program holds is tried again."""


class Keeping(QObject):
    """Stands beside the window. `opened` and `closing` tell it which session it guards."""

    def __init__(self, window: MainWindow) -> None:
        super().__init__(window)
        self._window = window
        self._model: SessionModel | None = None
        self._busy = False
        self.notices = NoticeStrip(window.theme)
        self.notices.again_wanted.connect(self._try_again)
        self._retry = QTimer(self)
        self._retry.setInterval(RETRY_MS)
        self._retry.timeout.connect(self._try_again)

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size."""
        self.notices.set_theme(theme)

    def opened(self, model: SessionModel) -> None:
        """A session is shown."""
        self._model = model
        self.notices.forget()
        model.changed.connect(self._changed)

    def closing(self) -> None:
        """The session ends."""
        self._retry.stop()
        self._model, self._busy = None, False
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
        """The window's title: which store, and whether anybody could read its file."""
        name = session.store_path.name
        if session.is_demo or session.encrypted is not False:
            return self.tr("{store} - Luffmark").format(store=name)
        return self.tr("{store} (not encrypted) - Luffmark").format(store=name)

    # news

    def _changed(self, changed: Changed) -> None:
        if changed.touches(What.STORE):
            self._described()
        if changed.touches(What.POLICY):
            self._tell_policies()

    def _described(self) -> None:
        """The store says how it opened."""
        if self._model is None:
            return
        session = self._model.session
        self._busy = any(n.key == BUSY for n in session.notices)
        for notice in (n for n in session.notices if n.key != PASSED_OVER):
            text = sentence(notice, self._window.reader)
            self.notices.tell(notice.key, text, lasting=True)
        self.notices.can_retry(self._busy)
        if self._busy:
            self._retry.start()
        if self.forbids_recording:
            self._window.close_or_open_strip()

    def _tell_policies(self) -> None:
        """Policies that cannot be read stand there until a readable one is put in force."""
        notices = self._model.session.notices if self._model is not None else ()
        found = [n for n in notices if n.key == PASSED_OVER]
        text = "\n".join(sentence(n, self._window.reader) for n in found)
        self.notices.tell(PASSED_OVER, text, lasting=True)

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
