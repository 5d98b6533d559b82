"""The log strip: one line, always one key away. It says before Enter exactly what will be recorded, and for whom.

The preview and the recording read the line by the same operation, so that they cannot differ. Enter counts only
once the preview of that very text is shown: nothing is recorded unseen.
"""

from __future__ import annotations

from collections.abc import Mapping
from html import escape

from PySide6.QtCore import Qt, Signal

from app.look.theme import Theme
from app.operations import correction, entry
from app.operations.entry import LineRequest, Preview
from app.operations.outcome import Outcome
from app.operations.recording import Recorded
from app.session.failure import Failure
from app.session.model import SessionModel
from app.session.readers import reader_at
from app.strip.completion import completed, completions
from app.strip.left_lines import LeftLines
from app.strip.one_key_buttons import CHECKED, GAS_SENT, MASK, TOLD
from app.strip.preview_words import preview_words, recorded_words, taken_back_words, undone_words
from app.strip.reading_time import ReadingTime
from app.strip.said_html import completion_html, marked, preview_html, quiet
from app.strip.sent_lines import Sent, SentLines
from app.strip.settle_time import SettleTime
from app.strip.state import NOT_SHOWN, State
from app.strip.strip_frame import StripFrame
from app.strip.undo_stack import UndoStack
from app.words import Reader, sentence
from core.record.episode import Episode


