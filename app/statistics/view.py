"""Shift figures of the ward over a span: as a table, as bars, as a file."""

from __future__ import annotations

from datetime import UTC, datetime
from zoneinfo import ZoneInfo

from PySide6.QtCore import QDateTime, QLocale, Qt, QTimer, QTimeZone, Signal
from PySide6.QtGui import QKeyEvent, QResizeEvent
from PySide6.QtWidgets import (
    QAbstractItemView,
    QDateTimeEdit,
    QFrame,
    QHBoxLayout,
    QHeaderView,
    QLabel,
    QPushButton,
    QScrollArea,
    QSizePolicy,
    QTableWidget,
    QTableWidgetItem,
    QVBoxLayout,
    QWidget,
)

from app.explain.explanation import Explanation
from app.look.choice_row import ChoiceRow
from app.look.copying import can_be_copied
from app.look.flow_row import FlowRow
from app.look.formats import span as span_words
from app.look.theme import Theme
from app.statistics.bars import StatisticsBars
from app.statistics.explained import explain_measure
from app.statistics.measures import Measure, as_text, measures
from app.telling.phrases import translate
from app.telling.table import Table
from app.words import Reader
from core.figures.ward_statistics import WardStatistics
from core.record.instant import DAY, Instant, from_datetime, to_datetime

SPANS = {"shift": 0, "day": 1, "week": 7, "month": 30}
"""The spans that one key chooses, in days before now; the shift is the window's."""
_FORMAT = "dd-MMM-yyyy HH:mm"
LARGE = 1.25
"""Text scale from which table and bars share the page evenly."""


