"""Sets of panels under names, and for whom the panels in hand are kept: one indication, or all of their kind."""

from __future__ import annotations

from collections.abc import Mapping

from PySide6.QtCore import QSignalBlocker, Signal
from PySide6.QtWidgets import QHBoxLayout, QInputDialog, QLabel, QPushButton, QVBoxLayout, QWidget

from app.episode.panels import PanelSet
from app.look.chooser import Chooser
from app.look.theme import Theme
from app.ward.lane_words import indication_word

MOST_NAME = 60


class PanelSets(QWidget):
    """`chosen` hands a named set to the editor; `saved` and `forgotten` name one."""

    chosen = Signal(object)
    saved = Signal(str)
    forgotten = Signal(str)

    def __init__(self, sets: Mapping[str, PanelSet], family: str, indication: str, own: bool, theme: Theme) -> None:
        super().__init__()
        self._sets = dict(sets)
        self.named, self.kept_for = Chooser(), Chooser()
        self.named.setAccessibleName(self.tr("Sets of panels by name"))
        self.kept_for.setAccessibleName(self.tr("For whom the panels are kept"))
        self.save, self.forget = QPushButton(self.tr("Save as set...")), QPushButton(self.tr("Forget set"))
        for button in (self.save, self.forget):
            button.setAutoDefault(False)
        kinds = {"hypoxaemic": self.tr("every hypoxaemic failure"), "usual": self.tr("every other indication")}
        self.kept_for.addItem(kinds[family], family)
        if indication:
            only = self.tr("{indication} only").format(indication=indication_word(indication))
            self.kept_for.addItem(only, indication)
        self.kept_for.setCurrentIndex(1 if own and indication else 0)
        self._lay_out(theme)
        self._fill("")
        self.named.activated.connect(self._chosen)
        self.save.clicked.connect(self._ask_name)
        self.forget.clicked.connect(self._forget)

    def _lay_out(self, theme: Theme) -> None:
        first, second = QHBoxLayout(), QHBoxLayout()
        first.addWidget(QLabel(self.tr("Set")))
        first.addWidget(self.named, 1)
        first.addWidget(self.save)
        first.addWidget(self.forget)
        second.addWidget(QLabel(self.tr("Keep for")))
        second.addWidget(self.kept_for, 1)
        column = QVBoxLayout(self)
        column.setContentsMargins(0, 0, 0, 0)
        column.setSpacing(theme.px(6))
        column.addLayout(first)
        column.addLayout(second)

    @property
    def scope(self) -> str:
        """For whom they are kept: an indication, or a family of them."""
        return str(self.kept_for.currentData())

    @property
    def sets(self) -> Mapping[str, PanelSet]:
        """The sets by name."""
        return self._sets

    def _fill(self, name: str) -> None:
        with QSignalBlocker(self.named):
            self.named.clear()
            self.named.addItem(self.tr("these panels"), "")
            for known in sorted(self._sets, key=str.casefold):
                self.named.addItem(known, known)
            self.named.setCurrentIndex(max(self.named.findData(name), 0))
        self.forget.setEnabled(bool(self.named.currentData()))

    def _chosen(self) -> None:
        name = str(self.named.currentData())
        self.forget.setEnabled(bool(name))
        if name:
            self.chosen.emit(self._sets[name])

    def _ask_name(self) -> None:
        usual = str(self.named.currentData())
        title, asked = self.tr("Save as set"), self.tr("Name of the set; the same name takes its place")
        text, given = QInputDialog.getText(self, title, asked, text=usual)
        if given and text.strip():
            self.saved.emit(text.strip()[:MOST_NAME])

    def saved_as(self, name: str, panels: PanelSet) -> None:
        """The editor has kept a set under a name."""
        self._sets[name] = panels
        self._fill(name)

    def _forget(self) -> None:
        name = str(self.named.currentData())
        self._sets.pop(name, None)
        self._fill("")
        self.forgotten.emit(name)
