"""What the objects that carry out actions share: the window they act on."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QObject

if TYPE_CHECKING:
    from app.dialogs.close_due import CloseDueDialog
    from app.dialogs.settle_flag import SettleDialog
    from app.session.failure import Failure
    from app.session.model import SessionModel
    from app.window.pages import Pages
    from app.window.shell import Shell


class Doer(QObject):
    """Belongs to a window and ends with it."""

    def __init__(self, window: Shell) -> None:
        super().__init__(window)
        self.window = window

    @property
    def model(self) -> SessionModel:
        """The session; asked for only where a store is open."""
        if self.window.model is None:
            raise RuntimeError("no store is open: this action is greyed then")
        return self.window.model

    def refused(self, asking: CloseDueDialog | SettleDialog | None, failure: Failure) -> None:
        """Said where it was asked, and in the window where that was left before the answer came."""
        if asking is not None:
            asking.failed(failure)
        if asking is None or not asking.isVisible():
            self.window.show_failure(failure)

    def label_of(self, episode: str) -> str:
        """What an episode is called where lines are logged, whoever is in hand by now; its key where nobody knows."""
        from app.ward.moves import label_told_apart

        answers, session = self.window.feed.answers if self.window.feed is not None else {}, self.model.session
        if episode not in answers:
            return episode
        return label_told_apart(answers, episode, session.moment(), session.zone)

    @property
    def pages(self) -> Pages:
        """The pages; there only where a store is open."""
        if self.window.pages is None:
            raise RuntimeError("no store is open: this action is greyed then")
        return self.window.pages
