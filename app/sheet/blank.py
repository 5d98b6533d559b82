"""The handover as a paper form to fill in by hand, for when machines are down: it asks what the sheet says."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Final

from PySide6.QtGui import QPainter, QPdfWriter

from app.sheet.blocks import Block, Heading, RuledBox, Signatures, draw_all, height_of
from app.sheet.gas_table import HEADINGS as GAS_HEADINGS
from app.sheet.paper import DOTS_PER_INCH, pdf_of
from app.sheet.press import LINE, SMALL, SUBTITLE, TITLE, Align, Press, Style
from app.telling.caution_texts import CAUTION
from app.telling.language import in_language as tr

MARGIN: Final = 36.0
_HEAD, _FOOT = 40.0, 27.0
WARD_ROWS: Final = 11
"""Episodes that one ward page has room for."""
FACTS: Final = (
    "Bed", "Label, age, sex", "Why on support", "Support since", "Hours on the mask", "SpO2 target",
    "Ceiling of care", "Resuscitation", "Responsible", "Usual PaCO2", "Home support", "Interface, leak",
)  # fmt: skip
CARE: Final = ("Tolerance", "Secretions", "Skin", "Feeding", "Isolation", "Told whom, answer", "Plan: if - by - then",
               "Agreed with", "Breaks and night", "Jobs not done")  # fmt: skip


@dataclass(frozen=True, slots=True)
class WriteOn:
    """Names with a line behind each to write on, in columns."""

    names: Sequence[str]
    columns: int = 2
    row: float = 19.0
    name_width: float = 84.0

    def height(self, press: Press, width: float) -> float:  # noqa: ARG002
        return press.gap(self.row) * -(-len(self.names) // self.columns)

    def draw(self, press: Press, x: float, y: float, width: float) -> None:
        each = (width - press.gap(14) * (self.columns - 1)) / self.columns
        per = -(-len(self.names) // self.columns)
        for n, name in enumerate(self.names):
            left = x + (n // per) * (each + press.gap(14))
            base = y + (n % per + 1) * press.gap(self.row) - press.gap(3)
            press.text(left, base - press.gap(9), self.name_width, name, SMALL)
            press.line(left + self.name_width, base, left + each, base, 0.4, LINE)


@dataclass(frozen=True, slots=True)
class Grid:
    """An empty table: headings with their share of the width, and rows to write in."""

    heads: Sequence[tuple[str, float]]
    rows: int
    row: float = 19.0

    def height(self, press: Press, width: float) -> float:  # noqa: ARG002
        return press.gap(12) + press.gap(self.row) * self.rows

    def draw(self, press: Press, x: float, y: float, width: float) -> None:
        total = sum(share for _, share in self.heads)
        top, bottom = y + press.gap(11), y + press.gap(11) + press.gap(self.row) * self.rows
        left = x
        for name, share in self.heads:
            press.text(left + press.gap(2), y, width * share / total, name, SMALL)
            if left > x:
                press.line(left, top, left, bottom, 0.3, LINE)
            left += width * share / total
        for n in range(self.rows + 1):
            press.line(x, top + n * press.gap(self.row), x + width, top + n * press.gap(self.row), 0.4, LINE)


def ward_blocks() -> list[Block]:
    """The ward's page."""
    heads = (("Bed", 8), (tr("Who, ceiling, resuscitation"), 20), (tr("State: last pH, PaCO2, at"), 21),
             (tr("Support now, last response"), 25), (tr("Open flags"), 16), ("Due by", 10))  # fmt: skip
    return [
        WriteOn((tr("Shift from"), "to", tr("See first"), "because"), 2),
        Heading(tr("All episodes, in order of concern")), Grid(heads, WARD_ROWS, 40),
        Heading(tr("Due in the next 4 h")), Grid((("By", 6), ("Bed", 8), (tr("What"), 36)) * 2, 4),
    ]  # fmt: skip


