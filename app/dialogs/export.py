"""Choosing what to export: episodes, groups of channels, a span, de-identified or not."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QCheckBox, QLabel, QListWidget, QListWidgetItem, QWidget

from app.dialogs.asking import AskingDialog
from app.look.chooser import Chooser
from app.look.theme import Theme
from app.telling.phrases import translate
from core.record.channels import Group, by_group

_KEY = Qt.ItemDataRole.UserRole


@dataclass(frozen=True, slots=True)
class Wanted:
    """What was chosen. Empty: all episodes, all channels. `shift_only`: the shift that is looked at."""

    episodes: tuple[str, ...]
    channels: tuple[str, ...]
    shift_only: bool
    deidentified: bool
    dictionary: bool


def group_word(group: Group) -> str:
    """A group of channels in the reader's language."""
    return {
        Group.PROFILE: translate("export", "Facts of the patient and the plan"),
        Group.SETTING: translate("export", "Settings"),
        Group.VITAL: translate("export", "Vital signs"),
        Group.GAS: translate("export", "Blood gases"),
        Group.DEVICE: translate("export", "Device readings"),
        Group.EVENT: translate("export", "Events and notes"),
    }[group]


class ExportDialog(AskingDialog):
    """Asks, and hands a Wanted to `go_on`."""

    def __init__(
        self, labels: Mapping[str, str], go_on: Callable[[Wanted], None], theme: Theme, parent: QWidget | None = None
    ) -> None:
        super().__init__(self.tr("Export values"), self.tr("Choose a file..."), theme, parent)
        self._go_on = go_on
        about = QLabel(self.tr("A CSV file that spreadsheets read and that can be taken in again. It holds what "
                               "counts now: corrected values only in their newest form."))  # fmt: skip
        about.setWordWrap(True)
        self.add_body(about)
        self.episodes = _ticks(labels, self.tr("Episodes"))
        self.groups = _ticks({g.value: group_word(g) for g in Group}, self.tr("What"))
        self.span = Chooser()
        self.span.addItem(self.tr("everything recorded"), False)
        self.span.addItem(self.tr("this shift"), True)
        self.deidentified = QCheckBox(self.tr("De-identified: no labels, no free text, no names, times moved"))
        self.dictionary = QCheckBox(self.tr("Data dictionary beside it"))
        self.dictionary.setChecked(True)
        self.field(self.tr("Episodes"), self.episodes)
        self.field(self.tr("What"), self.groups)
        self.field(self.tr("When"), self.span)
        for box in (self.deidentified, self.dictionary):
            self.form.addRow(box)
        self.resize(theme.px(560), theme.px(600))

    def submit(self) -> None:
        """Hand on what was ticked."""
        episodes, groups = _ticked(self.episodes), _ticked(self.groups)
        if not episodes or not groups:
            self.refuse(self.tr("Tick at least one episode and one kind of value."))
            return
        every_group = len(groups) == self.groups.count()
        channels = () if every_group else tuple(c.key for g in groups for c in by_group(Group(g)))
        self.accept()
        self._go_on(Wanted(episodes, channels, bool(self.span.currentData()), self.deidentified.isChecked(),
                           self.dictionary.isChecked()))  # fmt: skip


def _ticks(labels: Mapping[str, str], name: str) -> QListWidget:
    ticks = QListWidget()
    ticks.setAccessibleName(name)
    ticks.setSpacing(3)
    for key, label in labels.items():
        item = QListWidgetItem(label)
        item.setData(_KEY, key)
        item.setFlags(item.flags() | Qt.ItemFlag.ItemIsUserCheckable)
        item.setCheckState(Qt.CheckState.Checked)
        ticks.addItem(item)
    return ticks


def _ticked(ticks: QListWidget) -> tuple[str, ...]:
    items = (ticks.item(n) for n in range(ticks.count()))
    return tuple(i.data(_KEY) for i in items if i.checkState() is Qt.CheckState.Checked)
