"""Closing a handover: who gives, who takes. What is kept is what was printed, for good."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QLabel, QLineEdit, QWidget

from app.dialogs.asking import AskingDialog
from app.look.chooser import Chooser
from app.look.theme import Theme
from app.sheet.paper import PAPERS


class CloseHandoverDialog(AskingDialog):
    """Asks for giver, taker and paper and hands them to `close`; `usual` are the person and the paper chosen last."""

    def __init__(
        self, shift: str, usual: tuple[str, str], close: Callable[[str, str, str], None], theme: Theme,
        parent: QWidget | None = None,
    ) -> None:  # fmt: skip
        super().__init__(self.tr("Close handover"), self.tr("Close for good"), theme, parent)
        self._close = close
        about = QLabel(self.tr("{shift}. The sheet is kept in the ledger as it is printed now and is never altered. "
                               "Later entries and corrections do not change it.").format(shift=shift))  # fmt: skip
        about.setWordWrap(True)
        self.add_body(about)
        self.given, self.taken, self.paper = QLineEdit(usual[0]), QLineEdit(), Chooser()
        for name in PAPERS:
            self.paper.addItem(name, name)
        self.paper.setCurrentIndex(max(0, self.paper.findData(usual[1])))
        self.field(self.tr("Given by"), self.given)
        self.field(self.tr("Taken by"), self.taken)
        self.field(self.tr("Paper"), self.paper)
        self.already = QLabel()
        self.already.setTextFormat(Qt.TextFormat.PlainText)
        self.already.setWordWrap(True)
        self.already.setProperty("role", "strong")
        self.already.hide()
        self.body.addWidget(self.already)
        self.taken.setFocus()
        self.resize(theme.px(520), theme.px(320))

    def tell_closed(self, names: Sequence[str], newest: str) -> None:
        """Say which handovers of this shift are closed already, the newest first, and when that was."""
        if names:
            told = self.tr("A handover of this shift is closed already: {name}, at {time}.")
            if len(names) > 1:
                told = self.tr("{count} handovers of this shift are closed already, the last: {name}, at {time}.")
            told += " " + self.tr("Closing again keeps a further one beside it; Ctrl+Shift+O opens closed ones.")
            self.already.setText(told.format(count=len(names), name=names[0], time=newest))
            self.already.show()
            self.grow()

    def submit(self) -> None:
        """Hand on what was asked, when both names are there."""
        given, taken = self.given.text().strip(), self.taken.text().strip()
        if not given or not taken:
            self.refuse(self.tr("Both names are needed: who gives the handover and who takes it."))
            return
        self.go.setEnabled(False)
        self.say(self.tr("Gathering the shift and printing it. This may take a while."))
        self._close(given, taken, str(self.paper.currentData()))
