"""The handover on screen: the words of the printed sheet, to be read aloud; one key saves the sheet."""

from __future__ import annotations

from PySide6.QtCore import Qt, QUrl, Signal
from PySide6.QtGui import QKeyEvent
from PySide6.QtWidgets import QFrame, QHBoxLayout, QLabel, QPushButton, QTextBrowser, QVBoxLayout, QWidget

from app.handover.page_html import anchor_of, page_html
from app.look.theme import Theme
from app.sheet.shapes import SheetContent

_TURNS = {Qt.Key.Key_N.value: 1, Qt.Key.Key_P.value: -1}
"""Keys that turn to the next or previous episode while the page is read."""


class HandoverView(QWidget):
    """Shows a SheetContent."""

    save_wanted = Signal()
    back = Signal()

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self._theme = theme
        self._content: SheetContent | None = None
        px = theme.px
        self.title = QLabel(self.tr("Handover"))
        self.title.setProperty("role", "title")
        self.state = QLabel()
        self.state.setWordWrap(True)  # with large text; that what stands below is old must not be cut
        self.state.setProperty("role", "quiet")
        self.copy = QPushButton(self.tr("Copy text"))
        self.save = QPushButton(self.tr("Save as PDF...  Ctrl+P"))
        self.save.setAccessibleName(self.tr("Save the handover sheet as PDF"))
        for button in (self.copy, self.save):
            button.setProperty("role", "small")
        self.text = QTextBrowser()
        self.text.setFrameShape(QFrame.Shape.NoFrame)
        self.text.setAccessibleName(self.tr("Handover"))
        self.text.setOpenLinks(False)
        self.text.document().setDocumentMargin(px(20))
        head = QHBoxLayout()
        head.setSpacing(px(12))
        head.addWidget(self.title)
        head.addWidget(self.state, 1)
        head.addWidget(self.copy)
        head.addWidget(self.save)
        column = QVBoxLayout(self)
        column.setContentsMargins(px(16), px(4), px(16), px(4))
        column.setSpacing(px(6))
        column.addLayout(head)
        column.addWidget(self.text, 1)
        self.text.anchorClicked.connect(self._go)
        self.copy.clicked.connect(self._copy)
        self.save.clicked.connect(self.save_wanted)

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size."""
        self._theme = theme
        if self._content is not None:
            self._write(self._content)

    def show_content(self, content: SheetContent) -> None:
        """Show a handover, keeping the place that was read."""
        if self._content is None:
            self.text.verticalScrollBar().setValue(0)
        self._content = content
        self._fresh(self.tr("N and P turn to the next and previous episode; Tab and Enter follow a bed"), fresh=True)
        self._write(content)

    def _write(self, content: SheetContent) -> None:
        bar = self.text.verticalScrollBar()
        place = bar.value()
        self.text.setHtml(page_html(content, self._theme))
        bar.setValue(place)

    def wait(self, text: str) -> None:
        """Say that the handover is being gathered. What still stands below is the older one: it says so and
        cannot be copied."""
        old = self._content is not None
        told = self.tr("{text} What stands below is the older one.").format(text=text) if old else text
        self._fresh(told, fresh=False)

    def say(self, text: str) -> None:
        """Say why the handover cannot be gathered; an older one stays marked as old."""
        self._fresh(text, fresh=False)

    def _fresh(self, told: str, *, fresh: bool) -> None:
        self.state.setText(told)
        self.state.setProperty("role", "quiet" if fresh else "strong")
        self.state.style().polish(self.state)
        self.copy.setEnabled(fresh)

    def plain(self) -> str:
        """The page in plain words."""
        return self.text.toPlainText()

    def keyPressEvent(self, event: QKeyEvent) -> None:
        if event.key() == Qt.Key.Key_Escape:
            self.back.emit()
            return
        if event.key() in _TURNS and self._content is not None:
            self.turn(_TURNS[event.key()])
            return
        super().keyPressEvent(event)

    def turn(self, step: int) -> None:
        """To the next (1) or previous (-1) episode's heading, the ward's page before them all."""
        if self._content is None:
            return
        tops = [0.0, *(self._top_of(anchor_of(page.place)) for page in self._content.episodes)]
        here, slack = self.text.verticalScrollBar().value(), self._theme.px(4)
        later = [y for y in tops if y > here + slack] if step > 0 else [y for y in reversed(tops) if y < here - slack]
        if later:
            self.text.verticalScrollBar().setValue(int(later[0]))

    def _top_of(self, anchor: str) -> float:
        """Where an episode's heading stands in the page, in pixels from its top."""
        document = self.text.document()
        block = document.begin()
        while block.isValid():
            pieces = block.begin()
            while not pieces.atEnd():
                if anchor in pieces.fragment().charFormat().anchorNames():
                    return document.documentLayout().blockBoundingRect(block).top()
                pieces += 1
            block = block.next()
        return 0.0

    def _go(self, url: QUrl) -> None:
        self.text.scrollToAnchor(url.fragment())

    def _copy(self) -> None:
        """The plain text, in lines and letters that any other system takes."""
        from PySide6.QtGui import QGuiApplication

        from app.handover.plain import handover_text

        if self._content is not None:
            QGuiApplication.clipboard().setText(handover_text(self._content))
