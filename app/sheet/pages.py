"""Lays out the pages of a handover: what stands where, and how an episode is made to fit one page."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

from app.sheet.blocks import Block, Heading, RuledBox, Signatures, Text, draw_all, height_of
from app.sheet.chart_print import ChartBlock
from app.sheet.episode_sheet import lower_blocks, upper_blocks
from app.sheet.press import STRONG, Press
from app.sheet.shapes import TIERS, EpisodePage, PageBrevity
from app.telling.language import in_language as tr

SCALES = (1.06, 1.03, 1.0, 0.97, 0.94, 0.92, 0.9)
"""Print is made no smaller: what has no room then is said shorter."""
LEAST_CHART, GOOD_CHART, MOST_CHART = 124.0, 150.0, 215.0
_BEFORE_REMARK = 5.0
_KEPT_CHANGES, _KEPT_GASES, _FEWEST_SHORT = 3, 5, 8


@dataclass(frozen=True, slots=True)
class Fitted:
    """An episode's page as it fits: its scale, its blocks above and under the chart, and the chart's height.

    `overflow` holds the blocks of further pages; it is empty unless nothing else made it fit.
    """

    scale: float
    upper: tuple[Block, ...]
    chart: ChartBlock
    lower: tuple[Block, ...]
    remark: RuledBox
    overflow: tuple[tuple[Block, ...], ...] = ()


@dataclass(frozen=True, slots=True)
class Room:
    """The room of a page between head and foot: width and height in points, the unit of pressures, who signs."""

    width: float
    height: float
    unit: str
    signed: Signatures


def fit_episode(page: EpisodePage, press: Press, room: Room) -> Fitted:
    """Make an episode's page fit: the largest scale that does, then shorter words, then more pages.

    An open flag is never left out, and nothing is left out without being said.
    """
    for scale, chart in (*((s, GOOD_CHART) for s in SCALES), (SCALES[-1], LEAST_CHART)):
        fitted = _at_scale(page, press.at_scale(scale), room, chart)
        if fitted is not None:
            return fitted
    smallest = press.at_scale(SCALES[-1])
    said = page
    for said in shorter(page):
        fitted = _at_scale(said, smallest, room, LEAST_CHART)
        if fitted is not None:
            return _given_back(said, fitted, smallest, room)
    return _on_more_pages(said, smallest, room)


def shorter(page: EpisodePage) -> Iterator[EpisodePage]:
    """The page said shorter and shorter, what a reader would miss most last."""
    brief = page.brief
    for left in range(1, len(page.to_check)):
        yield replace(page, brief=(brief := replace(brief, checks=left)))
    yield replace(page, brief=(brief := replace(brief, since=True)))
    yield replace(page, brief=(brief := replace(brief, weaker_evidence=True)))
    for short in range(2, len(page.changes) - _KEPT_CHANGES + 1):
        yield replace(page, brief=(brief := replace(brief, changes=short)))
    for out in range(1, len(page.gases) - _KEPT_GASES + 1):
        yield replace(page, brief=(brief := replace(brief, gases_out=out)))
    for short in range(brief.changes + 1, len(page.changes)):
        yield replace(page, brief=(brief := replace(brief, changes=short)))
    yield replace(page, brief=(brief := replace(brief, due=True)))
    for tiers in ({"escalate", "concern"}, {"escalate"}, set[str]()):
        yield replace(page, brief=(brief := replace(brief, evidence_of=frozenset(tiers))))
    yield replace(page, brief=(brief := replace(brief, ended=True)))
    for out in range(1, brief.changes - _FEWEST_SHORT + 1):
        yield replace(page, brief=(brief := replace(brief, changes_out=out)))


def _given_back(page: EpisodePage, fitted: Fitted, press: Press, room: Room) -> Fitted:
    """What the last step saved more than was needed goes to what was shortened before it, the most missed first."""
    for whole in _longer(page):
        if (found := _at_scale(whole, press, room, LEAST_CHART)) is not None:
            return _given_back(whole, found, press, room)
    return fitted


def _longer(page: EpisodePage) -> Iterator[EpisodePage]:
    """The page with one thing said whole again."""
    b, usual = page.brief, PageBrevity()
    for short in range(b.changes_out, b.changes):
        yield replace(page, brief=replace(b, changes=short))
    for more in (t for t in TIERS if t not in b.evidence_of):
        yield replace(page, brief=replace(b, evidence_of=b.evidence_of | {more}))
    for whole in (
        replace(b, due=False), replace(b, ended=False), replace(b, since=False), replace(b, gases_out=0),
        replace(b, weaker_evidence=False), replace(b, checks=usual.checks),
    ):  # fmt: skip
        if whole != b:
            yield replace(page, brief=whole)


def _at_scale(page: EpisodePage, press: Press, room: Room, least: float) -> Fitted | None:
    upper, lower, remark = tuple(upper_blocks(page)), tuple(lower_blocks(page, room.unit)), RuledBox(page.remark)
    left = room.height - height_of((*upper, *lower), press, room.width) - _end_height(remark, press, room)
    if left < least:
        return None
    return Fitted(press.scale, upper, ChartBlock(page.chart, min(left, MOST_CHART)), lower, remark)


def _end_height(remark: RuledBox, press: Press, room: Room) -> float:
    """The remark and the lines to sign."""
    return _BEFORE_REMARK + height_of((remark, room.signed), press, room.width)


def _on_more_pages(page: EpisodePage, press: Press, room: Room) -> Fitted:
    """The page as far as it goes, the rest on further ones. A remark too long for what is left goes there too."""
    goes_on = Text(tr("Goes on on the next page."), STRONG)
    upper, lower, remark = tuple(upper_blocks(page)), list(lower_blocks(page, room.unit)), RuledBox(page.remark)
    fixed = height_of((*upper, goes_on), press, room.width) + LEAST_CHART
    if fixed + _end_height(remark, press, room) > room.height:
        lower += [Heading(tr("Handover remark")), *(Text(part) for part in page.remark.splitlines())]
        remark = RuledBox("", tr("the remark stands on the next page"))
    left = room.height - fixed - _end_height(remark, press, room)
    kept = _as_many(lower, press, room.width, left)
    chart = ChartBlock(page.chart, LEAST_CHART)
    rest = tuple(_in_pages(lower[kept:], press, room))
    return Fitted(press.scale, upper, chart, (*lower[:kept], goes_on), remark, rest)


def _in_pages(blocks: list[Block], press: Press, room: Room) -> Iterator[tuple[Block, ...]]:
    while blocks:
        kept = max(1, _as_many(blocks, press, room.width, room.height))
        yield tuple(blocks[:kept])
        blocks = blocks[kept:]


def _as_many(blocks: list[Block], press: Press, width: float, high: float) -> int:
    """How many blocks have room; no heading stands alone at the foot."""
    kept, used = 0, 0.0
    while kept < len(blocks) and (used := used + blocks[kept].height(press, width)) <= high:
        kept += 1
    while kept and kept < len(blocks) and isinstance(blocks[kept - 1], Heading):
        kept -= 1
    return kept


def draw_episode(fitted: Fitted, press: Press, x: float, y: float, bottom: float, room: Room) -> None:
    """Draw a fitted page between `y` and `bottom`. The remark's box takes what room is left."""
    at, width = press.at_scale(fitted.scale), room.width
    y = draw_all(fitted.upper, at, x, y, width)
    fitted.chart.draw(at, x, y, width)
    y = draw_all(fitted.lower, at, x, y + fitted.chart.high, width)
    y += _BEFORE_REMARK
    top_of_signatures = bottom - room.signed.height(at, width)
    fitted.remark.draw_high(at, x, y, width, top_of_signatures - y)
    room.signed.draw(at, x, top_of_signatures, width)


def draw_overflow(fitted: Fitted, blocks: tuple[Block, ...], press: Press, x: float, y: float, width: float) -> None:
    """Draw one of the pages of what had no room on the episode's first."""
    draw_all(blocks, press.at_scale(fitted.scale), x, y, width)
