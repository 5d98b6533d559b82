"""Logging: the strip, its one-key entries, forms, corrections, undo."""

from __future__ import annotations

from collections.abc import Callable
from functools import partial

from app.deeds.due import DueDeeds
from app.deeds.forms import FormDeeds
from app.keeping.keeper import Keeping
from app.operations import flag as flag_operations
from app.operations.outcome import Outcome
from app.operations.recording import Recorded
from app.session.failure import Failure
from app.ward.lane_words import strongest_flag
from app.ward.moves import labels_told_apart
from app.window.shell import Shell
from core.judgement.shapes import FlagFigure


class LogDeeds(FormDeeds):
    """Serves the menu Log."""

    def __init__(self, window: Shell, keeping: Keeping, due: DueDeeds) -> None:
        super().__init__(window, keeping)
        self._due = due

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
        from app.forms.begin_form import BeginForm

        window = self.window
        self._begin_form = BeginForm("", self.model, window.preferences.gas_unit, window.theme, window)
        self._begin_form.recorded.connect(self._episode_begun)
        self.show_form(self._begin_form)

    def openers(self) -> dict[str, Callable[[], None]]:
        return {**super().openers(), "BeginForm": self.do_new_episode, "CorrectDialog": self.do_correct,
                "DeviceSpanDialog": self.do_device_span}  # fmt: skip

    def _episode_begun(self, recorded: Recorded) -> None:
        self.strip.remember(recorded)
        self.model.select(recorded.episode)
        label = next((e.words for e in recorded.entries if e.channel == "label"), recorded.episode)
        told = self.tr("{label} has begun. Ctrl+Z takes the whole episode back.").format(label=label)
        self.strip.say_of(recorded.episode, told)

    # flags

    def do_flag_seen(self) -> None:
        """Say that the chosen flag, else the strongest open one, has been seen."""
        flag = self._flag()
        if flag is not None:
            request = flag_operations.FlagRequest(self.model.session.selection or "", flag.flag_id)
            self.model.ask(flag_operations.see, request, done=self._flag_said, failed=self.window.show_failure)

    def do_settle_flag(self) -> None:
        """Ask for the reason, then settle the chosen flag, else the strongest open one."""
        from app.dialogs.settle_flag import SettleDialog

        flag = self._flag()
        if flag is not None:
            key, window = self.model.session.selection or "", self.window
            settle = partial(self._settle, key)  # whoever is in hand by then
            self._settling = SettleDialog(self.label_of(key), flag, window.reader, settle, window.theme, window)
            self._settling.open()

    def _settle(self, episode: str, flag: FlagFigure, reason: str) -> None:
        request = flag_operations.FlagRequest(episode, flag.flag_id, reason)
        self.model.ask(flag_operations.settle, request, done=self._flag_settled, failed=self._not_settled)

    def _not_settled(self, failure: Failure) -> None:
        self.refused(self._settling, failure)

    def _flag_settled(self, outcome: Outcome[Recorded]) -> None:
        if not self._settling.is_filled_in:
            self._settling.accept()
        self._flag_said(outcome)

    def _flag_said(self, outcome: Outcome[Recorded]) -> None:
        told = self.tr("Your word on the flag is recorded for {label}.")
        self.strip.take(outcome.value, told.format(label=self.label_of(outcome.value.episode)))

    def _flag(self) -> FlagFigure | None:
        """The flag that has the focus, else the one chosen on its lane, else the strongest open one."""
        from PySide6.QtWidgets import QApplication

        chosen = [getattr(QApplication.focusWidget(), "payload", None)]
        item = self.pages.ward.lanes.selected_item
        if self.pages.name == "ward" and item is not None:
            chosen.append(item.payload)
        found = next((p for p in chosen if isinstance(p, FlagFigure)), None)
        if found is not None:
            return found
        feed = self.window.feed
        answer = feed.answers.get(self.model.session.selection or "") if feed is not None else None
        flag = strongest_flag(answer.figures) if answer is not None else None
        if flag is None:
            self.window.say(self.tr("No open flag."))
        return flag

    def do_close_due(self) -> None:
        """A person's word on a due item."""
        self._due.close()

    def do_correct(self) -> None:
        """Show what was logged for this patient, to be corrected, withdrawn or moved."""
        from app.dialogs.correct import CorrectDialog

        feed, key = self.window.feed, self.model.session.selection
        if feed is None or key is None or key not in feed.answers:
            return
        session = self.model.session
        labels = labels_told_apart(feed.answers, session.moment(), session.zone)
        dialog = CorrectDialog(
            self.model, feed.answers[key].record, labels, self.window.reader, self.window.theme, self.window
        )
        self.strip.know_labels(labels)
        dialog.recorded.connect(self.strip.take)
        self.show_form(dialog, key)

    def do_device_span(self) -> None:
        """Leave out or move a span of device samples of this patient."""
        from app.dialogs.device_span import DeviceSpanDialog

        key = self.model.session.selection
        if key is None:
            return
        dialog = DeviceSpanDialog(
            self.model, key, self.strip.whom.text(), self.window.reader, self.window.theme, self.window
        )
        dialog.recorded.connect(self.strip.remember)
        self.show_form(dialog, key)
