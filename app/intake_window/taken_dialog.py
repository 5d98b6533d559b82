"""The files that were taken in, with what each brought; one can be withdrawn whole."""

from __future__ import annotations

from dataclasses import replace
from typing import TYPE_CHECKING

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QAbstractItemView,
    QHBoxLayout,
    QHeaderView,
    QLabel,
    QPushButton,
    QTableWidget,
    QTableWidgetItem,
    QVBoxLayout,
    QWidget,
)

from app.look.copying import can_be_copied
from app.look.fitted import FittedDialog, fit
from app.look.theme import Theme
from app.look.wrapped_rows import fit_rows
from app.operations import intake as operations
from app.operations.outcome import Outcome
from app.session.failure import Failure
from app.session.model import SessionModel
from app.telling.withdrawn_words import withdrawn_words
from app.words import Reader, sentence

if TYPE_CHECKING:
    from storage.intake.withdrawal import Withdrawn
    from storage.reading_sources import TakenSource

_KEY = Qt.ItemDataRole.UserRole


class TakenDialog(FittedDialog):
    """Withdrawing is asked twice: the first press says what would go, the second does it."""

    def __init__(self, model: SessionModel, reader: Reader, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._model, self._reader = model, replace(reader, near=None)  # files of any day
        self.sources: tuple[TakenSource, ...] = ()
        self._meant = self._said_after = ""
        self.setWindowTitle(self.tr("Files taken in"))
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.table = QTableWidget(0, 6)
        can_be_copied(self.table)
        self.table.setAccessibleName(self.tr("Files taken in"))
        heads = (self.tr("Taken"), self.tr("By"), self.tr("File"), self.tr("Entries"), self.tr("Samples"))
        self.table.setHorizontalHeaderLabels([*heads, self.tr("How it was read")])
        self.table.verticalHeader().hide()
        self.table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.table.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.table.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
        self.table.setWordWrap(True)
        self.table.horizontalHeader().sectionResized.connect(self._fit_rows)
        for column in range(5):
            self.table.horizontalHeader().setSectionResizeMode(column, QHeaderView.ResizeMode.ResizeToContents)
        self.table.horizontalHeader().setSectionResizeMode(5, QHeaderView.ResizeMode.Stretch)
        self.table.horizontalHeader().setDefaultAlignment(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
        self.said = QLabel(self.tr("Choose a file to see what its withdrawal would take back."))
        self.said.setWordWrap(True)
        self.said.setTextFormat(Qt.TextFormat.PlainText)
        self.go = QPushButton(self.tr("Withdraw this file..."))
        close = QPushButton(self.tr("Close"))
        foot = QHBoxLayout()
        foot.addWidget(self.go)
        foot.addStretch(1)
        foot.addWidget(close)
        column_ = QVBoxLayout(self)
        column_.setContentsMargins(theme.px(20), theme.px(16), theme.px(20), theme.px(16))
        column_.setSpacing(theme.px(10))
        column_.addWidget(self.table, 1)
        column_.addWidget(self.said)
        column_.addLayout(foot)
        self.go.clicked.connect(self._press)
        close.clicked.connect(self.close)
        self.table.itemSelectionChanged.connect(self._chosen)
        self.go.setEnabled(False)
        fit(self, theme, 980, 480)
        model.ask(operations.taken, done=self._show, failed=self._failed)

    def _show(self, outcome: Outcome[tuple[TakenSource, ...]]) -> None:
        self.sources = tuple(s for s in reversed(outcome.value) if s.kind != "withdrawal")
        gone = {str(s.facts.get("of", "")) for s in outcome.value if s.kind == "withdrawal"}
        self.table.setRowCount(len(self.sources))
        for row, s in enumerate(self.sources):
            how = self.tr("withdrawn") if s.id in gone else self._how(s)
            texts = (self._reader.time(s.recorded_at), s.by, s.name, f"{s.entries:,}", f"{s.samples:,}", how)
            for column, text in enumerate(texts):
                item = QTableWidgetItem(text)
                item.setToolTip(text)
                item.setData(_KEY, "" if s.id in gone else s.id)
                self.table.setItem(row, column, item)
        fit_rows(self.table, 5)
        self._chosen()
        if self._said_after:
            self.said.setText(self._said_after)
            self._said_after = ""

    def _fit_rows(self, column: int, *_: int) -> None:
        """What a reading was told wraps: rows follow the width that the last column gets."""
        if column == self.table.columnCount() - 1:
            fit_rows(self.table, column)

    def _how(self, s: TakenSource) -> str:
        """The facts of a reading that matter to a person."""
        shown = {"mapping": self.tr("mapping {value}"), "zone": self.tr("zone {value}"),
                 "clock_shift_s": self.tr("times shifted by {value} s"),
                 "leak_definition": self.tr("leak is {value}"),
                 "left_out_rows": self.tr("rows left out {value}"), "encoding": self.tr("text in {value}"),
                 "sheet": self.tr("sheet {value}")}  # fmt: skip
        parts = [text.format(value=_plain(s.facts[key])) for key, text in shown.items() if s.facts.get(key)]
        kinds = {"log_csv": self.tr("log file"), "table": self.tr("table"), "hl7v2": "HL7 v2", "fhir": "FHIR"}
        return ", ".join([kinds.get(s.kind, s.kind), *parts])

    def _chosen(self) -> None:
        self._meant = ""
        source = self._source()
        self.go.setText(self.tr("Withdraw this file..."))
        self.go.setEnabled(source is not None)

    def _source(self) -> TakenSource | None:
        items = self.table.selectedItems()
        key = str(items[0].data(_KEY)) if items else ""
        return next((s for s in self.sources if s.id == key), None)

    def _press(self) -> None:
        source = self._source()
        if source is None:
            return
        if self._meant != source.id:
            self._meant = source.id
            one, many = self.tr("1 entry"), self.tr("{count} entries")
            entries = (one if source.entries == 1 else many).format(count=source.entries)
            one, many = self.tr("1 device sample"), self.tr("{count} device samples")
            samples = (one if source.samples == 1 else many).format(count=source.samples)
            text = self.tr(
                "{name}: {entries} and {samples} of it would no longer count. They stay visible as withdrawn. What "
                "somebody has corrected since stays as corrected."
            )
            self.said.setText(text.format(name=source.name, entries=entries, samples=samples))
            self.go.setText(self.tr("Yes, withdraw it"))
            return
        self.go.setEnabled(False)
        self._model.ask(operations.withdraw, source.id, done=self._withdrawn, failed=self._failed)

    def _withdrawn(self, outcome: Outcome[Withdrawn]) -> None:
        self._said_after = withdrawn_words(outcome.value)
        self._model.ask(operations.taken, done=self._show, failed=self._failed)

    def _failed(self, failure: Failure) -> None:
        self.said.setText(sentence(failure.message, self._reader))


def _plain(value: object) -> str:
    return f"{value:g}" if isinstance(value, float) else str(value)
