"""The handover as it will come out of a printer. The same painter fills the preview and the paper."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtPrintSupport import QPrinter, QPrintPreviewDialog
from PySide6.QtWidgets import QToolBar, QToolButton, QWidget

from app.sheet.printing import paint, set_paper
from app.sheet.shapes import SheetContent
from core.record.message import Message, RecordError


class HandoverPreview(QPrintPreviewDialog):
    """Shows every page; printer, copies and pages are chosen with its own buttons."""

    failed = Signal(object)
    """A `Message`: nothing came onto paper, and why."""

    def __init__(self, content: SheetContent, parent: QWidget | None = None, paper: str = "A4") -> None:
        self._printer = QPrinter(QPrinter.PrinterMode.HighResolution)  # the dialog does not keep it alive
        set_paper(self._printer, paper)
        super().__init__(self._printer, parent)
        self._content = content
        self.pages = 0
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.setWindowTitle(f"{content.ward.title}, {content.ward.shift}")
        self.paintRequested.connect(self.print_on)
        self.resize(1180, 800)
        self._dress_bar()

    def _dress_bar(self) -> None:
        """Small buttons, so that the last ones are in sight: they set the page up and print, and say so in words."""
        for bar in self.findChildren(QToolBar):
            bar.setStyleSheet("QToolButton { padding: 3px; min-width: 0; }")
            for action in bar.actions()[-2:]:
                button = bar.widgetForAction(action)
                if isinstance(button, QToolButton):
                    button.setToolButtonStyle(Qt.ToolButtonStyle.ToolButtonTextBesideIcon)

    def print_on(self, printer: QPrinter) -> None:
        """Paint every page on a printer or into the preview; say so where the printer takes nothing."""
        try:
            self.pages = paint(self._content, printer, printer.resolution())
        except RecordError as error:
            self.pages = 0
            self.failed.emit(error.message)
            return
        if printer.printerState() in (QPrinter.PrinterState.Error, QPrinter.PrinterState.Aborted):
            self.failed.emit(Message("handover.printer", {"printer": printer.printerName() or "the printer"}))
