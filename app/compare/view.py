"""The compare view: two to eight episodes laid over each other by hours since the start of support."""

from __future__ import annotations

from collections.abc import Mapping

from PySide6.QtCore import QSize, Qt, Signal
from PySide6.QtGui import QIcon, QKeyEvent, QPainter, QPixmap
from PySide6.QtWidgets import (
    QFrame,
    QHBoxLayout,
    QLabel,
    QListWidget,
    QListWidgetItem,
    QScrollArea,
    QVBoxLayout,
    QWidget,
)

from app.compare.course_chart import CourseChart, pen_of
from app.compare.courses import LEAST, MOST, compare, episode_name
from app.look.plain_label import plain_label
from app.look.theme import Theme
from app.operations.figures import EpisodeAnswer
from app.ward.lane_words import OnWard
from app.ward.ordering import Order, ordered
from app.ward.view import WardContent

_KEY = Qt.ItemDataRole.UserRole


class CompareView(QWidget):
    """A list to choose from at the left, the courses at the right."""

    back = Signal()
    opened = Signal(str)

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self._theme = theme
        self._ward: dict[str, OnWard] = {}
        self._answers: Mapping[str, EpisodeAnswer] = {}
        self._gas_unit = "mmHg"
        self._filling = False
        self.title = QLabel(self.tr("Compare, by hours since the start of support"))
        self.title.setProperty("role", "title")
        self.said = plain_label()
        self.said.setProperty("role", "quiet")
        self.said.setWordWrap(True)
        self.list = QListWidget()
        self.list.setAccessibleName(self.tr("Episodes to compare"))
        self.list.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.list.setTextElideMode(Qt.TextElideMode.ElideRight)
        self.chart = CourseChart(theme)
        scroll = QScrollArea()
        scroll.setWidgetResizable(True)
        scroll.setFrameShape(QFrame.Shape.NoFrame)
        scroll.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        scroll.setWidget(self.chart)
        left = QVBoxLayout()
        left.addWidget(self.list, 1)
        left.addWidget(self.said)
        row = QHBoxLayout()
        row.setSpacing(theme.px(12))
        row.addLayout(left)
        row.addWidget(scroll, 1)
        column = QVBoxLayout(self)
        column.setContentsMargins(theme.px(16), theme.px(4), theme.px(16), theme.px(4))
        column.addWidget(self.title)
        column.addLayout(row, 1)
        self.list.itemChanged.connect(self._changed)
        self.list.itemActivated.connect(self._open)
        self.set_theme(theme)

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size."""
        self._theme = theme
        self.list.setFixedWidth(theme.px(290))
        self.list.setIconSize(QSize(theme.px(34), theme.px(16)))
        self.said.setFixedWidth(theme.px(290))
        self.chart.set_theme(theme)
        self._draw()

    def show_ward(self, content: WardContent, answers: Mapping[str, EpisodeAnswer]) -> None:
        """Offer the ward's episodes; the first time the three of most concern are chosen."""
        chosen = self.chosen() if self.list.count() else None
        self._ward = {e.figures.episode: e for e in content.episodes}
        self._answers, self._gas_unit = answers, content.gas_unit
        order = ordered([e.figures for e in content.episodes], Order.CONCERN)
        if chosen is None:
            chosen = [f.episode for f in order if f.support.since is not None][:3]
        self._filling = True
        self.list.clear()
        for f in order:
            item = QListWidgetItem(episode_name(f))
            item.setData(_KEY, f.episode)
            item.setFlags(item.flags() | Qt.ItemFlag.ItemIsUserCheckable)
            item.setCheckState(Qt.CheckState.Checked if f.episode in chosen else Qt.CheckState.Unchecked)
            self.list.addItem(item)
        if self.list.count():
            self.list.setCurrentRow(0)
        self._filling = False
        self._draw()

    def chosen(self) -> list[str]:
        """The keys of the episodes ticked, in the list's order."""
        items = (self.list.item(n) for n in range(self.list.count()))
        return [i.data(_KEY) for i in items if i.checkState() is Qt.CheckState.Checked]

    def current(self) -> str | None:
        """The key of the episode that the cursor stands on."""
        item = self.list.currentItem()
        return None if item is None else str(item.data(_KEY))

    def _changed(self, item: QListWidgetItem) -> None:
        if self._filling:
            return
        if len(self.chosen()) > MOST:
            item.setCheckState(Qt.CheckState.Unchecked)
            return
        self._draw()

    def _draw(self) -> None:
        keys = [k for k in self.chosen() if k in self._ward]
        made = compare([self._ward[k] for k in keys], self._answers, self._gas_unit)
        self.chart.show_comparison(made)
        self._number(keys)
        said = [self.tr("Space ticks, Enter opens. {least} to {most} episodes.").format(least=LEAST, most=MOST)]
        if not self._ward:
            said = [self.tr("No episode yet.")]
        if made.left_out:
            said.append(self.tr("Start not recorded: {labels}.").format(labels=", ".join(made.left_out)))
        self.said.setText(" ".join(said))

    def _number(self, keys: list[str]) -> None:
        """Each ticked episode shows its number and its line."""
        known = [k for k in keys if self._ward[k].figures.support.since is not None]
        self._filling = True
        for n in range(self.list.count()):
            item = self.list.item(n)
            key = item.data(_KEY)
            name = episode_name(self._ward[key].figures) if key in self._ward else item.text()
            if key in known:
                number = known.index(key) + 1
                item.setText(f"{number}  {name}")
                item.setIcon(self._line_icon(number))
            else:
                item.setText(name)
                item.setIcon(QIcon())
        self._filling = False

    def _line_icon(self, number: int) -> QIcon:
        size = self.list.iconSize()
        picture = QPixmap(size)
        picture.fill(Qt.GlobalColor.transparent)
        painter = QPainter(picture)
        painter.setPen(pen_of(self._theme, number))
        painter.drawLine(2, size.height() // 2, size.width() - 2, size.height() // 2)
        painter.end()
        return QIcon(picture)

    def _open(self, item: QListWidgetItem) -> None:
        self.opened.emit(item.data(_KEY))

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.back.emit()
            return
        super().keyPressEvent(event)