class LogStrip(StripFrame):
    """The strip for the selected episode. `recorded` after each entry; `left` when Esc hands the focus back."""

    recorded = Signal(object)
    left = Signal()

    def __init__(self, theme: Theme, model: SessionModel) -> None:
        super().__init__(theme)
        self._model = model
        self._record: Episode | None = None
        self._label, self._gas_unit, self._zone = "", "mmHg", "UTC"
        self.state = State.IDLE
        self._preview: Preview | None = None
        self._awaited: str | None = None
        self._pressed_early = self._came_before = False
        self._slow = ReadingTime(self._say_reading, self)
        self.settle = SettleTime()
        self._labels: dict[str, str] = {}
        self._news: dict[str, str] = {}
        self._undo, self._lines, self._left = UndoStack(), SentLines(), LeftLines()
        self._told_of: Recorded | None = None
        self._off_mask, self._closed = False, ""
        self._connect()
        self.set_theme(theme)
        self.set_patient(None, "", "UTC", "mmHg")

    def _connect(self) -> None:
        self.line.textEdited.connect(self._edited)
        self.line.returnPressed.connect(self._entered)
        self.line.left.connect(self.leave)
        self.line.completion_wanted.connect(self._complete)
        self.buttons[GAS_SENT].clicked.connect(self.gas_sent)
        self.buttons[MASK].clicked.connect(self.mask_moved)
        self.buttons[CHECKED].clicked.connect(self.checked)
        self.buttons[TOLD].clicked.connect(self.told)

    # whom it is for

    def set_patient(
        self, record: Episode | None, label: str, zone: str, gas_unit: str, *, off_mask: bool = False
    ) -> None:
        """For whom the strip logs. A line half typed for another is never carried over: it waits for its own."""
        other = (record.key if record is not None else None) != self.patient
        if other:
            self._leave_line()
        self._record, self._label, self._zone, self._gas_unit = record, label, zone, gas_unit
        if record is not None:
            self._labels[record.key] = label
        self.whom.setText(label or self.tr("No patient"))
        self.keys.say_mask(off=off_mask)
        self._off_mask = off_mask
        for widget in (self.line, *self.buttons.values()):
            widget.setEnabled(record is not None and not self._closed)
        self.line.setPlaceholderText(self.tr("16/6 35    14:20 rr 28 spo2 91    gas sent    note ..."))
        if other:
            self._clear()
            self._put_back()
        if record is not None and record.key in self._news:
            of = last if (last := self._undo.newest) is not None and last.episode == record.key else None
            news, self._news = self._news[record.key], {}
            self._become(State.TOLD, escape(news), of=of)

    def set_closed(self, why: str) -> None:
        """Take no line, and say why; "" opens the strip again, and what was half typed is back."""
        self._leave_line()
        self._closed = why
        for widget in (self.line, *self.buttons.values()):
            widget.setEnabled(self._record is not None and not why)
        self._clear()
        self._put_back()

    @property
    def patient(self) -> str | None:
        """The key of the episode it logs for."""
        return self._record.key if self._record else None

    def set_text(self, text: str) -> None:
        """Put words on the line and preview them."""
        if self._record is not None and not self._closed:
            self.line.setText(text)
            self.line.setFocus(Qt.FocusReason.ShortcutFocusReason)
            self._edited(text)

    def gas_sent(self) -> None:
        """One key: a gas was sent. Enter records it."""
        self.set_text("gas sent")

    def mask_moved(self) -> None:
        """One key: the mask came off, or went on."""
        self.set_text("mask on" if self._off_mask else "mask off")

    def checked(self) -> None:
        """One key: looked, changed nothing."""
        self.set_text("checked no change")

    def told(self) -> None:
        """One key: whom was told, with the answer to be typed. The responsible clinician stands there already."""
        contact = self._record.latest_text("contact") if self._record is not None else None
        self.set_text(f"told {contact}: " if contact else "told ")
        self.line.end(False)

    def focus(self) -> None:
        """Take the focus."""
        self.line.setFocus(Qt.FocusReason.ShortcutFocusReason)
        self.line.selectAll()

    def leave(self) -> None:
        """Empty the line and hand the focus back; nothing is recorded."""
        self._clear()
        self.left.emit()

    def _leave_line(self) -> None:
        if self._record is not None:
            self._left.keep(self._record.key, self.line.text())

    def _clear(self) -> None:
        self.line.clear()
        self._came_before = False
        self._forget_preview()
        self._become(State.IDLE, self._hint())

    def _forget_preview(self) -> None:
        """No preview is shown or awaited: an answer that still comes is of no use."""
        self._preview, self._awaited, self._pressed_early = None, None, False
        self._slow.stop()
        self.settle.clear()

    # preview

    def _edited(self, text: str) -> None:
        self._forget_preview()
        if not text.strip() or self._record is None:
            self._become(State.IDLE, self._hint())
            return
        told, self.state, self._awaited = self.state is State.TOLD, State.AWAITED, text
        if told:
            self._say_reading()  # what was recorded before must not stand over what is not
        else:
            self._slow.start()
        self._model.ask(
            entry.preview,
            self._request(False),
            done=self._previewed,
            failed=self._refused,
            subject="strip preview",
        )

    def _say_reading(self) -> None:
        """No preview of another text stays up, and an Enter that came too early is answered."""
        if self._awaited is None:
            return
        wait = self.tr("Reading what is typed...")
        if self._pressed_early:
            again = self.tr("Enter records once it stands here what will be recorded.")
            self._become(State.AWAITED, marked(self.tr("Not recorded yet."), f"{wait} {again}"))
        else:
            self._become(State.AWAITED, quiet(wait, self._theme.colours.ink_quiet))

    def _request(self, confirmed: bool) -> LineRequest:
        assert self._record is not None
        return LineRequest(self._record.key, self.line.text(), self._zone, confirmed, gas_unit=self._gas_unit)

    def _previewed(self, outcome: Outcome[Preview]) -> None:
        if self._awaited is None or self._awaited != self.line.text():
            return
        self._awaited = None
        if any(r.channel.key == "told" and not r.words for r in outcome.value.line.readings):
            ask = self.tr("Type whom, a colon, and what they answered, e.g. told registrar: comes now.")
            self._become(State.REFUSED, marked(self.tr("Told whom?"), ask))
            return
        self._preview = outcome.value
        words = preview_words(outcome.value, self._record, self._model.session.now(), self._reader())
        if self._pressed_early:
            self.settle.start()  # a second early press was meant for the line, not for what it has become
        before = self.tr("The entry before is recorded.") if self._came_before else ""
        html = preview_html(words, self._theme.colours.ink_quiet)
        self._become(State.READY, f"{html} {quiet(before, self._theme.colours.ink_quiet)}" if before else html)

    def _refused(self, failure: Failure) -> None:
        if self._awaited is None or self._awaited != self.line.text():
            return
        self._awaited = None
        options = completions(self.line.text(), self.line.cursorPosition())
        if options and failure.message.key in ("line.word_unknown", "line.value_missing", "value.missing"):
            self._become(State.REFUSED, completion_html(options, self._theme.colours.ink_quiet))
        else:
            self._become(State.REFUSED, marked(self.tr("Not recorded."), sentence(failure.message, self._reader())))

    def _complete(self) -> None:
        options = completions(self.line.text(), self.line.cursorPosition())
        if options:
            text, cursor = completed(self.line.text(), self.line.cursorPosition(), options[0])
            self.line.setText(text)
            self.line.setCursorPosition(cursor)
            self._edited(text)

    # recording

    def _entered(self) -> None:
        if self._awaited is not None:
            self._pressed_early = True
            self._say_reading()
        elif self.state in NOT_SHOWN and self._preview is None and self.line.text().strip():
            self._edited(self.line.text())  # it came back: shown anew before it is recorded
        elif not self.settle.is_over:
            return
        elif self.state is State.ASKING:
            self._record_now(confirmed=True)
        elif self._preview is not None and self._preview.questions:
            words = preview_words(self._preview, self._record, self._model.session.now(), self._reader())
            ask = self.tr("Enter again says yes, Esc leaves it.")
            self._become(State.ASKING, marked(" ".join(words.questions), ask))
            self.settle.start()
        elif self._preview is not None:
            self._record_now(confirmed=False)

    def _record_now(self, *, confirmed: bool) -> None:
        if not self._model.session.person:
            nobody = self.tr("Nobody is signed in: Ctrl+I says who you are, then Enter records.")
            self._become(State.READY, escape(nobody))
            return
        request = self._request(confirmed)
        self._came_before = False
        self.line.clear()
        self._forget_preview()
        self._become(State.AWAITED, escape(self.tr("Recording...")))
        self._lines.send(Sent(request.episode, self._label, request.line))
        self._model.ask(entry.log_line, request, done=self._done, failed=self._failed)

    def _done(self, outcome: Outcome[Recorded]) -> None:
        self._lines.taken()
        self.take(outcome.value)

    def _failed(self, failure: Failure) -> None:
        """Not recorded: the line comes back, unless another is being typed or another patient is in hand."""
        sent = self._lines.failed()
        self._put_back()
        lost = self.tr("Not recorded for {label}: {line}.").format(label=sent.label, line=sent.line)
        self._become(State.REFUSED, marked(lost, sentence(failure.message, self._reader())))

    def _put_back(self) -> None:
        """Put the line that could not be recorded back for its patient; Enter shows anew what it would record."""
        if self._record is None or self.line.text() or self._closed:
            return
        failed = self._lines.back_for(self._record.key)
        self.line.setText(failed or self._left.back_for(self._record.key))
        if self.line.text() and not failed:
            how = self.tr("Enter shows what it would record, Esc empties the line.")
            self._become(State.IDLE, marked(self.tr("This line was left here and is not recorded."), how))

    def take(self, recorded: Recorded, told: str = "") -> None:
        """Something was recorded, here or by a form: remember it for the undo, and say so, in the words it brings."""
        self.remember(recorded)
        if self.line.text().strip():  # the next line is being typed: its preview is what must stand here
            self._came_before = True
            self._edited(self.line.text())
            self.recorded.emit(recorded)
            return
        whom = self.tr("Recorded for {label}").format(label=self._labels.get(recorded.episode, recorded.episode))
        what = recorded_words(recorded.entries, self._model.session.now(), self._reader())
        said = marked(told or f"{whom}, {what}.", self.tr("Ctrl+Z undoes it."))
        self._become(State.TOLD, said, of=recorded)
        self.recorded.emit(recorded)

    # undo

    def remember(self, recorded: Recorded) -> None:
        """Something recorded elsewhere in the window (a form, a correction) that undo shall take back."""
        self._undo.push(recorded)

    def know_labels(self, labels: Mapping[str, str]) -> None:
        """What episodes are called that were not in hand yet."""
        self._labels.update(labels)

    @property
    def can_undo(self) -> bool:
        """Whether there is anything to take back."""
        return bool(self._undo)

    def undo(self) -> None:
        """Take back the last recording made here: at once where its words stand here and are of the patient in hand,
        else only once it has been said what that is."""
        last = self._undo.newest
        if self._closed:
            self._clear()
            return
        if last is None:
            self._become(State.TOLD, escape(self.tr("Nothing to undo.")))
            return
        here = last.episode == self.patient
        if self._told_of is not last or not (here or self.state is State.UNDOING):
            self._ask_undo(last, here=here)
            return
        if not self.settle.is_over:
            return
        self._undo.take()
        request = correction.UndoRequest(last.episode, last.ids)
        self._model.ask(correction.undo, request, done=self._undone, failed=self._not_undone)

    def _ask_undo(self, last: Recorded, *, here: bool) -> None:
        """Say what would be taken back, and for whom; the next Ctrl+Z does it."""
        self._forget_preview()
        label = self._labels.get(last.episode, last.episode)
        what = taken_back_words(last.entries, self._model.session.now(), self._reader())
        told = self.tr("Undo for {label}: {what}?").format(label=label, what=what)
        other = "" if here else self.tr("{label} is not the patient in hand.").format(label=label) + " "
        rest = other + self.tr("Ctrl+Z again takes it back, Esc leaves it.")
        self._become(State.UNDOING, marked(told, rest), of=last)
        self.settle.start()

    def _not_undone(self, failure: Failure) -> None:
        """What somebody has changed since can never be taken back; anything else may be tried again."""
        if failure.message.key == "undo.superseded":
            self._undo.taken_back()
        else:
            self._undo.failed()
        why = marked(self.tr("Not undone."), sentence(failure.message, self._reader()))
        self._become(State.REFUSED, why, of=self._undo.newest if failure.message.key != "undo.superseded" else None)

    def _undone(self, outcome: Outcome[Recorded]) -> None:
        self._undo.taken_back()
        names = undone_words(outcome.value.entries)
        label = self._labels.get(outcome.value.episode, outcome.value.episode)
        told = self.tr("Undone for {label}: {what}.").format(label=label, what=names)
        told = marked(told, self.tr("The record keeps both."))
        self._become(State.TOLD, told)
        self.recorded.emit(outcome.value)

    # words

    def say_of(self, episode: str, text: str, *others: str) -> None:
        """Say something as soon as one of them is in hand: one that was just begun has no figures yet."""
        self._news = dict.fromkeys((episode, *others), text)

    def say(self, text: str) -> None:
        """Say something under the line."""
        self._become(State.TOLD, escape(text))

    def plain(self) -> str:
        """What stands under the line, in plain words."""
        from PySide6.QtGui import QTextDocumentFragment

        return QTextDocumentFragment.fromHtml(self.said.text()).toPlainText()

    def _reader(self) -> Reader:
        return reader_at(self._zone, self._gas_unit, self._model.session.now())

    def _hint(self) -> str:
        if self._closed:
            return f"<b>{escape(self._closed)}</b>"
        if self._record is None:
            return escape(self.tr("Choose a patient first."))
        text = self.tr(
            "/ goes to the line. What you type is shown here before Enter records it. Tab completes, Esc leaves."
        )
        return quiet(text, self._theme.colours.ink_quiet)

    def _become(self, state: State, html: str, of: Recorded | None = None) -> None:
        """`of`: the recording that the words are about, so that a Ctrl+Z is known to mean it."""
        self.state, self._told_of = state, of
        self.line.whole = state is State.ASKING
        self.said.setText(html)
        self.said.setAccessibleName(self.plain())
