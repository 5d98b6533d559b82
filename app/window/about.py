"""About: what this is, its cautions, its licence, and what it is built on."""

from __future__ import annotations

from PySide6.QtCore import Qt, qVersion
from PySide6.QtWidgets import QDialogButtonBox, QFrame, QLabel, QVBoxLayout, QWidget

from app.look.fitted import FittedDialog, RollArea, fit
from app.look.theme import Theme
from app.telling.cautions import cautions, intended_use
from storage.codes import LOINC_NOTICE


class AboutDialog(FittedDialog):
    """Shows the cautions again. Esc closes it."""

    def __init__(self, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(parent)
        self.setWindowTitle(self.tr("About and cautions"))
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        inside = QWidget()
        column = QVBoxLayout(inside)
        column.setSpacing(theme.px(10))
        column.setContentsMargins(theme.px(14), theme.px(10), theme.px(14), theme.px(10))
        title = QLabel(f"Luffmark {_version()}")
        title.setProperty("role", "title")
        column.addWidget(title)
        built = self.tr("Free software under the Mozilla Public License 2.0. Built on Qt {qt}.").format(qt=qVersion())
        for text in (intended_use(), *cautions(), built, LOINC_NOTICE):
            label = QLabel(text)
            label.setWordWrap(True)
            label.setTextFormat(Qt.TextFormat.PlainText)
            column.addWidget(label)
        column.addStretch(1)
        buttons = QDialogButtonBox(QDialogButtonBox.StandardButton.Close)
        buttons.rejected.connect(self.close)
        whole = QVBoxLayout(self)
        whole.setContentsMargins(theme.px(20), theme.px(20), theme.px(20), theme.px(16))
        self.roll = RollArea(inside)
        self.roll.setFocusPolicy(Qt.FocusPolicy.StrongFocus)  # nothing inside takes the keys that roll it
        self.roll.setAccessibleName(self.windowTitle())
        self.roll.setFrameShape(QFrame.Shape.StyledPanel)
        self.roll.setProperty("keys", True)
        whole.addWidget(self.roll, 1)
        whole.addWidget(buttons)
        fit(self, theme, 600, 500)


def _version() -> str:
    from importlib.metadata import PackageNotFoundError, version

    try:
        return version("luffmark")
    except PackageNotFoundError:
        return ""
