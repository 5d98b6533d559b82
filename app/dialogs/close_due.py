"""A person's word on a due item: done, or not needed here and why."""

from __future__ import annotations

from collections.abc import Callable, Sequence

from PySide6.QtWidgets import QComboBox, QLineEdit, QWidget

from app.dialogs.asking import AskingDialog
from app.look.choice_row import ChoiceRow
from app.look.plain_label import plain_label
from app.look.theme import Theme
from app.operations.due import DONE, NOT_NEEDED
from app.session.failure import Failure
from app.telling.finding_names import due_name
from app.words import Reader, sentence
from core.judgement.shapes import DueFigure

Close = Callable[[str, str, str], None]


class CloseDueDialog(AskingDialog):
    """Hands the item's key, the word and the reason to `close`; `failed` shows a refusal."""

    def __init__(
        self, label: str, items: Sequence[DueFigure], chosen: DueFigure, reader: Reader, close: Close, theme: Theme,
        parent: QWidget | None = None,
    ) -> None:  # fmt: skip
        super().__init__("", "", theme, parent)
        self.setWindowTitle(self.tr("Close due item, {label}").format(label=label))
        self.go.setText(self.tr("Record it"))
        self._items, self._reader, self._close = tuple(items), reader, close
        self.what = QComboBox()
        self.what.addItems([due_name(d.what, reader) for d in items])
        self.what.setCurrentIndex(self._items.index(chosen))
        self.because = plain_label()
        self.because.setWordWrap(True)
        self.because.setProperty("role", "quiet")
        self.word = ChoiceRow("", ((DONE, self.tr("done")), (NOT_NEEDED, self.tr("not needed"))))
        self.reason = QLineEdit()
        self.reason.setPlaceholderText(self.tr("what was found, or why it is not needed"))
        self.field(self.tr("Item"), self.what)
        self.form.addRow("", self.because)
        self.field(self.tr("It is"), self.word)
        self.field(self.tr("Reason"), self.reason)
        self.what.currentIndexChanged.connect(self._tell)
        self._tell(self.what.currentIndex())
        self.resize(theme.px(560), theme.px(300))

    def _tell(self, index: int) -> None:
        self.because.setText(sentence(self._items[index].because, self._reader))

    def submit(self) -> None:
        reason = self.reason.text().strip()
        if self.word.key == NOT_NEEDED and not reason:
            self.refuse(self.tr("Say in a few words why it is not needed."))
            return
        self.go.setEnabled(False)
        self._close(self._items[self.what.currentIndex()].what, self.word.key, reason)

    def failed(self, failure: Failure) -> None:
        """Say why it was refused."""
        self.refuse(sentence(failure.message, self._reader))
