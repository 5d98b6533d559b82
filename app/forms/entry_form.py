"""A form that logs: its fields become one line of the log strip, previewed and recorded by the strip's operations.

So a form and the strip cannot differ in what they read, ask or record. The form says before Enter exactly what
will be recorded and for whom; Esc leaves all untouched.
"""

from __future__ import annotations

from collections.abc import Mapping
from html import escape
from typing import NamedTuple

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QShowEvent
from PySide6.QtWidgets import (
    QDialog,
    QFrame,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QPushButton,
    QScrollArea,
    QVBoxLayout,
    QWidget,
)

from app.failure import Failure
from app.forms.cells import Card
from app.operations import entry
from app.operations.entry import LineRequest, Preview, Recorded
from app.operations.outcome import Outcome
from app.readers import reader_at
from app.session import SessionModel
from app.strip.preview_words import PreviewWords, preview_words
from app.theme import Theme
from app.words import Reader, sentence
from core.record.episode import Episode
from core.record.instant import Instant
from core.record.log_line import read_line
from core.record.message import RecordError
from core.record.settings import Settings, SettingsInForce

LEAST_HEIGHT = 400


class Patient(NamedTuple):
    """For whom a form logs."""

    record: Episode
    label: str


class EntryForm(QDialog):
    """Build fields in `build`, turn them into words in `items`. `recorded` after it was done, for the undo."""

    recorded = Signal(object)

    def __init__(
        self,
        patient: Patient,
        model: SessionModel,
        gas_unit: str,
        theme: Theme,
        parent: QWidget | None = None,
    ) -> None:
        super().__init__(parent)
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.patient, self.model, self.gas_unit, self.theme = patient, model, gas_unit, theme
        self.preview: Preview | None = None
        self.asking = False
        self._awaited, self._enter_pending = False, False
        self._sent = ""
        self.title = QLabel(patient.label)
        self.title.setProperty("role", "title")
        self.what = QLabel()
        self.what.setProperty("role", "quiet")
        self.time = QLineEdit()
        self.time.setPlaceholderText(self.tr("now"))
        self.time.setAccessibleName(self.tr("When: now, 14:20, or 20m ago"))
        self.time.setToolTip(self.time.accessibleName())
        self.said, self.as_line = QLabel(), QLabel()
        self.go, self.leave = QPushButton(self.tr("Record")), QPushButton(self.tr("Leave"))
        self.cards = QWidget()
        self.stack = QVBoxLayout(self.cards)
        self.first: QWidget = self.time
        self.build()
        self.stack.addStretch(1)
        self._lay_out()
        self.go.clicked.connect(self.submit)
        self.leave.clicked.connect(self.reject)
        self.time.textEdited.connect(self.edited)
        self.edited()

    # for each form

    def build(self) -> None:
        """Add cards of fields, each joined to `edited`."""
        raise NotImplementedError

    def items(self) -> str:
        """What the fields say, as words of a log line; "" while they say nothing."""
        raise NotImplementedError

    def lacks(self) -> str:
        """What must be filled in first, in words; "" where nothing."""
        return ""

    def show_extra(self) -> None:
        """Show what the form knows beside the preview; called after each answer and each edit."""

    # layout

    def _lay_out(self) -> None:
        """Tab goes through the fields, then to the moment and the buttons: in the order they come to the form."""
        px = self.theme.px
        roll = self.roll = QScrollArea(self)
        self._roll_cards()
        head = QHBoxLayout()
        head.setSpacing(px(10))
        head.addWidget(self.title)
        head.addWidget(self.what)
        head.addStretch(1)
        when = QLabel(self.tr("When"))
        when.setProperty("role", "strong")
        when.setBuddy(self.time)
        head.addWidget(when)
        head.addWidget(self.time)
        self.time.setFixedWidth(px(130))
        column = QVBoxLayout(self)
        column.setContentsMargins(px(18), px(14), px(18), px(14))
        column.setSpacing(px(10))
        column.addLayout(head)
        column.addWidget(roll, 1)
        column.addWidget(self._foot())

    def _roll_cards(self) -> None:
        self.stack.setContentsMargins(0, 0, self.theme.px(4), 0)
        self.stack.setSpacing(self.theme.px(8))
        self.roll.setWidgetResizable(True)
        self.roll.setFrameShape(QFrame.Shape.NoFrame)
        self.roll.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.roll.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.roll.setWidget(self.cards)

    def showEvent(self, event: QShowEvent) -> None:
        super().showEvent(event)
        self.first.setFocus(Qt.FocusReason.TabFocusReason)

    def _foot(self) -> QFrame:
        px = self.theme.px
        foot = QFrame()
        foot.setProperty("card", True)
        self.said.setTextFormat(Qt.TextFormat.RichText)
        self.said.setWordWrap(True)
        self.said.setAlignment(Qt.AlignmentFlag.AlignTop)
        self.said.setMinimumHeight(round(px(self.theme.type.body) * 1.3) * 3)
        self.as_line.setProperty("role", "caption")
        self.as_line.setWordWrap(True)
        self.as_line.setTextFormat(Qt.TextFormat.PlainText)
        self.go.setProperty("role", "primary")
        self.go.setDefault(True)
        self.leave.setAutoDefault(False)
        for button in (self.go, self.leave):
            button.setMinimumHeight(px(44))
        row = QHBoxLayout()
        row.setSpacing(px(8))
        row.addWidget(self.as_line, 1)
        row.addWidget(self.leave)
        row.addWidget(self.go)
        column = QVBoxLayout(foot)
        column.setContentsMargins(px(14), px(10), px(14), px(12))
        column.setSpacing(px(6))
        column.addWidget(self.said)
        column.addLayout(row)
        return foot

    def fit(self, width: int, height: int) -> None:
        """Take the size that is wanted at 100 %, as far as the screen has it; what does not fit scrolls."""
        parent = self.parentWidget()
        room = parent.window().size() if parent is not None else self.screen().availableGeometry().size()
        self.resize(
            min(self.theme.px(width), room.width() - 24), min(self.theme.px(height), room.height() - 24)
        )

    def set_name(self, name: str) -> None:
        """What the form is for."""
        self.what.setText(name)
        self.setWindowTitle(f"{name}, {self.patient.label}")

    def card(self, heading: str = "", note: str = "") -> Card:
        """A new card under the others."""
        made = Card(self.theme, heading, note)
        self.stack.addWidget(made)
        return made

    # the moment

    def moment(self) -> Instant:
        """The moment that is typed, read as the strip reads it; now where it cannot be read."""
        now = self.model.session.now()
        try:
            empty = SettingsInForce(self.patient.record).at(now)
            return read_line(f"{self.time.text()} checked no change", now=now, zone=self.model.session.zone,
                             in_force=empty).at  # fmt: skip
        except RecordError:
            return now

    def in_force(self) -> Settings:
        """The settings in force just at that moment."""
        return SettingsInForce(self.patient.record).at(self.moment())

    def reader(self) -> Reader:
        """For whom sentences are written."""
        return reader_at(self.model.session.zone, self.gas_unit, self.model.session.now())

    # preview

    def line(self) -> str:
        """The whole line: the time as typed, then what the fields say."""
        items = self.items()
        return f"{self.time.text().strip()} {items}".strip() if items else ""

    def edited(self) -> None:
        """A field changed: what was asked before is asked anew."""
        self.preview, self.asking, self._enter_pending = None, False, False
        self._sent = self.line()
        self.as_line.setText(
            self.tr("In the log strip: {line}").format(line=self._sent) if self._sent else ""
        )
        lacks = self.lacks()
        if not self._sent or lacks:
            self._awaited = False
            self._say(escape(lacks or self.tr("Nothing to record yet. Esc leaves all as it is.")))
            self.go.setEnabled(False)
            self.show_extra()
            return
        self._awaited = True
        self.go.setEnabled(True)
        request = LineRequest(self.patient.record.key, self._sent, self.model.session.zone)
        self.model.ask(
            entry.preview, request, done=self._previewed, failed=self._refused, subject="form preview"
        )
        self.show_extra()

    def _previewed(self, outcome: Outcome[Preview]) -> None:
        if not self._awaited:
            return
        self.preview, self._awaited = outcome.value, False
        words = self.words()
        self.show_extra()
        if self._enter_pending and not words.questions:
            self._record(confirmed=False)
            return
        self._enter_pending = False
        self._say(self._html(words))

    def words(self) -> PreviewWords:
        """The preview in words."""
        assert self.preview is not None
        return preview_words(self.preview, self.patient.record, self.model.session.now(), self.reader())

    def _refused(self, failure: Failure) -> None:
        self._awaited, self._enter_pending, self.asking = False, False, False
        self.go.setEnabled(False)
        self._say(
            f"<b>{escape(self.tr('Not recorded.'))}</b> {escape(sentence(failure.message, self.reader()))}"
        )

    def _html(self, words: PreviewWords) -> str:
        quiet = self.theme.colours.ink_quiet
        text = f"<b>{escape(words.head)}:</b> {escape(', '.join(words.values))}."
        if words.effects:
            text += f" <span style='color:{quiet}'>{escape(' '.join(words.effects))}</span>"
        ask = self.tr("Enter asks once more.") if words.questions else self.tr("Enter records.")
        questions = f" <b>{escape(' '.join(words.questions))}</b>" if words.questions else ""
        return f"{text}{questions} <span style='color:{quiet}'>{escape(ask)}</span>"

    # recording

    def submit(self) -> None:
        """Record what is shown; a question is asked first, and only a second Enter says yes."""
        if self.asking:
            self._record(confirmed=True)
        elif self.preview is not None and self.preview.questions:
            self.asking = True
            ask = self.tr("Enter again says yes, Esc leaves it.")
            self._say(f"<b>{escape(' '.join(self.words().questions))}</b> {escape(ask)}")
        elif self.preview is not None:
            self._record(confirmed=False)
        elif self._awaited:
            self._enter_pending = True

    def _record(self, *, confirmed: bool) -> None:
        if not self.model.session.person:
            self._say(escape(self.tr("Nobody is signed in. Leave the form: Ctrl+I says who you are.")))
            return
        request = LineRequest(self.patient.record.key, self._sent, self.model.session.zone, confirmed)
        self.go.setEnabled(False)
        self._enter_pending = False
        self.model.ask(entry.log_line, request, done=self._done, failed=self._refused)

    def _done(self, outcome: Outcome[Recorded]) -> None:
        self.recorded.emit(outcome.value)
        self.accept()

    def _say(self, html: str) -> None:
        self.said.setText(html)
        self.said.setAccessibleName(self.plain())

    def plain(self) -> str:
        """What stands under the fields, in plain words."""
        from PySide6.QtGui import QTextDocumentFragment

        return QTextDocumentFragment.fromHtml(self.said.text()).toPlainText()


def worded(parts: Mapping[str, str]) -> str:
    """Channels with their values as words of a line; those without a value are left out.

    >>> worded({"rr": "28", "hr": "", "spo2": "91"})
    'rr 28 spo2 91'
    """
    return " ".join(f"{key} {text}" for key, text in parts.items() if text)
