"""The ward's page: every episode in order of concern, whom to see first, flags one line each, what is due."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

from app.sheet.blocks import Block, Heading, Signatures, Text, draw_all, draw_tier, height_of
from app.sheet.press import BODY, GREY, INK, LINE, PALE, SMALL, STRONG, Align, Press, Style
from app.sheet.shapes import WardPage, WardRow
from app.telling.language import in_language as tr

SCALES = (1.06, 1.03, 1.0, 0.97, 0.94, 0.92, 0.9)
LABEL = Style(10, True)
_FIRST = Style(9.5, True)
_TIER = 50.0
_MANY = 24
"""More due items than these stand in four columns of small print."""


@dataclass(frozen=True, slots=True)
class RowBlock:
    """One episode: bed and person; the last gas and the support; the response; its flags, one line each. `brief`
    leaves out the response where nothing of concern is open: it stands on the episode's own page."""

    row: WardRow
    brief: bool = False

    @property
    def _response(self) -> str:
        return "" if self.brief else self.row.response

    def _about(self) -> str:
        r = self.row
        change = f"{r.change_of_state[0].upper()}{r.change_of_state[1:]}. " if r.change_of_state else ""
        return f"{r.who}. {change}".rstrip()

    def _limits_style(self) -> Style:
        return STRONG if self.row.is_limited else BODY

    def _limits_beside(self, press: Press, width: float) -> bool:
        """Whether the limits of care have room at the right of who it is."""
        taken = press.width(self._title(), LABEL) + press.width(self._about(), SMALL) + press.gap(24)
        return taken + press.width(self.row.limits, self._limits_style()) <= width

    def _response_style(self) -> Style:
        return STRONG if self.row.is_grave else BODY

    def _title(self) -> str:
        return f"{self.row.number}  {self.row.label}"

    def _is_side_by_side(self, press: Press, width: float) -> bool:
        """Whether gas and support have room on one line."""
        taken = press.width(self.row.state, STRONG) + press.width(self.row.support, BODY) + press.gap(10)
        return taken <= width

    def _flags(self) -> list[tuple[str, str, Style]]:
        """The flags, then what is planned and who was told, which has no tier, then the remarks."""
        found = [(f.partition(" ")[0].lower(), f.partition(" ")[2], STRONG) for f in self.row.flags]
        found += [("", self.row.action, STRONG)] if self.row.action else []
        return [*found, ("remark", self.row.remarks, BODY)] if self.row.remarks else found

    def _flag_lines(self, press: Press, width: float) -> list[list[tuple[str, str, Style]]]:
        """The flags in lines: two to a line where both have room in half of it."""
        half, lines = self._flag_width(press, width), list[list[tuple[str, str, Style]]]()
        room = half - press.gap(_TIER + 4)
        for flag in self._flags():
            fits = press.width(flag[1], flag[2]) <= room
            alone = bool(lines) and len(lines[-1]) == 1 and press.width(lines[-1][0][1], lines[-1][0][2]) <= room
            if fits and alone:
                lines[-1].append(flag)
            else:
                lines.append([flag])
        return lines

    def _title_height(self, press: Press, width: float) -> float:
        about = width - press.width(self._title(), LABEL) - press.gap(12)
        small = press.height(self._about(), SMALL, about) + press.gap(2.5)
        one = max(press.height(self._title(), LABEL, width), small)
        under = (
            0.0 if self._limits_beside(press, width) else press.height(self.row.limits, self._limits_style(), width)
        )
        return one + under

    def _gas_height(self, press: Press, width: float) -> float:
        one = press.height(self.row.state, STRONG, width)
        return one if self._is_side_by_side(press, width) else one + press.height(self.row.support, BODY, width)

    def _flag_width(self, press: Press, width: float) -> float:
        return (width - press.gap(12)) / 2

    def _flag_height(self, press: Press, tier: str, words: str, style: Style, width: float) -> float:
        return press.height(words, style, width - (press.gap(_TIER + 4) if tier else 0.0)) + press.gap(1.6)

    def _flags_height(self, press: Press, width: float) -> float:
        lines = self._flag_lines(press, width)
        return sum(max(self._flag_height(press, *flag, width) for flag in line) for line in lines)

    def height(self, press: Press, width: float) -> float:
        return (
            self._title_height(press, width) + self._gas_height(press, width)
            + (press.height(self._response, self._response_style(), width) if self._response else 0.0)
            + self._flags_height(press, width) + press.gap(4)
        )  # fmt: skip

    def draw(self, press: Press, x: float, y: float, width: float) -> None:
        r, high = self.row, self.height(press, width)
        if r.tier in ("escalate", "concern"):
            press.box(x - 6, y + 1, 2.6, high - press.gap(4), fill=INK if r.tier == "escalate" else "#9a9a9a")
        press.text(x, y, width, self._title(), Style(LABEL.size, True, GREY if r.ended else INK))
        taken = press.width(self._title(), LABEL) + press.gap(12)
        press.text(x + taken, y + press.gap(2.8), width - taken, self._about(), SMALL)
        if self._limits_beside(press, width):
            press.text(x, y + press.gap(2.3), width, r.limits, self._limits_style(), Align.RIGHT)
        y += self._title_height(press, width)
        if not self._limits_beside(press, width):
            under = press.height(r.limits, self._limits_style(), width)
            press.text(x, y - under, width, r.limits, self._limits_style())
        press.text(x, y, width, r.state, STRONG)
        if self._is_side_by_side(press, width):
            press.text(x, y, width, r.support, BODY, Align.RIGHT)
        else:
            press.text(x, y + press.height(r.state, STRONG, width), width, r.support, BODY)
        y += self._gas_height(press, width)
        y += press.text(x, y, width, self._response, self._response_style()) if self._response else 0.0
        y = self._draw_flags(press, x, y + press.gap(1), width)
        press.line(x, y + press.gap(2), x + width, y + press.gap(2), 0.3, LINE)

    def _draw_flags(self, press: Press, x: float, y: float, width: float) -> float:
        half = self._flag_width(press, width)
        for line in self._flag_lines(press, width):
            for n, (tier, words, style) in enumerate(line):
                wide = half if len(line) == 2 else width
                self._draw_flag(press, x + n * (half + press.gap(12)), y, wide, tier, words, style)
            y += max(self._flag_height(press, *flag, width) for flag in line)
        return y

    def _draw_flag(self, press: Press, x: float, y: float, width: float, tier: str, words: str, style: Style) -> None:
        if tier:
            draw_tier(press, x, y - press.gap(1), press.gap(_TIER), tier)
        left = press.gap(_TIER + 4) if tier else 0.0
        press.text(x + left, y, width - left, words, style)


