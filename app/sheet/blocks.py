"""The blocks a page is made of. Each can be measured and drawn, at any width and scale."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from typing import Protocol

from app.sheet.press import (
    BODY,
    GREY,
    HEADING,
    INK,
    LINE,
    PALE,
    SMALL,
    STRONG,
    Align,
    Press,
    Style,
)
from app.telling.language import in_language as tr


class Block(Protocol):
    """Something that stands on a page."""

    def height(self, press: Press, width: float) -> float:
        """How high it is in a width, in points."""

    def draw(self, press: Press, x: float, y: float, width: float) -> None:
        """Draw it with its upper left corner at (x, y)."""


@dataclass(frozen=True, slots=True)
class Text:
    """A paragraph, indented by `indent` points."""

    words: str
    style: Style = BODY
    indent: float = 0.0
    after: float = 1.5

    def height(self, press: Press, width: float) -> float:
        return press.height(self.words, self.style, width - self.indent) + press.gap(self.after)

    def draw(self, press: Press, x: float, y: float, width: float) -> None:
        press.text(x + self.indent, y, width - self.indent, self.words, self.style)


@dataclass(frozen=True, slots=True)
class Heading:
    """A section's heading over a thin line, with a quiet remark at its right."""

    words: str
    remark: str = ""

    def height(self, press: Press, width: float) -> float:
        return press.gap(5) + press.height(self.words, HEADING, width) + press.gap(2.5)

    def draw(self, press: Press, x: float, y: float, width: float) -> None:
        top = y + press.gap(5)
        high = press.text(x, top, width, self.words, HEADING)
        if self.remark:
            press.text(x, top + press.gap(0.8), width, self.remark, SMALL, Align.RIGHT)
        press.line(x, top + high + press.gap(0.5), x + width, top + high + press.gap(0.5), 0.7)


