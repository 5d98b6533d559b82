"""Logging: the strip, its one-key entries, forms, corrections, undo."""

from __future__ import annotations

from app.deeds.doer import Doer
from app.log_strip import LogStrip
from app.operations import episode as episode_operations
from app.operations.episode import BeginRequest
from app.operations.outcome import Outcome


class LogDeeds(Doer):
    """Serves the menu Log."""

    @property
    def strip(self) -> LogStrip:
        """The strip; there only where a store is open."""
        if self.window.strip is None:
            raise RuntimeError("no store is open: this action is greyed then")
        return self.window.strip

    def do_focus_strip(self) -> None:
        """Go to the line."""
        self.strip.focus()

    def do_gas_sent(self) -> None:
        """A gas was sent."""
        self.strip.gas_sent()

    def do_mask(self) -> None:
        """The mask came off, or went on."""
        self.strip.mask_moved()

    def do_checked(self) -> None:
        """Looked, changed nothing."""
        self.strip.checked()

    def do_told(self) -> None:
        """Whom was told."""
        self.strip.told()

    def do_undo(self) -> None:
        """Take back the last recording."""
        self.strip.undo()

    def do_new_episode(self) -> None:
        """Ask for the facts of a new episode."""
        from app.dialogs.new_episode import NewEpisodeDialog

        session = self.model.session
        self._dialog = NewEpisodeDialog(
            session.policy, session.now(), self.window.reader, self._begin, self.window.theme, self.window
        )
        self._dialog.open()

    def _begin(self, request: BeginRequest) -> None:
        self._begun = request.episode
        self.model.ask(
            episode_operations.begin, request, done=self._episode_begun, failed=self._dialog.failed
        )

    def _episode_begun(self, outcome: Outcome[tuple[str, ...]]) -> None:  # noqa: ARG002
        self._dialog.accept()
        self._dialog.deleteLater()
        self.model.select(self._begun)

    def do_correct(self) -> None:
        """Show what was logged for this patient, to be corrected, withdrawn or moved."""
        from app.dialogs.correct import CorrectDialog

        feed, key = self.window.feed, self.model.session.selection
        if feed is None or key is None or key not in feed.answers:
            return
        labels = {k: a.figures.label for k, a in feed.answers.items()}
        dialog = CorrectDialog(
            self.model, feed.answers[key].record, labels, self.window.reader, self.window.theme, self.window
        )
        dialog.recorded.connect(self.strip.remember)
        dialog.open()
