"""The window of an explanation: rules, inputs with their times, source and how sure; all of it can be copied."""

from __future__ import annotations

from html import escape

from PySide6.QtCore import Qt
from PySide6.QtGui import QGuiApplication
from PySide6.QtWidgets import QDialog, QDialogButtonBox, QPushButton, QTextBrowser, QVBoxLayout, QWidget

from app.explain import Explanation, sure_words, translate
from app.theme import Theme


class ExplainDialog(QDialog):
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
        self.copy = QPushButton(self.tr("Copy"))
        buttons.addButton(self.copy, QDialogButtonBox.ButtonRole.ActionRole)
        self.copy.clicked.connect(self._copy)
        buttons.rejected.connect(self.close)
        column = QVBoxLayout(self)
        column.addWidget(self.text)
        column.addWidget(buttons)
        self.resize(theme.px(620), theme.px(480))

    def _copy(self) -> None:
        QGuiApplication.clipboard().setText(self.explanation.as_text())


def html_of(explanation: Explanation, theme: Theme) -> str:
    """The explanation as rich text in the theme's sizes; everything typed by people is escaped."""
    quiet = theme.colours.ink_quiet
    parts = [
        f'<p style="font-size:{theme.px(theme.type.title)}px; font-weight:600">{escape(explanation.title)}</p>'
    ]
    parts += [f"<p>{escape(rule)}</p>" for rule in explanation.rules]
    if explanation.inputs:
        rows = "".join(
            f'<tr><td style="color:{quiet}; padding-right:16px">{escape(name)}</td>'
            f'<td style="padding-right:16px">{escape(value)}</td><td style="color:{quiet}">{escape(when)}</td></tr>'
            for name, value, when in explanation.inputs
        )
        parts.append(f"<table cellpadding=3>{rows}</table>")
    parts += [f"<p>{escape(note)}</p>" for note in explanation.notes]
    tail = (
        [translate("explain", "Source: {source}").format(source=explanation.source)]
        if explanation.source
        else []
    )
    if explanation.sure:
        tail.append(translate("explain", "How sure: {sure}").format(sure=sure_words(explanation.sure)))
    parts += [f'<p style="color:{quiet}">{escape(line)}</p>' for line in tail]
    return "".join(parts)
