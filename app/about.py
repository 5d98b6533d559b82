"""About: what this is, its cautions, its licence, and what it is built on."""

from __future__ import annotations

from PySide6.QtCore import Qt, qVersion
from PySide6.QtWidgets import QDialog, QDialogButtonBox, QLabel, QVBoxLayout, QWidget

from app.cautions import cautions, intended_use
from app.theme import Theme
from storage.codes import LOINC_NOTICE


class AboutDialog(QDialog):
    """Shows the cautions again. Esc closes it."""

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle(self.tr("About and cautions"))
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        column = QVBoxLayout(self)
        column.setContentsMargins(theme.px(24), theme.px(20), theme.px(24), theme.px(16))
        column.setSpacing(theme.px(10))
        title = QLabel(f"Luffmark {_version()}")
        title.setProperty("role", "title")
        column.addWidget(title)
        built = self.tr("Free software under the Mozilla Public License 2.0. Built on Qt {qt}.").format(qt=qVersion())
        for text in (intended_use(), *cautions(), built, LOINC_NOTICE):
            label = QLabel(text)
            label.setWordWrap(True)
            label.setTextFormat(Qt.TextFormat.PlainText)
            column.addWidget(label)
        buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Close)
        buttons.rejected.connect(self.close)
        column.addWidget(buttons)
        self.resize(theme.px(600), theme.px(480))


def _version() -> str:
    from importlib.metadata import PackageNotFoundError, version

    try:
        return version("luffmark")
    except PackageNotFoundError:
        return ""
