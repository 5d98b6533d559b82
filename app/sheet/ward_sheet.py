"""The ward's page: every episode in order of concern, whom to see first, flags one line each, what is due."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from app.sheet.blocks import Block, Heading, Signatures, Text, draw_all, draw_tier, height_of
from app.sheet.content import WardPage, WardRow
from app.sheet.press import BODY, GREY, INK, LINE, PALE, SMALL, STRONG, Press, Style

SCALES = (1.08, 1.04, 1.0, 0.96, 0.92, 0.88, 0.84, 0.8, 0.77)
LABEL = Style(11.5, True)
_LEFT = 118.0
_TIER = 50.0


@dataclass(frozen=True, slots=True)
class RowBlock:
    """One episode: bed and person at the left; state, support, response, flags and due at the right."""

    row: WardRow

    def _lines(self) -> list[tuple[str, str, Style]]:
        r = self.row
        state = r.state + (f". {r.change_of_state[0].upper()}{r.change_of_state[1:]}" if r.change_of_state else "")
        lines = [("", state, STRONG), ("", r.support, BODY), ("", r.response, BODY)]
        lines += [(f.partition(" ")[0].lower(), f.partition(" ")[2], STRONG) for f in r.flags]
        if r.due:
            lines.append(("due", f"Due: {r.due}", BODY))
        return lines

    def height(self, press: Press, width: float) -> float:
        left = press.gap(_LEFT)
        right = sum(self._line_height(press, x, width - left) for x in self._lines())
        return max(right, self._left_height(press)) + press.gap(5)

    def _line_height(self, press: Press, line: tuple[str, str, Style], width: float) -> float:
        tier = press.gap(_TIER + 4) if line[0] not in ("", "due") else 0.0
        return press.height(line[1], line[2], width - tier) + press.gap(1)

    def _left_height(self, press: Press) -> float:
        wide = press.gap(_LEFT - 10)
        return (
            press.height(self._title(), LABEL, wide)
            + press.height(self.row.who, SMALL, wide)
            + press.height(self.row.limits, SMALL, wide)
        )

    def _title(self) -> str:
        return f"{self.row.number}  {self.row.label}"

    def draw(self, press: Press, x: float, y: float, width: float) -> None:
        high = self.height(press, width)
        if self.row.tier in ("escalate", "concern"):
            press.box(x - 6, y, 2.6, high - press.gap(3), fill=INK if self.row.tier == "escalate" else "#9a9a9a")
        wide, top = press.gap(_LEFT - 10), y
        ink = GREY if self.row.ended else INK
        top += press.text(x, top, wide, self._title(), Style(LABEL.size, True, ink))
        top += press.text(x, top, wide, self.row.who, SMALL)
        press.text(x, top, wide, self.row.limits, SMALL)
        left, top = x + press.gap(_LEFT), y + press.gap(1)
        for tier, words, style in self._lines():
            shift = 0.0
            if tier not in ("", "due"):
                draw_tier(press, left, top - press.gap(1), press.gap(_TIER), tier)
                shift = press.gap(_TIER + 4)
            press.text(left + shift, top, width - (left - x) - shift, words, style)
            top += self._line_height(press, (tier, words, style), width - (left - x))
        press.line(x, y + high - press.gap(2.2), x + width, y + high - press.gap(2.2), 0.3, LINE)


@dataclass(frozen=True, slots=True)
class SeeFirst:
    """Whom to see first and why, in a box that is found at once."""

    words: str

    def height(self, press: Press, width: float) -> float:
        return press.height(self.words, Style(11, True), width - press.gap(90)) + press.gap(17)

    def draw(self, press: Press, x: float, y: float, width: float) -> None:
        high = self.height(press, width) - press.gap(6)
        press.box(x, y, width, high, fill=PALE, weight=1.2)
        press.text(x + press.gap(8), y + press.gap(5.5), press.gap(80), "See first", Style(11))
        press.text(x + press.gap(74), y + press.gap(5.5), width - press.gap(84), self.words, Style(11, True))


@dataclass(frozen=True, slots=True)
class DueList:
    """Due items in order of time, in two columns."""

    items: Sequence[str]

    def height(self, press: Press, width: float) -> float:
        return max(sum(self._high(press, i, width) for i in part) for part in self._columns()) if self.items else 0.0

    def _columns(self) -> list[Sequence[str]]:
        half = -(-len(self.items) // 2)
        return [self.items[:half], self.items[half:]]

    def _high(self, press: Press, item: str, width: float) -> float:
        return press.height(item, BODY, (width - press.gap(14)) / 2) + press.gap(1)

    def draw(self, press: Press, x: float, y: float, width: float) -> None:
        each = (width - press.gap(14)) / 2
        for n, part in enumerate(self._columns()):
            top = y
            for item in part:
                top += press.text(x + n * (each + press.gap(14)), top, each, item, BODY) + press.gap(1)


def ward_blocks(page: WardPage) -> list[Block]:
    """The page's blocks from top to bottom, without signatures."""
    blocks: list[Block] = [SeeFirst(page.see_first)]
    blocks.append(Heading("All episodes, in order of concern", f"{len(page.rows)} in this shift"))
    blocks += [RowBlock(r) for r in page.rows] or [Text("No episode stood in this shift.")]
    blocks.append(Heading("Due in the next 4 h, and overdue", "in order of time"))
    blocks.append(DueList(page.due) if page.due else Text("Nothing is due."))
    if page.missing:
        blocks.append(Heading("Missing from the record"))
        blocks += [Text(m, SMALL) for m in page.missing]
    return blocks


def split_ward(
    page: WardPage, press: Press, width: float, high: float, signed: Signatures
) -> list[tuple[float, list[Block]]]:
    """The ward's blocks as pages: one where any scale lets it fit, else as many as the smallest needs."""
    blocks = ward_blocks(page)
    for scale in SCALES:
        at = press.at_scale(scale)
        if height_of(blocks, at, width) + signed.height(at, width) <= high:
            return [(scale, blocks)]
    at = press.at_scale(SCALES[-1])
    pages: list[tuple[float, list[Block]]] = []
    current: list[Block] = []
    room = high - signed.height(at, width)
    for block in blocks:
        if current and height_of([*current, block], at, width) > room:
            pages.append((at.scale, current))
            current = []
        current.append(block)
    return [*pages, (at.scale, current)]


def draw_ward(part: tuple[float, list[Block]], press: Press, x: float, y: float, width: float, bottom: float,
              signed: Signatures | None) -> None:  # fmt: skip
    """Draw one of the ward's pages; the last carries the signatures."""
    at = press.at_scale(part[0])
    draw_all(part[1], at, x, y, width)
    if signed is not None:
        signed.draw(at, x, bottom - signed.height(at, width), width)
