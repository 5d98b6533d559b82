"""Due items: a person's word on one."""

from __future__ import annotations

from functools import partial
from typing import TYPE_CHECKING

from app.deeds.doer import Doer
from app.operations.outcome import Outcome
from app.operations.recording import Recorded
from app.session.failure import Failure
from core.judgement.shapes import DueFigure

if TYPE_CHECKING:
    from app.dialogs.close_due import CloseDueDialog


class DueDeeds(Doer):
    """Serves the menu Log's entry on due items."""

    asking: CloseDueDialog | None = None

    def close(self) -> None:
        """Ask which item, and whether it is done or not needed; the one that has the focus is proposed."""
        from app.dialogs.close_due import CloseDueDialog

        items = self._open_items()
        if not items:
            self.window.say(self.tr("Nothing is due."))
            return
        focused = self._focused()
        chosen = focused if focused in items else items[0]
        key, window = self.model.session.selection or "", self.window
        close = partial(self._close, key)  # whoever is in hand by then
        self.asking = CloseDueDialog(self.label_of(key), items, chosen, window.reader, close, window.theme, window)
        self.asking.open()

    def _open_items(self) -> list[DueFigure]:
        feed, key = self.window.feed, self.model.session.selection
        answer = feed.answers.get(key or "") if feed is not None else None
        return [d for d in answer.figures.due if d.state != "done"] if answer is not None else []

    def _focused(self) -> DueFigure | None:
        from PySide6.QtWidgets import QApplication

        payload = getattr(QApplication.focusWidget(), "payload", None)
        return payload if isinstance(payload, DueFigure) else None

    def _close(self, episode: str, what: str, words: str, reason: str) -> None:
        from app.operations import due

        request = due.DueRequest(episode, what, words, reason)
        self.model.ask(due.close, request, done=self._closed, failed=self._not_closed)

    def _not_closed(self, failure: Failure) -> None:
        self.refused(self.asking, failure)

    def _closed(self, outcome: Outcome[Recorded]) -> None:
        if self.asking is not None and not self.asking.is_filled_in:
            self.asking.accept()
            self.asking.deleteLater()
            self.asking = None
        if self.window.strip is not None:
            told = self.tr("Your word on the due item is recorded for {label}.")
            self.window.strip.take(outcome.value, told.format(label=self.label_of(outcome.value.episode)))
