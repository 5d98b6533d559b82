"""Settling a flag: its evidence stands there once more, and the reason is asked for."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QLabel, QLineEdit, QWidget

from app.dialogs.asking import AskingDialog
from app.look.theme import Theme
from app.session.failure import Failure
from app.telling.finding_names import marker_name
from app.words import Reader, sentence
from core.judgement.shapes import FlagFigure

Settle = Callable[[FlagFigure, str], None]


class SettleDialog(AskingDialog):
    """Hands flag and reason to `settle`; `failed` shows a refusal."""

    def __init__(
        self,
        label: str,
        flag: FlagFigure,
        reader: Reader,
        settle: Settle,
        theme: Theme,
        parent: QWidget | None = None,
    ) -> None:
        super().__init__("", "", theme, parent)
        self.setWindowTitle(self.tr("Settle flag, {label}").format(label=label))
        self.go.setText(self.tr("Settle it"))
        self._flag, self._reader, self._settle = flag, reader, settle
        name, evidence = QLabel(marker_name(flag.marker, reader)), QLabel()
        name.setProperty("role", "emphasis")
        evidence.setText(" ".join(sentence(m, reader) for m in flag.evidence))
        evidence.setTextFormat(Qt.TextFormat.PlainText)
        evidence.setWordWrap(True)
        self.body.addWidget(name)
        self.body.addWidget(evidence)
        self.reason = QLineEdit()
        self.reason.setPlaceholderText(self.tr("what was done, or why it does not hold here"))
        self.field(self.tr("Reason"), self.reason)
        self.resize(theme.px(560), theme.px(240))

    def submit(self) -> None:
        if not self.reason.text().strip():
            self.refuse(self.tr("Give the reason in a few words."))
            return
        self.go.setEnabled(False)
        self._settle(self._flag, self.reason.text().strip())

    def failed(self, failure: Failure) -> None:
        """Say why it was refused."""
        self.refuse(sentence(failure.message, self._reader))