@dataclass(frozen=True, slots=True)
class SeeFirst:
    """Whom to see first and why, in a box that is found at once."""

    words: str

    def height(self, press: Press, width: float) -> float:
        return press.height(self.words, _FIRST, width - press.gap(80)) + press.gap(14)

    def draw(self, press: Press, x: float, y: float, width: float) -> None:
        high = self.height(press, width) - press.gap(6)
        press.box(x, y, width, high, fill=PALE, weight=1.2)
        press.text(x + press.gap(8), y + press.gap(4.2), press.gap(80), tr("See first"), Style(_FIRST.size))
        press.text(x + press.gap(64), y + press.gap(4.2), width - press.gap(74), self.words, _FIRST)


@dataclass(frozen=True, slots=True)
class DueList:
    """Due items in order of time, in columns."""

    items: Sequence[str]

    def height(self, press: Press, width: float) -> float:
        return max(sum(self._high(press, i, width) for i in part) for part in self._columns()) if self.items else 0.0

    def _count(self) -> int:
        return 3 if len(self.items) <= _MANY else 4

    def _columns(self) -> list[Sequence[str]]:
        per = -(-len(self.items) // self._count())
        return [self.items[i : i + per] for i in range(0, len(self.items), per)]

    def _style(self, item: str) -> Style:
        size = BODY.size if len(self.items) <= _MANY else SMALL.size
        return Style(size, tr("OVERDUE") in item)

    def _width(self, press: Press, width: float) -> float:
        return (width - press.gap(10) * (self._count() - 1)) / self._count()

    def _high(self, press: Press, item: str, width: float) -> float:
        return press.height(item, self._style(item), self._width(press, width)) + press.gap(0.5)

    def draw(self, press: Press, x: float, y: float, width: float) -> None:
        each = self._width(press, width)
        for n, part in enumerate(self._columns()):
            top, left = y, x + n * (each + press.gap(10))
            for item in part:
                press.text(left, top, each, item, self._style(item))
                top += self._high(press, item, width)


def _is_quiet(row: WardRow) -> bool:
    return row.tier not in ("escalate", "concern") and not row.is_grave


def ward_blocks(page: WardPage, *, brief: int = 0) -> list[Block]:
    """The page's blocks from top to bottom, without signatures; so many quiet rows, the last first, said shorter."""
    quiet = [r for r in page.rows if _is_quiet(r)]
    short = quiet[len(quiet) - brief :]
    blocks: list[Block] = [SeeFirst(page.see_first)]
    if page.quiet:
        blocks.append(Text(f"{page.quiet[:1].upper()}{page.quiet[1:]}.", STRONG))
    count = tr("{count} in this shift").format(count=len(page.rows))
    blocks.append(Heading(tr("All episodes, in order of concern"), count))
    blocks += [RowBlock(r, r in short) for r in page.rows] or [Text(tr("No episode stood in this shift."))]
    blocks.append(Heading(tr("Due in the next 4 h, and overdue"), tr("gases first, the longest overdue on top")))
    if page.due:
        blocks.append(DueList(page.due))
    blocks += [Text(f"{line}.") for line in page.due_other]
    if page.skin or not (page.due or page.due_other):
        blocks.append(Text(page.skin or tr("Nothing is due.")))
    small = [tr("Missing from the record: {those}").format(those=" ".join(page.missing))] if page.missing else []
    small += [page.compared] if page.compared else []
    if short:
        told = tr("On their own pages stand the responses of {beds}.")
        small.append(told.format(beds=", ".join(r.label for r in short)))
    if small:
        blocks.append(Text(" ".join(small), SMALL))
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
    for brief in range(1, 1 + sum(_is_quiet(r) for r in page.rows)):  # the least in need of words first
        blocks = ward_blocks(page, brief=brief)
        if height_of(blocks, at, width) + signed.height(at, width) <= high:
            return [(at.scale, blocks)]
    pages: list[tuple[float, list[Block]]] = []
    current: list[Block] = []
    room = high - signed.height(at, width)
    for block in blocks:
        if current and height_of([*current, block], at, width) > room:
            carried = [current.pop()] if isinstance(current[-1], Heading) else []  # no heading alone at the foot
            pages.append((at.scale, current))
            current = carried
        current.append(block)
    return [*pages, (at.scale, current)]


def draw_ward(part: tuple[float, list[Block]], press: Press, x: float, y: float, width: float, bottom: float,
              signed: Signatures | None) -> None:  # fmt: skip
    """Draw one of the ward's pages; the last carries the signatures."""
    at = press.at_scale(part[0])
    draw_all(part[1], at, x, y, width)
    if signed is not None:
        signed.draw(at, x, bottom - signed.height(at, width), width)