@dataclass(frozen=True, slots=True)
class Facts:
    """Names and values in columns, read down each column."""

    facts: Sequence[tuple[str, str]]
    columns: int = 2
    name_width: float = 80.0
    value_style: Style = BODY

    def _split(self) -> list[Sequence[tuple[str, str]]]:
        per = -(-len(self.facts) // self.columns)
        return [self.facts[i : i + per] for i in range(0, len(self.facts), per)]

    def height(self, press: Press, width: float) -> float:
        each = self._width(press, width)
        return max((sum(self._row(press, f, each) for f in part) for part in self._split()), default=0.0)

    def _width(self, press: Press, width: float) -> float:
        return (width - press.gap(14) * (self.columns - 1)) / self.columns

    def _row(self, press: Press, fact: tuple[str, str], width: float) -> float:
        name = press.gap(self.name_width)
        return max(
            press.height(fact[1], self.value_style, width - name), press.height(fact[0], SMALL, name)
        ) + press.gap(1.5)

    def draw(self, press: Press, x: float, y: float, width: float) -> None:
        each, name = self._width(press, width), press.gap(self.name_width)
        for n, part in enumerate(self._split()):
            left, top = x + n * (each + press.gap(14)), y
            for fact in part:
                press.text(left, top + press.gap(0.9), name, fact[0], SMALL)
                press.text(left + name, top, each - name, fact[1], self.value_style)
                top += self._row(press, fact, each)


@dataclass(frozen=True, slots=True)
class Column:
    """A table's column: heading, share of the width, and where its texts stand."""

    heading: str
    share: float
    align: Align = Align.LEFT
    style: Style = BODY


@dataclass(frozen=True, slots=True)
class Table:
    """Rows under headings. `quiet` names rows set in grey, `strong` cells (row, column) in bold."""

    columns: Sequence[Column]
    rows: Sequence[Sequence[str]]
    quiet: frozenset[int] = frozenset()
    strong: frozenset[tuple[int, int]] = frozenset()
    pad: float = 5.0

    def _widths(self, press: Press, width: float) -> list[float]:
        pads = press.gap(self.pad) * (len(self.columns) - 1)
        total = sum(c.share for c in self.columns)
        return [(width - pads) * c.share / total for c in self.columns]

    def _cells(self, row: int) -> list[tuple[str, Style, Align]]:
        out = []
        for n, (text, column) in enumerate(zip(self.rows[row], self.columns, strict=True)):
            bold = column.style.bold or (row, n) in self.strong
            style = Style(column.style.size, bold, GREY if row in self.quiet else column.style.ink)
            out.append((text, style, column.align))
        return out

    def _row_height(self, press: Press, row: int, widths: list[float]) -> float:
        cells = self._cells(row)
        return max(press.height(t, s, w, a) for (t, s, a), w in zip(cells, widths, strict=True)) + press.gap(2.5)

    def _head_height(self, press: Press, widths: list[float]) -> float:
        heads = zip(self.columns, widths, strict=True)
        return max(press.height(c.heading, SMALL, w, c.align) for c, w in heads) + press.gap(2)

    def height(self, press: Press, width: float) -> float:
        widths = self._widths(press, width)
        rows = sum(self._row_height(press, n, widths) for n in range(len(self.rows)))
        return self._head_height(press, widths) + rows

    def draw(self, press: Press, x: float, y: float, width: float) -> None:
        widths = self._widths(press, width)
        lefts = [x + sum(widths[:n]) + n * press.gap(self.pad) for n in range(len(widths))]
        for column, left, wide in zip(self.columns, lefts, widths, strict=True):
            press.text(left, y, wide, column.heading, SMALL, column.align)
        y += self._head_height(press, widths)
        for n in range(len(self.rows)):
            press.line(x, y - press.gap(0.6), x + width, y - press.gap(0.6), 0.3, LINE)
            for (text, style, align), left, wide in zip(self._cells(n), lefts, widths, strict=True):
                press.text(left, y, wide, text, style, align)
            y += self._row_height(press, n, widths)


@dataclass(frozen=True, slots=True)
class Flag:
    """A flag in one row: its tier as a word in a box (filled, framed or plain, so that it reads without colour), what
    is met since when, and beside it the evidence."""

    tier: str
    head: str
    evidence: str
    style: Style = STRONG
    box_width: float = 50.0
    head_share: float = 0.4

    def _widths(self, press: Press, width: float) -> tuple[float, float, float]:
        box = press.gap(self.box_width)
        left = width - box - press.gap(12)
        head = left * self.head_share if self.evidence else left
        return box, head, left - head

    def height(self, press: Press, width: float) -> float:
        """The higher of both columns."""
        _, head, evidence = self._widths(press, width)
        beside = press.height(self.evidence, SMALL, evidence) if self.evidence else 0.0
        return max(press.height(self.head, self.style, head), beside) + press.gap(2.5)

    def draw(self, press: Press, x: float, y: float, width: float) -> None:
        """The box, the head, the evidence."""
        box, head, evidence = self._widths(press, width)
        draw_tier(press, x, y - press.gap(0.5), box, self.tier)
        press.text(x + box + press.gap(5), y, head, self.head, self.style)
        if self.evidence:
            press.text(x + box + press.gap(12) + head, y + press.gap(0.5), evidence, self.evidence, SMALL)


@dataclass(frozen=True, slots=True)
class SideBySide:
    """Two columns of blocks."""

    left: tuple[Block, ...]
    right: tuple[Block, ...]
    between: float = 16.0

    def height(self, press: Press, width: float) -> float:
        """The higher of both columns."""
        each = self._width(press, width)
        return max(height_of(self.left, press, each), height_of(self.right, press, each))

    def _width(self, press: Press, width: float) -> float:
        return (width - press.gap(self.between)) / 2

    def draw(self, press: Press, x: float, y: float, width: float) -> None:
        """Each column from the same top."""
        each = self._width(press, width)
        draw_all(self.left, press, x, y, each)
        draw_all(self.right, press, x + each + press.gap(self.between), y, each)


def draw_tier(press: Press, x: float, y: float, width: float, tier: str) -> None:
    """The tier's word in its box; the box's look alone tells the tiers apart too."""
    style = Style(7.0, True, "#ffffff" if tier == "escalate" else INK)
    high = press.height("X", style, width) + press.gap(1.6)
    if tier == "escalate":
        press.box(x, y + press.gap(0.6), width, high, fill=INK, round_by=press.gap(1.5))
    elif tier == "concern":
        press.box(x, y + press.gap(0.6), width, high, fill=PALE, weight=1.1, round_by=press.gap(1.5))
    else:
        press.box(x, y + press.gap(0.6), width, high, weight=0.4, ink=LINE, round_by=press.gap(1.5))
    press.text(x, y + press.gap(1.4), width, tr(tier).upper(), style, Align.CENTRE)


@dataclass(frozen=True, slots=True)
class Signatures:
    """Lines to sign: given by, taken by, each with its time; what is known is printed on its line."""

    given_by: str
    taken_by: str
    at: str = ""
    """When it was given and taken; "" leaves the line to write it."""

    def height(self, press: Press, width: float) -> float:  # noqa: ARG002
        """Room to write."""
        return press.gap(23)

    def draw(self, press: Press, x: float, y: float, width: float) -> None:
        """Two lines for each."""
        half, base = (width - press.gap(16)) / 2, y + press.gap(19)
        for left, label, name in ((x, tr("Given by"), self.given_by),
                                  (x + half + press.gap(16), tr("Taken by"), self.taken_by)):  # fmt: skip
            split, end = left + half * 0.6, left + half
            self._line(press, left, base, split - press.gap(6), label, name)
            self._line(press, split, base, end, tr("Time"), self.at if name else "")

    @staticmethod
    def _line(press: Press, left: float, base: float, right: float, label: str, words: str) -> None:
        named = left + press.width(label, SMALL) + press.gap(4)
        press.text(left, base - press.gap(9), named - left + 2, label, SMALL)
        press.line(named, base, right, base, 0.5)
        press.text(named, base - press.gap(9.5), right - named, words, BODY)


@dataclass(frozen=True, slots=True)
class RuledBox:
    """Room to write by hand, ruled, after what was typed already. It takes the height it is given."""

    words: str
    empty: str = "not recorded; room to write by hand"
    """What stands beside its name where nothing was typed."""
    least: float = 40.0
    rule: float = 15.0

    def height(self, press: Press, width: float) -> float:
        typed = press.height(self.words, BODY, width - press.gap(10)) if self.words else 0.0
        return max(press.gap(self.least), typed + press.gap(self.rule + 8) + self._name_height(press, width))

    @staticmethod
    def _name_height(press: Press, width: float) -> float:
        return press.height(tr("Handover remark"), HEADING, width)

    def draw(self, press: Press, x: float, y: float, width: float) -> None:
        self.draw_high(press, x, y, width, self.height(press, width))

    def draw_high(self, press: Press, x: float, y: float, width: float, high: float) -> None:
        """Draw it with a height of its own."""
        press.box(x, y, width, high, weight=0.5, ink=LINE)
        press.text(x + press.gap(5), y + press.gap(2), width, tr("Handover remark"), HEADING)
        if not self.words:
            press.text(x, y + press.gap(2.5), width - press.gap(5), self.empty, SMALL, Align.RIGHT)
        top = y + press.gap(2) + self._name_height(press, width)
        if self.words:
            top += press.text(x + press.gap(5), top, width - press.gap(10), self.words, BODY)
        line = top + press.gap(self.rule)
        while line < y + high - press.gap(3):
            press.line(x + press.gap(5), line, x + width - press.gap(5), line, 0.3, "#bbbbbb")
            line += press.gap(self.rule)


def height_of(blocks: Sequence[Block], press: Press, width: float) -> float:
    """How high blocks are, one under the other."""
    return sum(b.height(press, width) for b in blocks)


def draw_all(blocks: Sequence[Block], press: Press, x: float, y: float, width: float) -> float:
    """Draw blocks one under the other; the y below the last."""
    for block in blocks:
        block.draw(press, x, y, width)
        y += block.height(press, width)
    return y
