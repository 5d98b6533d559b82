"""What a table's columns cannot tell: how times are written and where, who wrote, what leak means, whose it is."""

from __future__ import annotations

from collections.abc import Mapping as Map
from collections.abc import Sequence
from dataclasses import replace
from zoneinfo import available_timezones

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QComboBox, QDoubleSpinBox, QFormLayout, QLabel, QWidget

from app.intake_window.column_table import NoWheel
from app.intake_window.episode_choices import choices, chosen_or_typed
from app.look.theme import Theme
from core.record.channels import LEAK_DEFINITIONS
from storage.intake.mapping import DECIMALS, ORDERS, WRITERS, Mapping, channels_of

_COLUMN = "\x1fcolumn:"
_MOST_SHIFT_S = 400 * 86_400.0


class AnswersForm(QWidget):
    """`changed()` when a person answers; `mapping_with` and `episode` give the answers."""

    changed = Signal()

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self._filling = False
        self.time, self.clock, self.order, self.zone = QComboBox(), QComboBox(), QComboBox(), QComboBox()
        self.repeated, self.decimal, self.writer, self.leak = (
            QComboBox(),
            QComboBox(),
            QComboBox(),
            QComboBox(),
        )
        self.episode, self.person = QComboBox(), QComboBox()
        self.shift = QDoubleSpinBox()
        self.shift.setRange(-_MOST_SHIFT_S, _MOST_SHIFT_S)
        self.shift.setDecimals(0)
        self.shift.setButtonSymbols(QDoubleSpinBox.ButtonSymbols.NoButtons)
        self.shift.setSuffix(self.tr(" s"))
        self.episode.setEditable(True)
        self.episode.setInsertPolicy(QComboBox.InsertPolicy.NoInsert)
        self.zone.setEditable(True)
        self.form = QFormLayout(self)
        self.form.setContentsMargins(0, 0, theme.px(12), 0)
        self.form.setVerticalSpacing(theme.px(2))
        self.form.setFieldGrowthPolicy(QFormLayout.FieldGrowthPolicy.AllNonFixedFieldsGrow)
        self.form.setLabelAlignment(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
        self._still = NoWheel(self)
        self._rows = (
            (self.tr("Whose values"), self.episode), (self.tr("Time stands in"), self.time),
            (self.tr("and the clock in"), self.clock), (self.tr("Written as"), self.order),
            (self.tr("Time zone"), self.zone), (self.tr("Hour that came twice"), self.repeated),
            (self.tr("Decimal mark"), self.decimal), (self.tr("Written by"), self.writer),
            (self.tr("Person stands in"), self.person), (self.tr("Leak is"), self.leak),
            (self.tr("Add to every time"), self.shift),
        )  # fmt: skip
        self._add_rows(theme)
        self.shift.valueChanged.connect(self._tell)

    def _add_rows(self, theme: Theme) -> None:
        for label, field in self._rows:
            field.setAccessibleName(label)
            word = QLabel(label)
            word.setBuddy(field)
            word.setMinimumHeight(theme.px(34))
            self.form.addRow(word, field)
            if isinstance(field, QComboBox):
                field.installEventFilter(self._still)
                field.setMinimumContentsLength(10)
                field.activated.connect(self._tell)
                line = field.lineEdit()
                if line is not None:
                    line.editingFinished.connect(self._tell)

    def show_answers(
        self,
        mapping: Mapping,
        header: Sequence[str],
        episodes: Map[str, str],
        episode: str,
        *,
        has_offsets: bool,
    ) -> None:
        """Show a mapping's answers, with what is open as a question mark."""
        self._filling = True
        columns = [(name, name) for name in header]
        use = mapping.time
        _fill(self.time, [("?", ""), *columns], use.date)
        _fill(self.clock, [(self.tr("the same column"), ""), *columns], use.clock)
        _fill(self.order, [("?", ""), *((self.order_word(o), o) for o in ORDERS)], use.order)
        marks = zip((self.tr("point"), self.tr("comma")), DECIMALS, strict=True)
        _fill(self.decimal, [("?", ""), *marks], mapping.decimal)
        words = (self.tr("a person"), self.tr("a device (samples)"))
        _fill(self.writer, [("?", ""), *zip(words, WRITERS, strict=True)], mapping.written_by)
        _fill(self.person, [(self.tr("no column"), ""), *columns], mapping.by_column)
        _fill(self.leak, [("?", ""), *((d, d) for d in LEAK_DEFINITIONS)], mapping.leak_definition)
        twice = [
            (self.tr("refuse it"), ""),
            (self.tr("the first"), "first"),
            (self.tr("the second"), "second"),
        ]
        _fill(self.repeated, twice, use.repeated)
        zones = [(z, z) for z in sorted(available_timezones())]
        _fill(self.zone, [(self.tr("each time has its offset") if has_offsets else "?", ""), *zones], use.zone)
        of = [("?", ""), *choices(episodes)]
        of += [(self.tr("column {name}").format(name=name), _COLUMN + name) for name in header]
        _fill(self.episode, of, _COLUMN + mapping.episode_column if mapping.episode_column else episode)
        if episode and not mapping.episode_column and self.episode.currentData() != episode:
            self.episode.setEditText(episode)
        self._show_what_matters(mapping, has_offsets=has_offsets)
        self._filling = False

    def _show_what_matters(self, mapping: Mapping, *, has_offsets: bool) -> None:
        self.form.setRowVisible(self.leak, "leak" in channels_of(mapping))
        self.form.setRowVisible(self.repeated, not has_offsets)
        self.form.setRowVisible(self.shift, mapping.written_by == "device" or self.shift.value() != 0)
        self.form.setRowVisible(self.person, mapping.written_by == "person")

    def order_word(self, order: str) -> str:
        """A way of writing dates, by example."""
        words = {
            "iso": "2026-03-28 02:10",
            "dmy": self.tr("28.03.2026, day first"),
            "mdy": self.tr("03/28/2026, month first"),
            "ymd": "2026/03/28 02:10",
            "epoch_s": self.tr("seconds since 1970"),
            "epoch_ms": self.tr("milliseconds since 1970"),
        }
        return words[order]

    def mapping_with(self, mapping: Mapping) -> Mapping:
        """The mapping with the answers of the form."""
        time = replace(mapping.time, date=_data(self.time), clock=_data(self.clock), order=_data(self.order),
                       zone=self._zone(), repeated=_data(self.repeated))  # fmt: skip
        of = chosen_or_typed(self.episode)
        return replace(mapping, time=time, decimal=_data(self.decimal), written_by=_data(self.writer),
                       by_column=_data(self.person), leak_definition=_data(self.leak),
                       episode_column=of.removeprefix(_COLUMN) if of.startswith(_COLUMN) else "")  # fmt: skip

    @property
    def episode_key(self) -> str:
        """The one episode of the whole file; empty where a column names it, or nothing does."""
        of = chosen_or_typed(self.episode)
        return "" if of.startswith(_COLUMN) or of == "?" else of

    def _zone(self) -> str:
        text = self.zone.currentText().strip()
        return text if text in available_timezones() else ""

    def _tell(self) -> None:
        if not self._filling:
            self.changed.emit()


def _fill(box: QComboBox, choices: Sequence[tuple[str, str]], chosen: str) -> None:
    box.clear()
    for word, key in choices:
        box.addItem(word, key)
    box.setCurrentIndex(max(0, box.findData(chosen)))


def _data(box: QComboBox) -> str:
    return str(box.currentData() or "")
