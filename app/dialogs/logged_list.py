"""The list of what was logged for a patient, newest first, from which one value is chosen."""

from __future__ import annotations

from collections.abc import Mapping

from PySide6.QtCore import Qt
from PySide6.QtGui import QResizeEvent
from PySide6.QtWidgets import QAbstractItemView, QHeaderView, QTreeWidget, QTreeWidgetItem

from app.look.copying import can_be_copied
from app.look.formats import inert, logged, wall
from app.telling.phrases import channel_name
from app.words import Reader
from core.record.channels import CHANNELS, Kind
from core.record.entries import NewEntry
from core.record.episode import Episode
from core.record.knowledge import Standing

_ENTRY = Qt.ItemDataRole.UserRole
_BY = 3


class LoggedList(QTreeWidget):
    """What stands for an episode; `entry_id` is the chosen one's, which stays in sight whatever height there is."""

    def __init__(self, record: Episode, reader: Reader) -> None:
        super().__init__()
        self._reader = reader
        can_be_copied(self)
        self.setAccessibleName(self.tr("Logged values, newest first"))
        self.setHeaderLabels([self.tr("When"), self.tr("What"), self.tr("Value"), self.tr("By"), self.tr("Marks")])
        self.setRootIsDecorated(False)
        self.setSelectionMode(QAbstractItemView.SelectionMode.SingleSelection)
        self.header().setSectionResizeMode(QHeaderView.ResizeMode.ResizeToContents)
        self.header().setStretchLastSection(False)
        self.header().setSectionResizeMode(2, QHeaderView.ResizeMode.Stretch)
        self.setTextElideMode(Qt.TextElideMode.ElideRight)
        for s in sorted(record.standing, key=lambda s: (-s.entry.at, -s.entry.seq)):
            self._add(s)
        first = self.topLevelItem(0)
        if first is not None:
            self.setCurrentItem(first)

    @property
    def entry_id(self) -> str | None:
        """The id of the chosen entry."""
        item = self.currentItem()
        return None if item is None else str(item.data(0, _ENTRY))

    def choose(self, entry_id: str) -> bool:
        """Choose an entry; False where it stands no more."""
        rows = [self.topLevelItem(n) for n in range(self.topLevelItemCount())]
        own = next((item for item in rows if item is not None and item.data(0, _ENTRY) == entry_id), None)
        if own is not None:
            self.setCurrentItem(own)
        return own is not None

    def show_origins(self, files: Mapping[str, str]) -> None:
        """Beside who wrote a value the file it came from, by the entry's id."""
        for row in range(self.topLevelItemCount()):
            item = self.topLevelItem(row)
            name = files.get(str(item.data(0, _ENTRY))) if item is not None else None
            if item is not None and name:
                item.setText(_BY, self.tr("{by}, {file}").format(by=item.text(_BY), file=name))
                item.setToolTip(_BY, inert(item.text(_BY)))

    def resizeEvent(self, event: QResizeEvent) -> None:
        """Fields that appear under it take its height: what they are about stays in sight."""
        super().resizeEvent(event)
        if self.currentItem() is not None:
            self.scrollToItem(self.currentItem())

    def _add(self, s: Standing) -> None:
        said = ((self.tr("corrected"), s.corrected), (self.tr("disputed"), s.disputed),
                (self.tr("doubtful"), bool(s.entry.doubt)))  # fmt: skip
        marks = ", ".join(word for word, held in said if held)
        name, when = channel_name(s.entry.channel), wall(s.entry.at, self._reader.zone)
        item = QTreeWidgetItem([when, name, value_text(s.entry, self._reader), s.entry.by, marks])
        item.setData(0, _ENTRY, s.entry.id)
        self.addTopLevelItem(item)


def value_text(entry: NewEntry, reader: Reader) -> str:
    """A value as it was typed, and what it is kept as where that reads otherwise; the text of an event."""
    if CHANNELS[entry.channel].kind is Kind.MARK:
        return entry.words or ""
    if CHANNELS[entry.channel].kind is Kind.INSTANT and entry.number is not None:
        return wall(int(entry.number), reader.zone)  # not as it was written: people read the wall's clock
    value = entry.number if entry.number is not None else entry.words
    return logged(entry.channel, value, entry.raw, entry.raw_unit, reader.gas_unit)


def named_value(entry: NewEntry, reader: Reader) -> str:
    """A value with its name: `PaCO2 58 mmHg`, `Mask off`."""
    return f"{channel_name(entry.channel)} {value_text(entry, reader)}".strip()
