"""The handover as it will come out of a printer. The same painter fills the preview and the paper."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtPrintSupport import QPrinter, QPrintPreviewDialog
from PySide6.QtWidgets import QWidget

from app.sheet.printing import paint, set_paper
from app.sheet.shapes import SheetContent


class HandoverPreview(QPrintPreviewDialog):
    """Shows every page; printer, copies and pages are chosen with its own buttons."""

    def __init__(self, content: SheetContent, parent: QWidget | None = None, paper: str = "A4") -> None:
        self._printer = QPrinter(QPrinter.PrinterMode.HighResolution)  # the dialog does not keep it alive
        set_paper(self._printer, paper)
        super().__init__(self._printer, parent)
        self._content = content
        self.pages = 0
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.setWindowTitle(f"{content.ward.title}, {content.ward.shift}")
        self.paintRequested.connect(self._paint)
        self.resize(1000, 760)

    def _paint(self, printer: QPrinter) -> None:
        self.pages = paint(self._content, printer, printer.resolution())
