"""How a table is to be read: columns, times, units and whose it is, with the first rows as they will be recorded."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QComboBox,
    QDialogButtonBox,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QScrollArea,
    QVBoxLayout,
    QWidget,
)

from app.intake_window.answers_form import AnswersForm
from app.intake_window.column_table import ColumnTable
from app.intake_window.how_written import LARGE, HowWritten
from app.intake_window.preview_table import PreviewTable
from app.look.fitted import FittedDialog, RollArea, fit
from app.look.theme import Theme
from app.operations import mapping as operations
from app.operations.intake import ReadRequest
from app.operations.mapping import Looked, LookRequest
from app.operations.outcome import Outcome
from app.session.failure import Failure
from app.session.model import SessionModel
from app.words import Reader, sentence
from core.record.message import Message
from storage.intake.mapping import ColumnUse, Mapping, open_questions
from storage.intake.writing import AS_FOUND, Writing

if TYPE_CHECKING:
    from pathlib import Path


class MappingDialog(FittedDialog):
    """`ready(ReadRequest)` when every question is answered and the person goes on. Nothing is recorded here."""

    ready = Signal(object)

    def __init__(
        self, model: SessionModel, path: Path, reader: Reader, theme: Theme, parent: QWidget | None = None,
        given: ReadRequest | None = None,
    ) -> None:  # fmt: skip
        super().__init__(parent)
        self._given = given
        self._model, self._path, self._reader, self._theme = model, path, reader, theme
        self.looked: Looked | None = None
        self.mapping = Mapping()
        self.setWindowTitle(self.tr("Take in {name}").format(name=path.name))
        self.asked, self.preview_word = QLabel(), QLabel()
        self.written, self.kept = HowWritten(theme), QComboBox()
        self.sheet = self.written.sheet
        self.columns = ColumnTable(theme, reader)
        self.answers = AnswersForm(theme)
        self.preview = PreviewTable(theme, reader)
        self.name = QLineEdit()
        self.buttons = QDialogButtonBox()
        self.go = self.buttons.addButton(self.tr("Read the whole file"), QDialogButtonBox.ButtonRole.AcceptRole)
        self.buttons.addButton(self.tr("Leave"), QDialogButtonBox.ButtonRole.RejectRole)
        self._lay_out()
        self.go.setEnabled(False)
        self.go.clicked.connect(self._go_on)
        self.buttons.rejected.connect(self.reject)
        self.columns.changed.connect(self._column_changed)
        self.answers.changed.connect(self._answered)
        self.written.changed.connect(self._look_again)
        self.kept.activated.connect(self._take_kept)
        fit(self, theme, 1240, 820)
        self._ask()

    # layout

    def _lay_out(self) -> None:
        px = self._theme.px
        self.asked.setWordWrap(True)
        self.asked.setTextFormat(Qt.TextFormat.PlainText)
        self.asked.setProperty("role", "strong")
        self.preview_word.setText(self.tr("The first rows as they will be recorded"))
        self.preview_word.setProperty("role", "emphasis")
        self.go.setProperty("role", "primary")
        self.name.setPlaceholderText(self.tr("a name, to be recognised next time"))
        self.name.setAccessibleName(self.tr("Keep as"))
        self.name.setMaxLength(80)
        self.kept.setAccessibleName(self.tr("Mapping"))
        self.columns.setMinimumHeight(px(200))
        self.preview.setMinimumHeight(px(130))
        rolled = QWidget()
        inside = QVBoxLayout(rolled)
        inside.setContentsMargins(0, 0, 0, 0)
        inside.setSpacing(px(8))
        if self._theme.text_scale > LARGE:
            inside.addWidget(self.written)
        inside.addLayout(self._head())
        inside.addLayout(self._halves(), 5)
        inside.addWidget(self.preview_word)
        inside.addWidget(self.preview, 3)
        column = QVBoxLayout(self)
        column.setContentsMargins(px(20), px(16), px(20), px(16))
        column.setSpacing(px(8))
        column.addWidget(RollArea(rolled), 1)
        column.addWidget(self.asked)
        column.addLayout(self._foot())

    def _head(self) -> QHBoxLayout:
        """How it is written, where text is not too large for one line, and which mapping."""
        head = QHBoxLayout()
        if self._theme.text_scale <= LARGE:
            head.addWidget(self.written, 1)
        self._kept_label = QLabel(self.tr("Mapping"))
        self._kept_label.setProperty("role", "quiet")
        self._kept_label.setBuddy(self.kept)
        self.kept.setMinimumContentsLength(14)
        head.addWidget(self._kept_label)
        head.addWidget(self.kept, 1 if self._theme.text_scale > LARGE else 0)
        return head

    def _halves(self) -> QHBoxLayout:
        halves = QHBoxLayout()
        halves.setSpacing(self._theme.px(16))
        side = QScrollArea()
        side.setWidget(self.answers)
        side.setWidgetResizable(True)
        side.setFocusPolicy(Qt.FocusPolicy.NoFocus)  # Tab goes to what is inside and brings it into view
        side.setFixedWidth(min(self._theme.px(400), 680))
        halves.addWidget(self.columns, 1)
        halves.addWidget(side)
        return halves

    def _foot(self) -> QHBoxLayout:
        foot = QHBoxLayout()
        keep = QLabel(self.tr("Keep as"))
        keep.setBuddy(self.name)
        foot.addWidget(keep)
        foot.addWidget(self.name, 1)
        foot.addStretch(1)
        foot.addWidget(self.buttons)
        return foot

    # looking

    def _ask(self, said: Writing = AS_FOUND, by: str | None = None) -> None:
        """Look at the table, as was said of it; `by` a kept mapping, none (as proposed), or the one that fits."""
        self.asked.setText(self.tr("Looking at {name}. Nothing is recorded yet.").format(name=self._path.name))
        given = None if self._given is None else self._given.mapping
        request = LookRequest(self._path, self._model.session.zone, said, given, by)
        self._model.ask(operations.look, request, done=self._show, failed=self._failed)

    def _look_again(self) -> None:
        """A person says how it is written."""
        self._ask(self.written.said)

    def _show(self, outcome: Outcome[Looked]) -> None:
        looked = self.looked = outcome.value
        self.written.show_table(looked.table, looked.said)
        self.kept.clear()
        for word in ("", *looked.kept):
            self.kept.addItem(word or self.tr("as proposed"), word)
        for widget in (self.kept, self._kept_label):
            widget.setVisible(bool(looked.kept))
        known, given = looked.recognised, self._given
        self.kept.setCurrentIndex(max(0, self.kept.findData(known.name if known is not None else "")))
        if given is not None and known is not None and known == given.mapping:
            self.answers.shift.setValue(given.clock_shift_s)
            self._begin(known, given.episode)  # another part of what was answered a moment ago
            return
        self._begin(known or looked.proposal.mapping)

    def _take_kept(self) -> None:
        """A mapping was chosen: the table is opened as that one says that it is written."""
        self._ask(by=str(self.kept.currentData() or ""))

    def _begin(self, mapping: Mapping, episode: str = "") -> None:
        """Show a mapping: its columns, its answers, its preview."""
        header = self.looked.table.header if self.looked is not None else ()
        self.mapping = replace(mapping, header=header, written=self.written.said)
        self.name.setText(mapping.name)
        self._show_columns()
        self._show_answers(episode)  # whose values they are is asked: the episode in hand may be another patient's
        self._judge()

    def _show_columns(self) -> None:
        if self.looked is None:
            return
        table, m, hints = self.looked.table, self.mapping, self.looked.proposal.hints
        if m.long is None:
            rows = [(name, table.column(name)) for name in table.header]
            self.columns.show_rows(rows, {c.column: c for c in m.columns}, self._taken(), hints)
            return
        words, values = table.column(m.long.channel), table.column(m.long.value)
        of: dict[str, list[str]] = {name: [] for name in m.long.names}
        for word, value in zip(words, values, strict=False):
            of.setdefault(word, []).append(value)
        uses = {w: ColumnUse(w, k, m.long.units.get(w, "")) for w, k in m.long.names.items()}
        self.columns.show_rows(list(of.items()), uses, {}, hints, has_unit_column=bool(m.long.unit))

    def _taken(self) -> dict[str, str]:
        m = self.mapping
        pairs = ((m.time.date, self.tr("the time")), (m.time.clock, self.tr("the clock")),
                 (m.episode_column, self.tr("the episode")), (m.by_column, self.tr("the person")))  # fmt: skip
        return {name: word for name, word in pairs if name}

    def _show_answers(self, episode: str) -> None:
        if self.looked is not None:
            self.answers.show_answers(self.mapping, self.looked.table.header, self.looked.episodes, episode,
                                      has_offsets=self.looked.proposal.has_offsets)  # fmt: skip

    # answering

    def _column_changed(self, column: str, channel: str, unit: str) -> None:
        long = self.mapping.long
        if long is None:
            self.mapping = self.mapping.with_column(column, channel, unit)
        else:
            names, units = {**long.names, column: channel}, {**long.units, column: unit}
            self.mapping = replace(self.mapping, long=replace(long, names=names, units=units))
        row = next(r for r in range(self.columns.rowCount()) if self._column_of(r) == column)
        hint = self.looked.proposal.hints.get(column) if self.looked is not None else None
        self.columns.show_answer(row, ColumnUse(column, channel, unit), hint)
        self._show_answers(self.answers.episode_key)
        self._judge()

    def _column_of(self, row: int) -> str:
        item = self.columns.item(row, 0)
        return item.text() if item is not None else ""

    def _answered(self) -> None:
        before = self._taken()
        self.mapping = self.answers.mapping_with(self.mapping)
        if self._taken() != before:
            for name in self._taken():
                self.mapping = self.mapping.with_column(name, "")
            self._show_columns()
        self._show_answers(self.answers.episode_key)
        self._judge()

    def questions(self) -> tuple[Message, ...]:
        """What is still to be answered."""
        offsets = self.looked is not None and self.looked.proposal.has_offsets
        return open_questions(self.mapping, episode_given=bool(self.answers.episode_key), has_offsets=offsets)

    def _judge(self) -> None:
        """Show what is open, and the first rows."""
        if self.looked is None:
            return
        from storage.intake.table_preview import preview
        from storage.intake.table_rows import Answers

        asked = self.questions()
        self.go.setEnabled(not asked)
        if asked:
            more = self.tr(" ({count} more to answer)").format(count=len(asked) - 1) if len(asked) > 1 else ""
            self.asked.setText(self._several() + sentence(asked[0], self._reader) + more)
        else:
            self.asked.setText(
                self._several() + self.tr("All is answered. The whole file is read next; nothing is recorded yet.")
            )
        answers = Answers(self.answers.episode_key, self.answers.shift.value())
        self.preview.show_rows(preview(self.looked.table, self.mapping, answers))

    def _several(self) -> str:
        """That kept mappings fit which read the table in different ways: none of them is taken unasked."""
        names = () if self.looked is None else self.looked.several
        if not names or self.kept.currentData():
            return ""
        text = self.tr("Several kept mappings fit: {names}. Choose one under Mapping, or answer anew. ")
        return text.format(names=", ".join(names))

    def _go_on(self) -> None:
        self.mapping = replace(self.mapping, name=self.name.text().strip())
        if self.mapping.name:
            self._model.ask(operations.keep, self.mapping, failed=self._failed)
        sheet = self.looked.table.dialect.sheet if self.looked is not None else ""
        request = ReadRequest(self._path, self.mapping, "", self.answers.episode_key, {}, self._model.session.zone,
                              self.answers.shift.value(), "", replace(self.written.said, sheet=sheet))  # fmt: skip
        self.accept()
        self.ready.emit(request)

    def _failed(self, failure: Failure) -> None:
        self.go.setEnabled(False)
        self.asked.setText(sentence(failure.message, self._reader))
