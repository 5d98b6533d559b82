"""Correcting what a device wrote: leave a span of samples out, move it to the right time, take either back."""

from __future__ import annotations

from PySide6.QtCore import Qt, QTimer, Signal
from PySide6.QtWidgets import QLabel, QLineEdit, QListWidget, QListWidgetItem, QPushButton, QWidget

from app.dialogs.drafted import DraftedDialog
from app.forms.typed_time import typed_time
from app.look.choice_row import ChoiceRow
from app.look.formats import span, trimmed
from app.look.theme import Theme
from app.operations import correction
from app.operations import device_span as operations
from app.operations.outcome import Outcome
from app.operations.recording import Recorded
from app.session.failure import Failure
from app.session.model import SessionModel
from app.telling.phrases import channel_name
from app.words import Reader, sentence
from core.record.message import RecordError

LEAVE_OUT, MOVE = "leave out", "move"
_ASK_MS = 250


class DeviceSpanDialog(DraftedDialog):
    """For one episode. How many samples are meant is said before anything is recorded; `recorded` is for undo."""

    recorded = Signal(object)

    def __init__(
        self, model: SessionModel, episode: str, label: str, reader: Reader, theme: Theme,
        parent: QWidget | None = None,
    ) -> None:  # fmt: skip
        super().__init__("", "", theme, parent)
        self.setWindowTitle(self.tr("Device samples of {label}").format(label=label))
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.go.setText(self.tr("Record it"))
        self._model, self._episode, self._reader = model, episode, reader
        self.found = operations.DeviceRecord((), ())
        self.channels, self.spans = QListWidget(), QListWidget()
        self.start, self.end, self.minutes, self.reason = QLineEdit(), QLineEdit(), QLineEdit(), QLineEdit()
        self.act = ChoiceRow("", ((LEAVE_OUT, self.tr("do not count")), (MOVE, self.tr("belong to another time"))))
        self.meant = QLabel()
        self.back = QPushButton(self.tr("Take the chosen back"))
        self.every = QPushButton(self.tr("All channels"))
        for button in (self.back, self.every):
            button.setProperty("role", "small")
            button.setAutoDefault(False)
        self._ask = QTimer(self)
        self._ask.setSingleShot(True)
        self._ask.setInterval(_ASK_MS)
        self._ask.timeout.connect(self._ask_count)
        self._lay_out()
        self._connect()
        self.begin_draft()
        self.resize(theme.px(680), theme.px(440))
        self._ask_list()

    def _lay_out(self) -> None:
        told = QLabel(
            self.tr("For a span that the device wrote while it was on nobody, on somebody else, or with its clock "
                    "wrong. The samples stay in the ledger.")
        )  # fmt: skip
        told.setWordWrap(True)
        self.body.addWidget(told)
        for widget, name in ((self.channels, self.tr("Channels")), (self.spans, self.tr("Said before"))):
            widget.setAccessibleName(name)
            widget.setFixedHeight(self.theme.px(150 if widget is self.channels else 96))
            widget.setWordWrap(True)
            widget.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.start.setPlaceholderText(self.tr("e.g. 03:10"))
        self.end.setPlaceholderText(self.tr("e.g. 03:40"))
        self.minutes.setPlaceholderText(self.tr("minutes later, e.g. 60; earlier, e.g. -60"))
        self.reason.setPlaceholderText(self.tr("why, in a few words"))
        self.field(self.tr("Channels"), self.channels)
        self.form.addRow("", self.every)
        self.field(self.tr("From"), self.start)
        self.field(self.tr("To"), self.end)
        self.field(self.tr("They"), self.act)
        self.field(self.tr("By"), self.minutes)
        self.field(self.tr("Reason"), self.reason)
        self.form.addRow("", self.meant)
        self.field(self.tr("Said before"), self.spans)
        self.form.addRow("", self.back)

    def _connect(self) -> None:
        for line in (self.start, self.end):
            line.textEdited.connect(self._ask.start)
        self.channels.itemChanged.connect(self._ask.start)
        self.act.chosen.connect(self._act_chosen)
        self.back.clicked.connect(self._take_back)
        self.every.clicked.connect(self._tick_every)
        self.spans.itemSelectionChanged.connect(self._span_chosen)
        self._act_chosen(LEAVE_OUT)
        self._span_chosen()

    def _act_chosen(self, key: str) -> None:
        self.form.setRowVisible(self.minutes, key == MOVE)
        self.grow()

    def _span_chosen(self) -> None:
        self.back.setEnabled(bool(self.spans.selectedItems()))

    # what there is

    def _ask_list(self) -> None:
        self._model.ask(operations.listed, self._episode, done=self._listed, failed=self.failed)

    def _listed(self, outcome: Outcome[operations.DeviceRecord]) -> None:
        self.found = outcome.value
        zone, chosen = self._reader.zone, set(self.chosen())
        self.channels.clear()
        for c in self.found.channels:
            text = self.tr("{channel}: {count} samples, {span}").format(
                channel=channel_name(c.channel), count=c.count, span=span(c.first, c.last, zone))  # fmt: skip
            item = QListWidgetItem(text)
            item.setData(Qt.ItemDataRole.UserRole, c.channel)
            item.setCheckState(Qt.CheckState.Checked if c.channel in chosen else Qt.CheckState.Unchecked)
            self.channels.addItem(item)
        self.spans.clear()
        self.spans.addItems([self._span_words(s) for s in self.found.spans])
        has = bool(self.found.spans)
        for part in (self.spans, self.back):
            self.form.setRowVisible(part, has)
        if not self.found.channels and not has:
            self.say(self.tr("No device has written anything for this patient."))
        self.go.setEnabled(bool(self.found.channels))
        self.grow()

    def _span_words(self, s: operations.SpanInForce) -> str:
        names = ", ".join(channel_name(c) for c in s.channels)
        what = self.tr("left out")
        if s.minutes:
            what = self.tr("moved by {minutes} min").format(minutes=trimmed(s.minutes))
        told = self.tr("{span}: {names} {what}, {by}: {reason}")
        return told.format(span=span(s.start, s.end, self._reader.zone), names=names, what=what, by=s.by,
                           reason=s.reason)  # fmt: skip

    def chosen(self) -> tuple[str, ...]:
        """The channels that are ticked."""
        items = [self.channels.item(n) for n in range(self.channels.count())]
        return tuple(str(i.data(Qt.ItemDataRole.UserRole)) for i in items if i.checkState() == Qt.CheckState.Checked)

    def _tick_every(self) -> None:
        """A clock that was off was off for all that the device wrote."""
        for n in range(self.channels.count()):
            self.channels.item(n).setCheckState(Qt.CheckState.Checked)

    # what is meant

    def request(self) -> operations.SpanRequest | None:
        """What the fields ask for; None while they do not say enough.

        Raises:
            RecordError: a time or a number of minutes cannot be read.
        """
        now, zone = self._model.session.now(), self._reader.zone
        start, end = (typed_time(line.text(), now, zone) for line in (self.start, self.end))
        if start is None or end is None or not self.chosen():
            return None
        minutes = self._minutes() if self.act.key == MOVE else 0.0
        return operations.SpanRequest(self._episode, self.chosen(), start, end, self.reason.text(), minutes)

    def _minutes(self) -> float:
        from core.record.message import refuse

        text = self.minutes.text().strip().replace(",", ".").replace("\N{MINUS SIGN}", "-")
        try:
            minutes = float(text)
        except ValueError:
            minutes = 0.0
        if not minutes or minutes != minutes or abs(minutes) > operations.MOST_MINUTES:
            raise refuse("device.moved_too_far", value=text or "nothing", accepted=operations.MOST_MINUTES)
        return minutes

    def _ask_count(self) -> None:
        self.meant.clear()
        try:
            request = self.request()
        except RecordError as error:
            self.say(sentence(error.message, self._reader))
            return
        self.say("")
        if request is not None:
            self._model.ask(operations.counted, request, done=self._counted, failed=self.failed, subject="span count")

    def _counted(self, outcome: Outcome[int]) -> None:
        self.meant.setText(self.tr("{count} samples are meant.").format(count=outcome.value))
        self.grow()

    # deeds

    def submit(self) -> None:
        try:
            request = self.request()
        except RecordError as error:
            self.refuse(sentence(error.message, self._reader))
            return
        if request is None:
            self.refuse(self.tr("Tick a channel, and type from when to when."))
            return
        if not self._model.session.person:
            self.refuse(self.tr("Nobody is signed in. Leave the form: Ctrl+I says who you are."))
            return
        self.go.setEnabled(False)
        self._model.ask(operations.record, request, done=self._recorded, failed=self.failed)
        self.is_recording = True

    def _recorded(self, outcome: Outcome[Recorded]) -> None:
        self.is_recording = False
        self.recorded.emit(outcome.value)
        for line in (self.start, self.end, self.minutes, self.reason):
            line.clear()
        self.meant.clear()
        self.refuse(self.tr("Recorded. Ctrl+Z in the window, or the list above, takes it back."))
        self._ask_list()

    def _take_back(self) -> None:
        row = self.spans.currentRow()
        if 0 <= row < len(self.found.spans):
            request = correction.UndoRequest(self._episode, self.found.spans[row].ids)
            self._model.ask(correction.undo, request, done=self._taken_back, failed=self.failed)

    def _taken_back(self, _outcome: Outcome[Recorded]) -> None:
        self.refuse(self.tr("Taken back: the samples count as they were written."))
        self._ask_list()

    def failed(self, failure: Failure) -> None:
        """Say why it was refused."""
        self.is_recording = False
        self.refuse(sentence(failure.message, self._reader))
