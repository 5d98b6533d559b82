"""The handover as it will come out of a printer. The same painter fills the preview and the paper."""

from __future__ import annotations

from PySide6.QtCore import Qt, Signal
from PySide6.QtGui import QColor, QPageLayout
from PySide6.QtPrintSupport import QPrintDialog, QPrinter, QPrintPreviewWidget
from PySide6.QtWidgets import QDialog, QGraphicsView, QPushButton, QVBoxLayout, QWidget

from app.look.fitted import FittedDialog, fit
from app.look.flow_row import FlowRow
from app.look.plain_label import plain_label
from app.look.theme import Theme
from app.sheet.paper import set_paper
from app.sheet.printing import paint
from app.sheet.shapes import SheetContent
from core.record.message import Message, RecordError


class HandoverPreview(FittedDialog):
    """Shows every page, upright as all of them are; printer, copies and pages are chosen in the system's own dialog.

    `accepted` once it was printed.
    """

    failed = Signal(object)
    """A `Message`: nothing came onto paper, and why."""

    def __init__(self, content: SheetContent, theme: Theme, parent: QWidget | None = None, paper: str = "A4") -> None:
        super().__init__(parent)
        self._content, self._theme = content, theme
        self._printer = QPrinter(QPrinter.PrinterMode.HighResolution)  # the preview does not keep it alive
        set_paper(self._printer, paper)
        self.pages = 0
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self.setWindowTitle(f"{content.ward.title}, {content.ward.shift}")
        self.view = QPrintPreviewWidget(self._printer)
        self.view.setAccessibleName(self.tr("Pages of the handover"))
        self.place = plain_label()
        self._lay_out()
        self.view.paintRequested.connect(self.print_on)
        self.view.previewChanged.connect(self._tell)
        self.view.fitToWidth()
        fit(self, theme, 940, 980)

    def _lay_out(self) -> None:
        px = self._theme.px
        self.before = self._button(self.tr("Page before"), self.tr("Show the page before"), self._page_before)
        self.after = self._button(self.tr("Next page"), self.tr("Show the next page"), self._page_after)
        self.whole = self._button(self.tr("Whole page"), self.tr("Show a page whole"), self.view.fitInView)
        self.wide = self._button(self.tr("Page width"), self.tr("Show a page as wide as there is room"),
                                 self.view.fitToWidth)  # fmt: skip
        self.print_button = self._button(self.tr("Print..."), self.tr("Choose a printer and print"), self.print_out)
        self.print_button.setProperty("role", "primary")
        leave = self._button(self.tr("Leave"), self.tr("Leave without printing"), self.reject)
        self.before.setShortcut(Qt.Key.Key_PageUp)
        self.after.setShortcut(Qt.Key.Key_PageDown)
        self.place.setMinimumHeight(self.wide.sizeHint().height())
        bar = FlowRow(spacing=px(8))
        for widget in (self.before, self.after, self.place, self.whole, self.wide):
            bar.addWidget(widget)
        bar.add_right(self.print_button)
        bar.add_right(leave)
        column = QVBoxLayout(self)
        column.setContentsMargins(px(16), px(12), px(16), px(16))
        column.setSpacing(px(10))
        column.addLayout(bar)
        column.addWidget(self.view, 1)
        for sheet in self.view.findChildren(QGraphicsView):
            sheet.setAccessibleName(self.view.accessibleName())
            sheet.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
            sheet.setBackgroundBrush(QColor(self._theme.colours.sunken))
            sheet.setStyleSheet(
                f"QGraphicsView {{ border: 2px solid {self._theme.colours.line}; }}"
                f"QGraphicsView:focus {{ border-color: {self._theme.colours.accent}; }}"
            )

    def _button(self, text: str, told: str, press: object) -> QPushButton:
        button = QPushButton(text)
        button.setToolTip(told)
        button.setAutoDefault(False)
        button.clicked.connect(press)
        return button

    def _page_before(self) -> None:
        self.view.setCurrentPage(max(self.view.currentPage() - 1, 1))
        self._tell()

    def _page_after(self) -> None:
        self.view.setCurrentPage(min(self.view.currentPage() + 1, self.view.pageCount()))
        self._tell()

    def _tell(self) -> None:
        """Which page is in sight; the ends of the sheet take no further press."""
        page, pages = self.view.currentPage(), self.view.pageCount()
        self.place.setText(self.tr("Page {page} of {pages}").format(page=page, pages=pages))
        self.before.setEnabled(page > 1)
        self.after.setEnabled(page < pages)

    def print_out(self) -> None:
        """Ask for a printer and print on it."""
        asked = QPrintDialog(self._printer, self)
        if asked.exec() == QDialog.DialogCode.Accepted:
            self._printer.setPageOrientation(QPageLayout.Orientation.Portrait)  # whatever was chosen there
            self.print_on(self._printer)
            if self.pages:
                self.accept()

    def print_on(self, printer: QPrinter) -> None:
        """Paint every page on a printer or into the preview; say so where the printer takes nothing."""
        try:
            self.pages = paint(self._content, printer, printer.resolution())
        except RecordError as error:
            self.pages = 0
            self.failed.emit(error.message)
            return
        if printer.printerState() in (QPrinter.PrinterState.Error, QPrinter.PrinterState.Aborted):
            self.pages = 0
            self.failed.emit(Message("handover.printer", {"printer": printer.printerName() or "the printer"}))
