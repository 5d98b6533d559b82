"""The problem report: read it, add words, save or copy it. Nothing leaves the computer by itself."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import (
    QFileDialog,
    QHBoxLayout,
    QLabel,
    QPlainTextEdit,
    QPushButton,
    QVBoxLayout,
    QWidget,
)

from app.keeping.whole_file import write_whole
from app.look.fitted import FittedDialog, fit
from app.look.theme import Theme
from app.session.failure import failure_of
from app.words import Reader, sentence


class ProblemReportDialog(FittedDialog):
    """Shows the whole report; what is saved is what stands there."""

    def __init__(self, text: str, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.setWindowTitle(self.tr("Problem report"))
        self.about = QLabel(
            self.tr(
                "Read it before you give it away. It holds no label, value, initials, path or file name. Add what "
                "you did, without naming a patient. It goes nowhere by itself."
            )
        )
        self.about.setWordWrap(True)
        self.text = QPlainTextEdit(text)
        self.text.setAccessibleName(self.tr("Problem report"))
        self.text.setTabChangesFocus(True)
        self.said = QLabel()
        self.said.setProperty("role", "strong")
        self.said.setWordWrap(True)
        self.save, self.copy = QPushButton(self.tr("Save as...")), QPushButton(self.tr("Copy"))
        self.leave = QPushButton(self.tr("Close"))
        self.save.setProperty("role", "primary")
        foot = QHBoxLayout()
        foot.addWidget(self.said, 1)
        for button in (self.copy, self.save, self.leave):
            foot.addWidget(button)
        px = theme.px
        column = QVBoxLayout(self)
        column.setContentsMargins(px(20), px(16), px(20), px(16))
        column.setSpacing(px(10))
        column.addWidget(self.about)
        column.addWidget(self.text, 1)
        column.addLayout(foot)
        self.save.clicked.connect(self._ask_save)
        self.copy.clicked.connect(self._copy)
        self.leave.clicked.connect(self.reject)
        fit(self, theme, 760, 560)

    def _ask_save(self) -> None:
        usual = str(Path.home() / "luffmark-report.txt")
        chosen, _ = QFileDialog.getSaveFileName(self, self.tr("Save report"), usual, self.tr("Text (*.txt)"))
        if chosen:
            self.save_to(Path(chosen))

    def save_to(self, path: Path) -> None:
        """Write what stands there, and say so or say why not."""
        try:
            write_whole(path, self.text.toPlainText().encode("utf-8"))
        except OSError as error:
            self.said.setText(sentence(failure_of(error).message, Reader()))
            return
        self.said.setText(self.tr("{path} was written.").format(path=path))

    def _copy(self) -> None:
        QGuiApplication.clipboard().setText(self.text.toPlainText())
        self.said.setText(self.tr("Copied."))
