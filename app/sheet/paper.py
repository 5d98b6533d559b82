"""The paper that everything is printed on, and a PDF of such pages."""

from __future__ import annotations

from collections.abc import Callable
from typing import Final

from PySide6.QtCore import QBuffer, QIODevice, QMarginsF
from PySide6.QtGui import QGuiApplication, QPagedPaintDevice, QPageLayout, QPageSize, QPdfWriter

from core.record.message import refuse

PAPERS: Final = {"A4": QPageSize.PageSizeId.A4, "Letter": QPageSize.PageSizeId.Letter}
DOTS_PER_INCH: Final = 1200


def set_paper(device: QPagedPaintDevice, paper: str) -> None:
    """Upright paper with our own margins.

    Raises:
        RecordError: `handover.paper`.
    """
    if paper not in PAPERS:
        raise refuse("handover.paper", paper=paper, accepted=" | ".join(PAPERS))
    device.setPageSize(QPageSize(PAPERS[paper]))
    device.setPageOrientation(QPageLayout.Orientation.Portrait)
    device.setPageMargins(QMarginsF(0, 0, 0, 0), QPageLayout.Unit.Point)


def pdf_of(title: str, paper: str, paint: Callable[[QPdfWriter], int]) -> tuple[bytes, int]:
    """The bytes of a PDF, and the number of its pages: `paint` draws them and counts them. Needs a QGuiApplication.

    Raises:
        RecordError: `handover.paper` for a paper that is not known.
    """
    if QGuiApplication.instance() is None:
        raise RuntimeError("a QGuiApplication must exist before fonts can be used")
    buffer = QBuffer()
    buffer.open(QIODevice.OpenModeFlag.WriteOnly)
    writer = QPdfWriter(buffer)
    writer.setResolution(DOTS_PER_INCH)
    writer.setTitle(title)
    writer.setCreator("Luffmark")
    set_paper(writer, paper)
    pages = paint(writer)
    buffer.close()
    return bytes(buffer.data().data()), pages
