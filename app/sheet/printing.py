"""Prints a handover: to a PDF, to a printer, or into a preview. All three paint the same pages."""

from __future__ import annotations

from pathlib import Path
from typing import Final

from PySide6.QtGui import QColor, QPagedPaintDevice, QPainter

from app.keeping.whole_file import write_whole
from app.operations.outcome import report
from app.sheet.blocks import Signatures
from app.sheet.pages import Fitted, Room, draw_episode, draw_overflow, fit_episode
from app.sheet.paper import DOTS_PER_INCH, pdf_of
from app.sheet.press import SMALL, SUBTITLE, TITLE, Align, Press, Style
from app.sheet.shapes import EpisodePage, SheetContent
from app.sheet.ward_sheet import draw_ward, split_ward
from app.telling.language import in_language as tr
from core.record.message import refuse

_MARGIN: Final = 28.0
_HEAD, _FOOT = 36.0, 27.0
_SUBTITLE = 15.0
"""The height of the line under a title, which the ward's page does without."""


def write_pdf(content: SheetContent, path: Path, paper: str = "A4") -> int:
    """Write the handover as a PDF; the number of its pages. Whole or not at all.

    Raises:
        OSError: the file cannot be written; nothing is left behind.
        RecordError: `handover.paper` for a paper that is not known.
    """
    data, pages = pdf_bytes(content, paper)
    write_whole(path, data)
    return pages


def pdf_bytes(content: SheetContent, paper: str = "A4") -> tuple[bytes, int]:
    """The handover as the bytes of a PDF, and the number of its pages. Needs a QGuiApplication.

    Raises:
        RecordError: `handover.paper` for a paper that is not known.
    """
    title = f"{content.ward.title}, {content.ward.shift}"
    return pdf_of(title, paper, lambda writer: paint(content, writer, DOTS_PER_INCH))


def paint(content: SheetContent, device: QPagedPaintDevice, dots_per_inch: int) -> int:
    """Paint every page on a device that is set up; the number of pages. Reports progress by page.

    Raises:
        RecordError: `handover.printer`, where the device takes nothing: it is off, or not there.
    """
    size = device.pageLayout().fullRectPoints()
    painter = QPainter()
    if not painter.begin(device):
        name = device.printerName() if hasattr(device, "printerName") else ""
        raise refuse("handover.printer", printer=name or "the printer")
    try:
        return _Job(content, device, Press(painter, dots_per_inch), float(size.width()), float(size.height())).run()
    finally:
        painter.end()


class _Job:
    """One handover on one device."""

    def __init__(
        self, content: SheetContent, device: QPagedPaintDevice, press: Press, width: float, height: float
    ) -> None:
        self._content, self._device, self._press = content, device, press
        self._page_width, self._page_height = width, height
        self._signed = Signatures(content.given_by, content.taken_by, content.signed_at)
        self._left, self._width = _MARGIN, width - 2 * _MARGIN
        self._top, self._bottom = _MARGIN + _HEAD, height - _MARGIN - _FOOT
        self._ward_top = self._top - _SUBTITLE
        self._number = 0
        ward = split_ward(content.ward, press, self._width, self._bottom - self._ward_top, self._signed)
        self._ward = ward
        self._room = Room(self._width, self._bottom - self._top, content.gas_unit, self._signed)
        self._fitted = [fit_episode(page, press, self._room) for page in content.episodes]
        self._pages = len(ward) + sum(1 + len(f.overflow) for f in self._fitted)

    def run(self) -> int:
        c, w = self._content, self._content.ward
        for n, part in enumerate(self._ward):
            self._begin(w.title if n == 0 else tr("{title}, continued").format(title=w.title), "", w.shift)
            signed = self._signed if n + 1 == len(self._ward) else None
            draw_ward(part, self._press, self._left, self._ward_top, self._width, self._bottom, signed)
        for page, fitted in zip(c.episodes, self._fitted, strict=True):
            self._episode(page, fitted)
        return self._pages

    def _episode(self, page: EpisodePage, fitted: Fitted) -> None:
        self._begin(page.label, page.subtitle, page.standing)
        draw_episode(fitted, self._press, self._left, self._top, self._bottom, self._room)
        for blocks in fitted.overflow:
            self._begin(tr("{label}, continued").format(label=page.label), page.subtitle, page.standing)
            draw_overflow(fitted, blocks, self._press, self._left, self._top, self._width)

    def _begin(self, title: str, subtitle: str, standing: str) -> None:
        """A new page with its head and foot."""
        report(self._number, self._pages)
        if self._number:
            self._device.newPage()
        self._number += 1
        self._press.painter.setPen(QColor("white"))  # a preview records changes alone: black must be one, or the
        self._draw_head(title, subtitle, standing)  # dark look's own ink, which is nearly white, stands in for it
        self._draw_foot()

    def _draw_head(self, title: str, subtitle: str, standing: str) -> None:
        p, left, wide = self._press, self._left, self._width
        p.text(left, _MARGIN - 8, wide * 0.5, _on_one_line(p, title, TITLE, wide * 0.5), TITLE)
        taken = min(p.width(title, TITLE), wide * 0.5) + 12
        style = next((x for x in (Style(10.5, True), Style(9.5, True)) if p.width(standing, x) <= wide - taken),
                     Style(8.5, True))  # fmt: skip
        p.text(left + taken, _MARGIN - 3, wide - taken, _on_one_line(p, standing, style, wide - taken), style,
               Align.RIGHT)  # fmt: skip
        rule = _MARGIN + 31 - (0 if subtitle else _SUBTITLE)
        p.line(left, rule, left + wide, rule, 1.4)
        if subtitle:
            line = f"{subtitle}. {self._content.ward.shift}"
            size = next((s for s in (SUBTITLE, Style(8.5)) if p.width(line, s) <= wide), SMALL)
            p.text(left, _MARGIN + 15, wide, _on_one_line(p, line, size, wide), size)

    def _draw_foot(self) -> None:
        p, c, top = self._press, self._content, self._page_height - _MARGIN - _FOOT + 8
        p.line(self._left, top, self._left + self._width, top, 0.5)
        foot = Style(7.2)
        p.text(self._left, top + 2.5, self._width, c.caution, foot)
        under = top + 2.5 + p.height(c.caution, foot, self._width) + 1
        p.text(self._left, under, self._width * 0.8, f"{c.printed}. {c.head}.", foot)
        told = tr("Page {number} of {pages}").format(number=self._number, pages=self._pages)
        p.text(self._left, under, self._width, told, Style(7.5, True), Align.RIGHT)


def _on_one_line(press: Press, text: str, style: Style, width: float) -> str:
    """The text, shortened with dots where it does not fit one line: a head must not run over the page."""
    if press.width(text, style) <= width:
        return text
    while text and press.width(f"{text}...", style) > width:
        text = text[:-1]
    return f"{text.rstrip()}..."
