"""The window of an explanation: rules, inputs with their times, source and how sure; all of it can be copied."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QDialogButtonBox, QPushButton, QTextBrowser, QVBoxLayout, QWidget

from app.explain.explanation import Explanation
from app.explain.html import html_of
from app.look.fitted import FittedDialog, fit
from app.look.theme import Theme


class ExplainDialog(FittedDialog):
    """Shows one explanation. Esc closes it."""

    def __init__(self, explanation: Explanation, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.explanation = explanation
        self.setWindowTitle(self.tr("How this came about"))
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.text = QTextBrowser()
        self.text.setAccessibleName(self.tr("Explanation"))
        self.text.setHtml(html_of(explanation, theme))
        buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Close)
        self.copy = QPushButton(self.tr("&Copy"))
        buttons.addButton(self.copy, QDialogButtonBox.ButtonRole.ActionRole)
        self.copy.clicked.connect(self._copy)
        self.copy.setVisible(explanation.may_be_copied)
        if not explanation.may_be_copied:
            self.text.setTextInteractionFlags(Qt.TextInteractionFlag.NoTextInteraction)
        buttons.rejected.connect(self.close)
        column = QVBoxLayout(self)
        column.addWidget(self.text)
        column.addWidget(buttons)
        fit(self, theme, 640, 560)

    def _copy(self) -> None:
        QGuiApplication.clipboard().setText(self.explanation.as_text())