class StatisticsView(QWidget):
    """Shows the figures of a span; asks for those of another."""

    back = Signal()
    span_wanted = Signal(object, object)
    """Start and end; start None: the shift that is looked at."""
    save_wanted = Signal()

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self._theme = theme
        self.found: WardStatistics | None = None
        self._reader = Reader()
        self.title = QLabel(self.tr("Shift figures of the ward"))
        self.title.setProperty("role", "title")
        self.said = QLabel()
        self.said.setProperty("role", "quiet")
        self.spans = ChoiceRow(self.tr("Span"), (
            ("shift", self.tr("this shift")), ("day", self.tr("24 h")), ("week", self.tr("7 days")),
            ("month", self.tr("30 days"))))  # fmt: skip
        self.start, self.end = self._moment_edit(self.tr("From")), self._moment_edit(self.tr("To"))
        self.count = QPushButton(self.tr("Count"))
        self.save = QPushButton(self.tr("Save as CSV..."))
        for button in (self.count, self.save):
            button.setProperty("role", "small")
        self._to = QLabel(self.tr("to"))
        self._to.setSizePolicy(QSizePolicy.Policy.Maximum, QSizePolicy.Policy.Expanding)
        self.table = QTableWidget(0, 3)
        can_be_copied(self.table)
        self.table.setAccessibleName(self.tr("Shift figures"))
        self.table.setHorizontalHeaderLabels([self.tr("Figure"), self.tr("Value"), self.tr("Details")])
        self.table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        self.table.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        self.table.verticalHeader().hide()
        self.table.setShowGrid(False)
        self.table.setWordWrap(True)
        self.table.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.table.horizontalHeader().setDefaultAlignment(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
        self._measures: dict[int, Measure] = {}
        self.bars = StatisticsBars(theme)
        self._lay_out()
        self.spans.chosen.connect(self._span_chosen)
        self.count.clicked.connect(self._count)
        self.save.clicked.connect(self.save_wanted)

    def _moment_edit(self, name: str) -> QDateTimeEdit:
        edit = QDateTimeEdit()
        edit.setLocale(QLocale.c())  # months in letters, whatever the computer's region
        edit.setDisplayFormat(_FORMAT)
        edit.setAccessibleName(name)
        edit.setTimeZone(QTimeZone.utc())
        edit.setButtonSymbols(QDateTimeEdit.ButtonSymbols.NoButtons)
        return edit

    def _lay_out(self) -> None:
        px = self._theme.px
        head = QHBoxLayout()
        head.setSpacing(px(8))
        head.addWidget(self.title)
        head.addWidget(self.said)
        head.addStretch(1)
        tools = FlowRow(spacing=px(8))
        tools.addWidget(self.spans)
        for widget in (self.start, self._to, self.end, self.count, self.save):
            tools.add_right(widget)
        self._scroll = QScrollArea()
        self._scroll.setWidgetResizable(True)
        self._scroll.setFrameShape(QFrame.Shape.NoFrame)
        self._scroll.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self._scroll.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self._scroll.setWidget(self.bars)
        row = self._row = QHBoxLayout()
        row.setSpacing(px(12))
        row.addWidget(self.table)
        row.addWidget(self._scroll)
        self._share()
        column = QVBoxLayout(self)
        column.setContentsMargins(px(16), px(4), px(16), px(4))
        column.setSpacing(px(6))
        column.addLayout(head)
        column.addLayout(tools)
        column.addLayout(row, 1)

    def _share(self) -> None:
        """Large text takes room from the table's sentences, which wrap, before it takes it from the bars."""
        for place, share in enumerate((12, 8) if self._theme.text_scale < LARGE else (1, 1)):
            self._row.setStretch(place, share)

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size."""
        self._theme = theme
        self._share()
        self.bars.set_theme(theme)
        if self.found is not None:
            self.show_figures(self.found, self._reader)

    def show_figures(self, found: WardStatistics, reader: Reader) -> None:
        """Show the figures of a span."""
        self.found, self._reader = found, reader
        self.said.setText(span_words(found.start, found.end, reader.zone))
        self.show_span(found.start, found.end, reader.zone)
        self._fill()
        self.bars.show_figures(found, reader)

    def show_span(self, start: Instant, end: Instant, zone: str) -> None:
        """The span that is counted, or is being counted."""
        self.start.setDateTime(_shown(start, zone))
        self.end.setDateTime(_shown(end, zone))

    def say(self, text: str) -> None:
        """Say that figures are being counted, or why they cannot be."""
        self.said.setText(text)

    @property
    def reader(self) -> Reader:
        """For whom it is written."""
        return self._reader

    def as_table(self) -> Table | None:
        """The figures as a table and in words."""
        if self.found is None:
            return None
        rows = tuple((m.group, m.name, m.shown, m.beside) for m in measures(self.found, self._reader))
        heads = (translate("statistics", "Group"), translate("statistics", "Figure"),
                 translate("statistics", "Value"), translate("statistics", "Details"))  # fmt: skip
        return Table(translate("statistics", "Shift figures"), heads, rows, as_text(self.found, self._reader))

    def explained(self) -> Explanation | None:
        """How the figure in the chosen row was counted; None where no row is chosen."""
        measure = self._measures.get(self.table.currentRow())
        if measure is None or self.found is None:
            return None
        return explain_measure(measure, self.found, self._reader)

    def _fill(self) -> None:
        assert self.found is not None
        self._measures = {}
        rows: list[tuple[str, str, str]] = []
        heads: set[int] = set()
        group = ""
        for m in measures(self.found, self._reader):
            if m.group != group:
                group = m.group
                heads.add(len(rows))
                rows.append((group, "", ""))
            self._measures[len(rows)] = m
            rows.append((m.name, m.shown, m.beside))
        self.table.clearSpans()
        self.table.setRowCount(len(rows))
        for r, row in enumerate(rows):
            for c, text in enumerate(row):
                item = QTableWidgetItem(text)
                item.setToolTip(text)
                if r in heads:
                    item.setFont(self._theme.font(bold=True))
                    item.setFlags(Qt.ItemFlag.NoItemFlags)
                    item.setForeground(self._theme.colour("ink"))
                self.table.setItem(r, c, item)
            if r in heads:
                self.table.setSpan(r, 0, 1, 3)
        header = self.table.horizontalHeader()
        header.setSectionResizeMode(1, QHeaderView.ResizeMode.ResizeToContents)
        header.setSectionResizeMode(2, QHeaderView.ResizeMode.Stretch)
        self._fit_rows()

    def _fit_rows(self) -> None:
        """Columns by the width there is, rows as high as their words: nothing in the table is cut."""
        header, wide, px = self.table.horizontalHeader(), self.table.viewport().width(), self._theme.px
        header.setSectionResizeMode(0, QHeaderView.ResizeMode.Fixed)
        header.resizeSection(0, min(self.table.sizeHintForColumn(0) + px(12), round(wide * 0.42)))
        metrics = self.table.fontMetrics()
        for r in range(self.table.rowCount()):
            high = 0
            for c in range(self.table.columnCount()):
                item, room = self.table.item(r, c), header.sectionSize(c) - px(16)
                if item is not None and item.text():
                    rect = metrics.boundingRect(0, 0, room, 100_000, Qt.TextFlag.TextWordWrap, item.text())
                    high = max(high, rect.height())
            self.table.setRowHeight(r, max(high + px(9), px(26)))

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        if self.found is not None:
            QTimer.singleShot(0, self, self._fit_rows)  # nothing where the page is gone by then

    # what the person does

    def _span_chosen(self, key: str) -> None:
        if key == "shift" or self.found is None:
            self.span_wanted.emit(None, None)
            return
        self.span_wanted.emit(self.found.end - SPANS[key] * DAY, self.found.end)

    def _count(self) -> None:
        zone = self._reader.zone
        self.span_wanted.emit(_meant(self.start.dateTime(), zone), _meant(self.end.dateTime(), zone))

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.back.emit()
            return
        super().keyPressEvent(event)


def _shown(at: Instant, zone: str) -> QDateTime:
    """The wall clock of a zone, carried as if it were UTC: the edit knows digits, the zone is ours."""
    wall = to_datetime(at).astimezone(ZoneInfo(zone))
    seconds = int(wall.replace(tzinfo=UTC).timestamp())
    return QDateTime.fromSecsSinceEpoch(seconds, QTimeZone.utc())


def _meant(shown: QDateTime, zone: str) -> Instant:
    """The instant that the wall clock shows; of an hour that came twice, the first."""
    date, time = shown.date(), shown.time()
    wall = datetime(date.year(), date.month(), date.day(), time.hour(), time.minute(), tzinfo=ZoneInfo(zone))
    return from_datetime(wall)