def episode_blocks() -> list[Block]:
    """One episode's page."""
    shares = (8, 6, 8, 7, 9, 7, 8, 8, 7, 8, 14, 26)
    change = tr("Change: IPAP, EPAP, FiO2, rate, mode, interface")
    changes = ((tr("Time"), 8), (change, 46), (tr("What followed"), 46))
    observed = (tr("Time"), "RR", "HR", "SpO2", "BP", "GCS / ACVPU", tr("Temp"), tr("Leak"), "VTe")
    flags = ((tr("Since"), 8), (tr("What was met, with its values"), 56), (tr("Seen or settled by"), 36))
    return [
        WriteOn(tuple(tr(word) for word in FACTS), 2, 17),
        WriteOn((tr("What changed"),), 1, 17),
        Heading(tr("Settings now and changes this shift")), Grid(changes, 5, 17),
        Heading(tr("Gases")), Grid(tuple(zip(map(tr, GAS_HEADINGS), shares, strict=True)), 4, 17),
        Heading(tr("Observations")), Grid([(name, 1.0) for name in observed], 5, 17),
        Heading(tr("Flags and what was done")), Grid(flags, 3, 17),
        WriteOn((tr("Levers noted"),), 1, 17),
        Heading(tr("Due next")), Grid((("By", 10), (tr("What"), 40), ("By", 10), (tr("What"), 40)), 2, 17),
        Heading(tr("Plan and care")), WriteOn(tuple(tr(word) for word in CARE), 2, 17),
    ]  # fmt: skip


def blank_bytes(paper: str = "A4", episodes: int = 1) -> tuple[bytes, int]:
    """The form as the bytes of a PDF, and the number of its pages. Needs a QGuiApplication.

    Raises:
        RecordError: `handover.paper` for a paper that is not known.
    """
    return pdf_of(tr("Handover, paper form"), paper, lambda writer: _paint(writer, 1 + episodes))


def _paint(writer: QPdfWriter, pages: int) -> int:
    """The ward's page and one for each episode; how many."""
    size = writer.pageLayout().fullRectPoints()
    painter = QPainter(writer)
    press = Press(painter, DOTS_PER_INCH)
    for number in range(1, pages + 1):
        if number > 1:
            writer.newPage()
        _draw_page(press, number, pages, float(size.width()), float(size.height()))
    painter.end()
    return pages


def _draw_page(press: Press, number: int, pages: int, width: float, height: float) -> None:
    wide, is_ward = width - 2 * MARGIN, number == 1
    _draw_frame(press, tr("Handover") if is_ward else tr("Episode"), number, pages, width, height)
    top, bottom = MARGIN + _HEAD, height - MARGIN - _FOOT
    signed = Signatures("", "")
    blocks = ward_blocks() if is_ward else episode_blocks()
    fits = (s for s in (1.0, 0.95, 0.9, 0.85, 0.8) if _needs(blocks, press.at_scale(s), wide, signed) <= bottom - top)
    at = press.at_scale(next(fits, 0.78))
    y = draw_all(blocks, at, MARGIN, top, wide)
    foot = bottom - signed.height(at, wide)
    RuledBox("", "").draw_high(at, MARGIN, y + 5, wide, max(foot - y - 5, at.gap(20)))
    signed.draw(at, MARGIN, foot, wide)


def _needs(blocks: Sequence[Block], press: Press, width: float, signed: Signatures) -> float:
    return height_of(blocks, press, width) + signed.height(press, width) + press.gap(46)


def _draw_frame(press: Press, title: str, number: int, pages: int, width: float, height: float) -> None:
    wide = width - 2 * MARGIN
    press.text(MARGIN, MARGIN - 8, wide * 0.6, title, TITLE)
    press.text(MARGIN, MARGIN - 3, wide, tr("Paper form, filled in by hand"), Style(9.5, True), Align.RIGHT)
    whose = tr("Ward and date here.") if number == 1 else tr("Patient label here, or bed, name and number.")
    told = tr("{whose} Record it in the log as soon as machines are back.").format(whose=whose)
    press.text(MARGIN, MARGIN + 15, wide, told, SUBTITLE)
    press.line(MARGIN, MARGIN + 31, MARGIN + wide, MARGIN + 31, 1.4)
    top = height - MARGIN - _FOOT + 8
    press.line(MARGIN, top, MARGIN + wide, top, 0.5)
    foot = Style(7.2)
    press.text(MARGIN, top + 2.5, wide, CAUTION, foot)
    under = top + 2.5 + press.height(CAUTION, foot, wide) + 1
    press.text(MARGIN, under, wide * 0.8, tr("Blank form: nothing on it is from the record."), foot)
    told = tr("Page {number} of {pages}").format(number=number, pages=pages)
    press.text(MARGIN, under, wide, told, Style(7.5, True), Align.RIGHT)
