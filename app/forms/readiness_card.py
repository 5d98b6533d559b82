"""The checklist before support: each item with its source, answered yes, no or not known, or not at all."""

from __future__ import annotations

from collections.abc import Mapping

from PySide6.QtCore import QCoreApplication, Qt, Signal
from PySide6.QtWidgets import QGridLayout, QHBoxLayout, QLabel, QWidget

from app.forms.answer_row import AnswerRow
from app.forms.cells import Card
from app.forms.readiness import KINDS, MEASURED, RELATIVE, Measured, answered_against, of_kind
from app.look.formats import trimmed
from app.look.theme import Theme
from app.telling.phrases import channel_name
from core.record.channels import YES_NO
from core.record.reading import Reading


class ReadinessCard(Card):
    """`edited` when an answer changed."""

    edited = Signal()

    def __init__(self, theme: Theme) -> None:
        super().__init__(
            theme,
            self.tr("Checklist"),
            self.tr("An item left open is not recorded. A qualified person decides; nothing here forbids."),
        )
        self.rows: dict[str, AnswerRow] = {}
        self.measured: dict[str, QLabel] = {}
        self.marks: dict[str, QLabel] = {}
        words = [("yes", self.tr("yes")), ("no", self.tr("no")), ("not known", self.tr("not known"))]
        assert [key for key, _ in words] == list(YES_NO)
        for kind in KINDS:
            self._add_kind(kind, words)

    def _add_kind(self, kind: str, words: list[tuple[str, str]]) -> None:
        px = self._theme.px
        head = QLabel(QCoreApplication.translate("readiness", kind))
        head.setProperty("role", "strong")
        self.add_line(head)
        inside = QWidget()
        grid = QGridLayout(inside)
        grid.setContentsMargins(0, 0, 0, 0)
        grid.setHorizontalSpacing(px(12))
        grid.setVerticalSpacing(px(4))
        grid.setColumnStretch(0, 1)
        for n, item in enumerate(of_kind(kind)):
            name = channel_name(item.channel)
            row = self.rows[item.channel] = AnswerRow(name, words, self._theme)
            row.chosen.connect(self._answered)
            mark = self.marks[item.channel] = QLabel()
            mark.setProperty("role", "mark")
            grid.addWidget(self._worded(name, f"{item.source} ({_t(item.sure)})"), n, 0)
            grid.addWidget(mark, n, 1, Qt.AlignmentFlag.AlignRight)
            grid.addWidget(row, n, 2)
        if kind == RELATIVE:
            for n, m in enumerate(MEASURED, grid.rowCount()):
                said = self.measured[m.channel] = QLabel(self.tr("answered by the value"))
                said.setProperty("role", "caption")
                below = self.tr("{name} below {limit}").format(name=channel_name(m.channel), limit=trimmed(m.below))
                grid.addWidget(self._worded(below, f"{m.source} ({_t(m.sure)})"), n, 0)
                grid.addWidget(said, n, 2)
        self.add_line(inside)

    def _worded(self, name: str, source: str) -> QWidget:
        text = QLabel(name)
        text.setWordWrap(True)
        said = QLabel(source)
        said.setProperty("role", "caption")
        said.setWordWrap(True)
        inside = QWidget()
        row = QHBoxLayout(inside)
        row.setContentsMargins(0, 0, 0, 0)
        row.addWidget(text, 1)
        row.addWidget(said, 1)
        return inside

    def answers(self) -> dict[str, str]:
        """The answers given, by channel."""
        return {channel: row.key for channel, row in self.rows.items() if row.key}

    def against(self, kind: str) -> tuple[str, ...]:
        """The names of the items of a kind whose answer speaks against beginning."""
        return tuple(channel_name(c) for c in answered_against(self.answers(), kind))

    def _answered(self) -> None:
        against = {c for kind in KINDS for c in answered_against(self.answers(), kind)}
        for channel, mark in self.marks.items():
            mark.setText(self.tr("look") if channel in against else "")
        self.edited.emit()

    def tell_measured(self, values: Mapping[str, Reading]) -> None:
        """Answer the items that a value answers."""
        for m in MEASURED:
            reading = values.get(m.channel)
            self.measured[m.channel].setText(self._measured_word(m, reading))

    def _measured_word(self, m: Measured, reading: Reading | None) -> str:
        if reading is None or reading.number is None:
            return self.tr("not known: no value typed")
        met = self.tr("yes") if reading.number < m.below else self.tr("no")
        return self.tr("{answer}: {value}").format(answer=met, value=trimmed(reading.number))


def _t(sure: str) -> str:
    return QCoreApplication.translate("readiness", sure)
