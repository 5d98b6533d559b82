"""The frame of a form that writes: cards of fields that scroll, under them what will be recorded, two buttons.

Every edit is previewed by the operation that reads it; Enter records what is shown. A question is asked first and
only a second Enter says yes. Enter before the preview has come records nothing and says so. Esc leaves all untouched.
"""

from __future__ import annotations

from collections.abc import Mapping
from html import escape
from typing import Any

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QShowEvent
from PySide6.QtWidgets import (
    QFrame,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QPushButton,
    QScrollArea,
    QVBoxLayout,
    QWidget,
)

from app.forms.cells import Card
from app.forms.typed import fields_of, put, read
from app.look.fitted import FittedDialog, fit
from app.look.formats import unbroken
from app.look.theme import Theme
from app.operations.outcome import Outcome
from app.session.failure import Failure
from app.session.model import SessionModel
from app.session.readers import reader_at
from app.strip.reading_time import ReadingTime
from app.strip.settle_time import SettleTime
from app.words import Reader, sentence


class PreviewedForm(FittedDialog):
    """Build fields in `build`; say what they want in `request`. `recorded` after it was done."""

    recorded = Signal(object)
    changed = Signal()
    """A field was edited."""
    timed = True
    """Whether the form has a moment of its own, at its head."""

    def __init__(
        self, title: str, model: SessionModel, gas_unit: str, theme: Theme, parent: QWidget | None = None
    ) -> None:
        super().__init__(parent)
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.model, self.gas_unit, self.theme = model, gas_unit, theme
        self.preview: Any = None
        self.asking = False
        self._awaited, self._pressed_early = False, False
        self._slow = ReadingTime(self._say_reading, self)
        self.settle = SettleTime()
        self._sent: object = None
        self._is_recording = False
        self.title = QLabel(title)
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
        self._opened_as = {name: read(field) for name, field in fields_of(self).items()}

    # what is typed

    def typed(self) -> dict[str, str]:
        """What a person has changed since the form opened, by field, to be kept as a draft."""
        there = {name: read(field) for name, field in fields_of(self).items()}
        return {name: text for name, text in there.items() if text != self._opened_as.get(name, "")}

    def put(self, typed: Mapping[str, str]) -> None:
        """Put a draft back into the fields; nothing of it is recorded."""
        moment = {name: text for name, text in typed.items() if name == "time"}
        put(fields_of(self), moment)  # what is in force then comes first, and what was typed over it after
        put(fields_of(self), {name: text for name, text in typed.items() if name not in moment})
        self.edited()

    # for each form

    def build(self) -> None:
        """Add cards of fields, each joined to `edited`."""
        raise NotImplementedError

    def request(self) -> object | None:
        """What the fields ask to be recorded; None while they say nothing."""
        raise NotImplementedError

    def lacks(self) -> str:
        """What must be filled in first, in words; "" where nothing."""
        return ""

    def ask_preview(self, request: Any) -> None:
        """Ask what a request would record; answer to `previewed` and `refused`."""
        raise NotImplementedError

    def ask_record(self, request: Any, *, confirmed: bool) -> None:
        """Record a request; answer to `was_recorded` and `refused`."""
        raise NotImplementedError

    def questions(self) -> tuple[str, ...]:
        """What the preview asks, in words."""
        raise NotImplementedError

    def told(self) -> tuple[str, str, str]:
        """The preview in words: for whom and when, what, and what it does."""
        raise NotImplementedError

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
        when.setVisible(self.timed)
        self.time.setVisible(self.timed)
        self.time.setFixedWidth(px(168))  # yesterday 23:00
        column = QVBoxLayout(self)
        column.setContentsMargins(px(18), px(14), px(18), px(14))
        column.setSpacing(px(10))
        column.addLayout(head)
        column.addWidget(roll, 1)
        column.addWidget(self._foot())

    def _roll_cards(self) -> None:
        self.stack.setContentsMargins(0, 0, 0, 0)
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
        self.said.setMinimumHeight(round(px(self.theme.type.body) * 1.3) * 2)
        self.as_line.setProperty("role", "caption")
        self.as_line.setWordWrap(True)
        self.as_line.setTextFormat(Qt.TextFormat.PlainText)
        self.go.setProperty("role", "primary")
        self.go.setDefault(True)
        self.leave.setAutoDefault(False)
        words = QVBoxLayout()
        words.setSpacing(px(4))
        words.addWidget(self.said, 1)
        words.addWidget(self.as_line)
        row = QHBoxLayout(foot)
        row.setContentsMargins(px(14), px(10), px(14), px(12))
        row.setSpacing(px(8))
        row.addLayout(words, 1)
        for button in (self.go, self.leave):  # in the order that every other dialog has
            button.setMinimumHeight(px(44))
            row.addWidget(button, 0, Qt.AlignmentFlag.AlignBottom)
        return foot

    def fit(self, width: int, height: int) -> None:
        """Take the size that is wanted at 100 %, as far as the screen has it; what does not fit scrolls."""
        fit(self, self.theme, width, height)

    def set_name(self, name: str) -> None:
        """What the form is for."""
        self.what.setText(name)
        self.setWindowTitle(f"{name}, {self.title.text()}" if self.title.text() else name)

    def card(self, heading: str = "", note: str = "") -> Card:
        """A new card under the others."""
        made = Card(self.theme, heading, note)
        self.stack.addWidget(made)
        return made

    def reader(self) -> Reader:
        """For whom sentences are written."""
        return reader_at(self.model.session.zone, self.gas_unit, self.model.session.now())

    # preview

    def edited(self) -> None:
        """A field changed: what was asked before is asked anew."""
        self.preview, self.asking, self._pressed_early = None, False, False
        self.settle.clear()
        self._sent = self.request()
        lacks = self.lacks()
        self._awaited = self._sent is not None and not lacks
        self.go.setEnabled(self._awaited)
        if self._awaited:
            self._slow.start()
            self.ask_preview(self._sent)
        else:
            self.say(escape(lacks or self.tr("Nothing to record yet. Esc leaves all as it is.")))
        self.show_extra()
        self.changed.emit()

    def _say_reading(self) -> None:
        """What was said of other fields does not stay up, and a press that came too early is answered."""
        if not self._awaited:
            return
        wait = self.tr("Reading the fields...")
        if self._pressed_early:
            again = self.tr("Enter records once it stands here what will be recorded.")
            self.say(f"<b>{escape(self.tr('Not recorded yet.'))}</b> {escape(wait)} {escape(again)}")
        else:
            self.say(f"<span style='color:{self.theme.colours.ink_quiet}'>{escape(wait)}</span>")

    def previewed(self, outcome: Outcome[Any]) -> None:
        """The preview has come."""
        if not self._awaited:
            return
        self.preview, self._awaited = outcome.value, False
        self.show_extra()
        if self._pressed_early:
            self.settle.start()  # a second early press was meant for the fields, not for what they have become
        self.say(self._html())

    def refused(self, failure: Failure) -> None:
        """What the fields say cannot be recorded."""
        self._awaited, self._pressed_early, self.asking, self._is_recording = False, False, False, False
        self.go.setEnabled(False)
        self.say(f"<b>{escape(self.tr('Not recorded.'))}</b> {escape(sentence(failure.message, self.reader()))}")

    def _html(self) -> str:
        quiet = self.theme.colours.ink_quiet
        (head, what, effects), questions = self.told(), self.questions()
        text = f"<b>{escape(head)}:</b> {escape(unbroken(what))}."
        if effects:
            text += f" <span style='color:{quiet}'>{escape(unbroken(effects))}</span>"
        ask = self.tr("Enter asks once more.") if questions else self.tr("Enter records.")
        strong = f" <b>{escape(' '.join(questions))}</b>" if questions else ""
        return f"{text}{strong} <span style='color:{quiet}'>{escape(ask)}</span>"

    # recording

    def submit(self) -> None:
        """Record what is shown; a question is asked first, and only a second Enter says yes."""
        if not self.settle.is_over:
            return
        if self.asking:
            self._record(confirmed=True)
        elif self.preview is not None and self.questions():
            self.asking = True
            self.settle.start()
            ask = self.tr("Enter again says yes, Esc leaves it.")
            self.say(f"<b>{escape(' '.join(self.questions()))}</b> {escape(ask)}")
        elif self.preview is not None:
            self._record(confirmed=False)
        elif self._awaited:
            self._pressed_early = True
            self._say_reading()

    def _record(self, *, confirmed: bool) -> None:
        if not self.model.session.person:
            self.say(escape(self.tr("Nobody is signed in. Leave the form: Ctrl+I says who you are.")))
            return
        self.go.setEnabled(False)
        self._is_recording = True
        self.ask_record(self._sent, confirmed=confirmed)

    def reject(self) -> None:
        """Leave, but not before the answer: whoever left would believe that nothing was recorded."""
        if self._is_recording:
            self.say(escape(self.tr("It is being recorded. Leave once it stands here what came of it.")))
        else:
            super().reject()

    def was_recorded(self, outcome: Outcome[Any]) -> None:
        """It was recorded."""
        self._is_recording = False
        self.recorded.emit(outcome.value)
        self.accept()

    def say(self, html: str) -> None:
        """Say something under the fields."""
        self.said.setText(html)
        self.said.setAccessibleName(self.plain())

    def plain(self) -> str:
        """What stands under the fields, in plain words."""
        from PySide6.QtGui import QTextDocumentFragment

        return QTextDocumentFragment.fromHtml(self.said.text()).toPlainText()
