"""What was logged for a patient, to be corrected, withdrawn or moved, with a reason. The old stays visible."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from enum import StrEnum

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QLabel, QLineEdit, QWidget

from app.dialogs.drafted import DraftedDialog
from app.dialogs.logged_list import LoggedList, named_value
from app.forms.typed_time import typed_near
from app.look.chooser import Chooser
from app.look.formats import lately, wall
from app.look.theme import Theme
from app.operations import correction, intake
from app.operations.outcome import Outcome
from app.operations.recording import Recorded
from app.session.failure import Failure
from app.session.model import SessionModel
from app.strip.settle_time import SettleTime
from app.telling.phrases import channel_name
from app.words import Reader, sentence
from core.record.channels import CHANNELS, Kind
from core.record.entries import Action, Entry
from core.record.episode import Episode
from core.record.gas_together import gas_with
from core.record.instant import Instant
from core.record.line_time import moment_near
from core.record.local_time import local, zoned_iso
from core.record.message import Message, RecordError
from core.record.units import written

_OF = "entry"
"""The name in a draft of the value that it is about."""


class Act(StrEnum):
    """What is to be done to an entry."""

    CORRECT = "correct"
    WITHDRAW = "withdraw"
    MOVE = "move"


class Of(StrEnum):
    """How much of a gas."""

    WHOLE = "whole"
    ONE = "one"


class CorrectDialog(DraftedDialog):
    """Newest entries first. `recorded` after it was done, so that it can be undone."""

    recorded = Signal(object, str)
    """What was recorded, and a sentence that says so."""

    def __init__(
        self,
        model: SessionModel,
        record: Episode,
        labels: Mapping[str, str],
        reader: Reader,
        theme: Theme,
        parent: QWidget | None = None,
    ) -> None:
        title = labels.get(record.key, record.key)
        super().__init__("", "", theme, parent)
        self.setWindowTitle(self.tr("Correct or withdraw, {label}").format(label=title))
        self.go.setText(self.tr("Record it"))
        self._model, self._record, self._reader, self._labels = model, record, reader, labels
        self._confirmed = False
        self._sent: correction.Request | None = None
        self.settle = SettleTime()
        self.whom = QLabel(title)
        self.whom.setTextFormat(Qt.TextFormat.PlainText)
        self.whom.setWordWrap(True)
        self.whom.setProperty("role", "title")
        self.body.addWidget(self.whom)
        self.list = LoggedList(record, reader)
        self.act, self.to, self.of = Chooser(), Chooser(), Chooser()
        self.value, self.time, self.reason = QLineEdit(), QLineEdit(), QLineEdit()
        self.list.setMinimumHeight(theme.px(112))
        self.add_body(self.list)
        self._add_fields({key: label for key, label in labels.items() if key != record.key})
        self.list.currentItemChanged.connect(self._chosen)
        self._chosen()
        self._act_chosen()
        model.ask(intake.origins, record.key, done=self._show_origins)
        self.resize(theme.px(860), theme.px(640))

    def _add_fields(self, others: Mapping[str, str]) -> None:
        self.act.addItem(self.tr("correct the value or the time"), Act.CORRECT)
        self.act.addItem(self.tr("withdraw: it must not count"), Act.WITHDRAW)
        self.act.addItem(self.tr("move to another patient"), Act.MOVE)
        for key, label in others.items():
            self.to.addItem(label, key)
        self.of.addItem("", Of.WHOLE)
        self.of.addItem(self.tr("this value alone"), Of.ONE)
        self.field(self.tr("What to do"), self.act)
        self.field(self.tr("Of this gas"), self.of)
        self.field(self.tr("Right value, with unit"), self.value)
        self.field(self.tr("Right time"), self.time)
        self.to.setPlaceholderText(self.tr("Choose the right patient"))
        self.to.setCurrentIndex(-1)
        self.field(self.tr("Right patient"), self.to)
        self.field(self.tr("Reason"), self.reason)
        self.time.setPlaceholderText(self.tr("14:20, second 01:30, 20m ago"))
        self.time.setToolTip(self.tr("The nearest such time to the one it was logged for"))
        self.act.currentIndexChanged.connect(self._act_chosen)
        for chosen in (self.of, self.to):
            chosen.currentIndexChanged.connect(self._changed)
        for edited in (self.value, self.time):
            edited.textChanged.connect(self._changed)

    def _show_origins(self, outcome: Outcome[dict[str, str]]) -> None:
        self.list.show_origins(outcome.value)

    def _chosen(self) -> None:
        found = self._entry()
        if found is not None:
            is_mark = CHANNELS[found.channel].kind is Kind.MARK
            self.value.setText(found.words or "" if is_mark else self._editable(found))
            is_time = CHANNELS[found.channel].kind is Kind.INSTANT
            self.value.setPlaceholderText(self.tr("01:30, yesterday 23:10, 27-Mar-2026 23:10") if is_time else "")
            moment = local(found.at, self._reader.zone)
            self.time.setText(f"{moment:%H:%M}")
            self.of.setCurrentIndex(0)
            self._name_gas(found)
            self._changed()
            self.begin_draft("value", "time", "of")

    def _name_gas(self, found: Entry) -> None:
        """The values of a gas go together unless somebody says otherwise."""
        together = gas_with(found.id, self._record.standing)
        names = ", ".join(channel_name(e.channel) for e in together)
        is_time = self.act.currentData() == Act.CORRECT
        text = self.tr("a new time for all of it: {names}") if is_time else self.tr("all of it: {names}")
        self.of.setItemText(0, text.format(names=names))
        self.form.setRowVisible(self.of, len(together) > 1)

    def typed(self) -> dict[str, str]:
        """What is half typed, and for which value."""
        found, entry = super().typed(), self._entry()
        return found | {_OF: entry.id} if found and entry is not None else found

    def put(self, typed: Mapping[str, str]) -> None:
        """Choose the value that it was typed for; where that stands no more nothing but the reason comes back."""
        if not self.list.choose(typed.get(_OF, "")):
            super().put({name: text for name, text in typed.items() if name == "reason"})
            self.refuse(self.tr("The value that this was typed for stands no more: choose again."))
            return
        super().put(typed)

    def _entry(self) -> Entry | None:
        return next((s.entry for s in self._record.standing if s.entry.id == self.list.entry_id), None)

    def _act_chosen(self) -> None:
        act = self.act.currentData()
        self.value.setEnabled(act == Act.CORRECT)
        self.time.setEnabled(act == Act.CORRECT)
        self.to.setEnabled(act == Act.MOVE)
        self.to.setCurrentIndex(-1)
        self.form.setRowVisible(self.to, act == Act.MOVE)
        found = self._entry()
        if found is not None:
            self._name_gas(found)
        self._changed()

    def _changed(self) -> None:
        """A yes was for the value that stood there."""
        self._confirmed = False
        self.settle.clear()
        self.wrong.clear()

    def submit(self) -> None:
        if not self.settle.is_over:
            return
        found = self._entry()
        if found is None:
            self.refuse(self.tr("Choose what was logged."))
            return
        if self.act.currentData() == Act.MOVE and self.to.currentData() is None:
            self.refuse(self.tr("Choose the right patient."))
            self.to.setFocus()
            return
        if not self.reason.text().strip():
            self.refuse(self.tr("Give the reason in a few words."))
            self.reason.setFocus()
            return
        try:
            self._ask(found)
        except RecordError as error:
            self.refuse(sentence(error.message, self._reader))

    def _ask(self, found: Entry) -> None:
        self._sent = self._right(found)
        do: dict[Act, Callable[..., Outcome[Recorded]]]
        do = {Act.WITHDRAW: correction.withdraw, Act.MOVE: correction.move, Act.CORRECT: correction.correct}
        self._model.ask(do[self.act.currentData()], self._sent, done=self._done, failed=self._failed)
        self.is_recording = True

    def _right(self, found: Entry) -> correction.Request:
        act, reason = self.act.currentData(), self.reason.text()
        confirmed, alone = self._confirmed, self.of.currentData() == Of.ONE
        if act == Act.WITHDRAW:
            return correction.WithdrawalRequest(found.episode, found.id, reason, confirmed, alone)
        if act == Act.MOVE:
            to = self.to.currentData()
            return correction.MoveRequest(found.episode, found.id, to, reason, confirmed, alone)
        value, unit = self._typed(found)
        at = self._at(found)
        return correction.CorrectionRequest(found.episode, found.id, reason, value, unit, at, confirmed, alone)

    def _typed(self, found: Entry) -> tuple[str | None, str]:
        text = self.value.text().strip()
        if text == self._editable(found):
            return None, ""
        if CHANNELS[found.channel].kind is Kind.INSTANT and found.number is not None and text:
            near, now = int(found.number), self._model.session.now()
            return zoned_iso(moment_near(text, near, now, self._reader.zone), self._reader.zone), ""
        if CHANNELS[found.channel].kind is Kind.NUMBER:
            value, _, unit = text.partition(" ")
            return value, unit.strip()
        return text, ""

    def _editable(self, entry: Entry) -> str:
        """What was typed, to be typed anew: a moment by the wall's clock; else the number, a space, and its unit as
        people write it."""
        if CHANNELS[entry.channel].kind is Kind.INSTANT and entry.number is not None:
            return lately(int(entry.number), self._model.session.now(), self._reader.zone)
        return f"{entry.raw} {written(entry.raw_unit)}".strip()

    def _at(self, found: Entry) -> Instant | None:
        """The right time, or None where it was left as it is: near the time it was logged for."""
        text = self.time.text().strip()
        if text == f"{local(found.at, self._reader.zone):%H:%M}":
            return None
        return typed_near(text, found.at, self._model.session.now(), self._reader.zone)

    def _done(self, outcome: Outcome[Recorded]) -> None:
        self.is_recording = False
        self.recorded.emit(outcome.value, self._told(outcome.value))
        self.accept()

    def _told(self, made: Recorded) -> str:
        """What was done to which values, of which moment, and for whom."""
        by_id = {s.entry.id: s.entry for s in self._record.standing}
        olds = [by_id.get(e.replaces, e) for e in made.entries]  # another may have added to the gas meanwhile
        what = ", ".join(named_value(e, self._reader) for e in olds)
        new = ", ".join(named_value(e, self._reader) for e in made.entries)
        told = {
            Action.MOVE: self.tr("Moved from {label} to {to}: {what} of {when}."),
            Action.WITHDRAW: self.tr("Withdrawn for {label}: {what} of {when}."),
        }.get(made.entries[0].action, self.tr("Corrected for {label}: {what} of {when} to {new} of {then}."))
        zone = self._reader.zone
        return told.format(
            label=self._labels.get(self._record.key, self._record.key), what=what, new=new,
            to=self._labels.get(made.episode, made.episode),
            when=wall(olds[0].at, zone), then=wall(made.entries[0].at, zone),
        )  # fmt: skip

    def _failed(self, failure: Failure) -> None:
        self.is_recording = False
        if failure.message.key == "line.unconfirmed" and self._sent is not None:
            if self._still_sent():  # else the question is about what no longer stands there
                self._model.ask(correction.correction_questions, self._sent, done=self._asked, failed=self._failed)
            return
        self.refuse(sentence(failure.message, self._reader))

    def _asked(self, outcome: Outcome[tuple[Message, ...]]) -> None:
        """What is to be recorded raises questions: pressing again says yes to them."""
        if not self._still_sent():
            return
        self._confirmed = True
        self.settle.start()
        told = " ".join(sentence(m, self._reader) for m in outcome.value)
        self.refuse(self.tr("{asked} 'Record it' again says yes.").format(asked=told))

    def _still_sent(self) -> bool:
        found = self._entry()
        try:
            return found is not None and self._right(found) == self._sent
        except RecordError:
            return False
