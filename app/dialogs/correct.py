"""What was logged for a patient, to be corrected, withdrawn or moved, with a reason. The old stays visible."""

from __future__ import annotations

from collections.abc import Mapping
from enum import StrEnum

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QAbstractItemView,
    QHeaderView,
    QLabel,
    QLineEdit,
    QTreeWidget,
    QTreeWidgetItem,
    QWidget,
)

from app.dialogs.drafted import DraftedDialog
from app.forms.typed_time import typed_near
from app.look.chooser import Chooser
from app.look.copying import can_be_copied
from app.look.formats import inert, logged, wall
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
from core.record.entries import Entry
from core.record.episode import Episode
from core.record.instant import Instant
from core.record.local_time import local
from core.record.message import Message, RecordError
from core.record.units import written

_ENTRY = Qt.ItemDataRole.UserRole
_BY = 3
_OF = "entry"
"""The name in a draft of the value that it is about."""


class Act(StrEnum):
    """What is to be done to an entry."""

    CORRECT = "correct"
    WITHDRAW = "withdraw"
    MOVE = "move"


class CorrectDialog(DraftedDialog):
    """Newest entries first. `recorded` after it was done, so that it can be undone."""

    recorded = Signal(object)

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
        self._model, self._record, self._reader = model, record, reader
        self._confirmed = False
        self._sent: correction.CorrectionRequest | None = None
        self.settle = SettleTime()
        self.whom = QLabel(title)
        self.whom.setTextFormat(Qt.TextFormat.PlainText)
        self.whom.setWordWrap(True)
        self.whom.setProperty("role", "title")
        self.body.addWidget(self.whom)
        self.list = QTreeWidget()
        can_be_copied(self.list)
        self.act, self.to = Chooser(), Chooser()
        self.value, self.time, self.reason = QLineEdit(), QLineEdit(), QLineEdit()
        self._add_list()
        self._add_fields({key: label for key, label in labels.items() if key != record.key})
        self._fill()
        self._act_chosen()
        model.ask(intake.origins, record.key, done=self._show_origins)
        self.resize(theme.px(860), theme.px(640))

    def _add_list(self) -> None:
        self.list.setAccessibleName(self.tr("Logged values, newest first"))
        self.list.setHeaderLabels(
            [self.tr("When"), self.tr("What"), self.tr("Value"), self.tr("By"), self.tr("Marks")]
        )
        self.list.setRootIsDecorated(False)
        self.list.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
        self.list.header().setSectionResizeMode(QHeaderView.ResizeMode.ResizeToContents)
        self.list.header().setStretchLastSection(False)
        self.list.header().setSectionResizeMode(2, QHeaderView.ResizeMode.Stretch)
        self.list.setTextElideMode(Qt.TextElideMode.ElideRight)
        self.list.currentItemChanged.connect(self._chosen)
        self.list.setMinimumHeight(self.theme.px(112))
        self.add_body(self.list)

    def _add_fields(self, others: Mapping[str, str]) -> None:
        self.act.addItem(self.tr("correct the value or the time"), Act.CORRECT)
        self.act.addItem(self.tr("withdraw: it must not count"), Act.WITHDRAW)
        self.act.addItem(self.tr("move to another patient"), Act.MOVE)
        for key, label in others.items():
            self.to.addItem(label, key)
        self.field(self.tr("What to do"), self.act)
        self.field(self.tr("Right value, with unit"), self.value)
        self.field(self.tr("Right time"), self.time)
        self.to.setPlaceholderText(self.tr("Choose the right patient"))
        self.to.setCurrentIndex(-1)
        self.field(self.tr("Right patient"), self.to)
        self.field(self.tr("Reason"), self.reason)
        self.time.setPlaceholderText(self.tr("14:20, second 01:30, 20m ago"))
        self.time.setToolTip(self.tr("The nearest such time to the one it was logged for"))
        self.act.currentIndexChanged.connect(self._act_chosen)
        for edited in (self.value, self.time):
            edited.textChanged.connect(self._changed)

    def _fill(self) -> None:
        for s in sorted(self._record.standing, key=lambda s: (-s.entry.at, -s.entry.seq)):
            e = s.entry
            if CHANNELS[e.channel].kind is Kind.MARK:
                shown = e.words or ""
            else:
                value = e.number if e.number is not None else e.words
                shown = logged(e.channel, value, e.raw, e.raw_unit, self._reader.gas_unit)
            marks = [
                word
                for word, held in (
                    (self.tr("corrected"), s.corrected),
                    (self.tr("disputed"), s.disputed),
                    (self.tr("doubtful"), bool(e.doubt)),
                )
                if held
            ]
            item = QTreeWidgetItem(
                [wall(e.at, self._reader.zone), channel_name(e.channel), shown, e.by, ", ".join(marks)]
            )
            item.setData(0, _ENTRY, e.id)
            self.list.addTopLevelItem(item)
        first = self.list.topLevelItem(0)
        if first is not None:
            self.list.setCurrentItem(first)

    def _show_origins(self, outcome: Outcome[dict[str, str]]) -> None:
        """Beside who wrote a value the file it came from."""
        for row in range(self.list.topLevelItemCount()):
            item = self.list.topLevelItem(row)
            name = outcome.value.get(str(item.data(0, _ENTRY))) if item is not None else None
            if item is not None and name:
                item.setText(_BY, self.tr("{by}, {file}").format(by=item.text(_BY), file=name))
                item.setToolTip(_BY, inert(item.text(_BY)))

    def _chosen(self) -> None:
        found = self._entry()
        if found is not None:
            is_mark = CHANNELS[found.channel].kind is Kind.MARK
            self.value.setText(found.words or "" if is_mark else _editable(found))
            moment = local(found.at, self._reader.zone)
            self.time.setText(f"{moment:%H:%M}")
            self.begin_draft("value", "time")

    def typed(self) -> dict[str, str]:
        """What is half typed, and for which value."""
        found, entry = super().typed(), self._entry()
        return found | {_OF: entry.id} if found and entry is not None else found

    def put(self, typed: Mapping[str, str]) -> None:
        """Choose the value that it was typed for; where that stands no more nothing but the reason comes back."""
        rows = [self.list.topLevelItem(n) for n in range(self.list.topLevelItemCount())]
        own = next((item for item in rows if item is not None and item.data(0, _ENTRY) == typed.get(_OF)), None)
        if own is None:
            super().put({name: text for name, text in typed.items() if name == "reason"})
            self.refuse(self.tr("The value that this was typed for stands no more: choose again."))
            return
        self.list.setCurrentItem(own)
        super().put(typed)

    def _entry(self) -> Entry | None:
        item = self.list.currentItem()
        wanted = item.data(0, _ENTRY) if item is not None else None
        return next((s.entry for s in self._record.standing if s.entry.id == wanted), None)

    def _act_chosen(self) -> None:
        act = self.act.currentData()
        self.value.setEnabled(act == Act.CORRECT)
        self.time.setEnabled(act == Act.CORRECT)
        self.to.setEnabled(act == Act.MOVE)
        self.to.setCurrentIndex(-1)
        self.form.setRowVisible(self.to, act == Act.MOVE)
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
        if not self.reason.text().strip():
            self.refuse(self.tr("Give the reason in a few words."))
            self.reason.setFocus()
            return
        if self.act.currentData() == Act.MOVE and self.to.currentData() is None:
            self.refuse(self.tr("Choose the right patient."))
            self.to.setFocus()
            return
        try:
            self._ask(found)
        except RecordError as error:
            self.refuse(sentence(error.message, self._reader))

    def _ask(self, found: Entry) -> None:
        act, reason = self.act.currentData(), self.reason.text()
        if act == Act.WITHDRAW:
            request: object = correction.WithdrawalRequest(found.episode, found.id, reason)
            self._model.ask(correction.withdraw, request, done=self._done, failed=self._failed)
        elif act == Act.MOVE:
            request = correction.MoveRequest(found.episode, found.id, self.to.currentData(), reason)
            self._model.ask(correction.move, request, done=self._done, failed=self._failed)
        else:
            self._sent = self._right(found)
            self._model.ask(correction.correct, self._sent, done=self._done, failed=self._failed)

    def _right(self, found: Entry) -> correction.CorrectionRequest:
        value, unit = self._typed(found)
        reason, at = self.reason.text(), self._at(found)
        return correction.CorrectionRequest(found.episode, found.id, reason, value, unit, at, self._confirmed)

    def _typed(self, found: Entry) -> tuple[str | None, str]:
        text = self.value.text().strip()
        if text == _editable(found):
            return None, ""
        if CHANNELS[found.channel].kind is Kind.NUMBER:
            value, _, unit = text.partition(" ")
            return value, unit.strip()
        return text, ""

    def _at(self, found: Entry) -> Instant | None:
        """The right time, or None where it was left as it is: near the time it was logged for."""
        text = self.time.text().strip()
        if text == f"{local(found.at, self._reader.zone):%H:%M}":
            return None
        return typed_near(text, found.at, self._model.session.now(), self._reader.zone)

    def _done(self, outcome: Outcome[Recorded]) -> None:
        self.recorded.emit(outcome.value)
        self.accept()

    def _failed(self, failure: Failure) -> None:
        if failure.message.key == "line.unconfirmed" and self._sent is not None:
            if self._still_sent():  # else the question is about what no longer stands there
                self._model.ask(correction.correction_questions, self._sent, done=self._asked, failed=self._failed)
            return
        self.refuse(sentence(failure.message, self._reader))

    def _asked(self, outcome: Outcome[tuple[Message, ...]]) -> None:
        """The right value raises questions: pressing again says yes to them."""
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


def _editable(entry: Entry) -> str:
    """What was typed, to be typed anew: the number, a space, and its unit as people write it."""
    return f"{entry.raw} {written(entry.raw_unit)}".strip()
