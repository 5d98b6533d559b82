"""Lays out the pages of a handover: what stands where, and how it is made to fit."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

from app.formats import ABSENT
from app.sheet.blocks import (
    Block,
    Column,
    Facts,
    Heading,
    RuledBox,
    Signatures,
    Table,
    Text,
    TierMark,
    draw_all,
    height_of,
)
from app.sheet.chart_print import ChartBlock
from app.sheet.gas_table import HEADINGS, GasRow
from app.sheet.press import BODY, SMALL, STRONG, Align, Press
from app.sheet.shapes import EpisodePage, FlagLine

SCALES = (1.0, 0.96, 0.92, 0.88, 0.84, 0.8, 0.77, 0.74)
LEAST_CHART, GOOD_CHART, MOST_CHART = 118.0, 150.0, 215.0
_SMALL_PRINT = 0.86
"""Print is made this small before the chart is made less high."""
_CHART_KEY = "grey bands: pH 7.35 to 7.45, SpO2 target; dashed: changes; hollow: doubtful"
_FEWEST_CHANGES = 4
_FEWEST_GASES = 3
_HIDDEN_EVIDENCE = "Evidence: see the record."


@dataclass(frozen=True, slots=True)
class Fitted:
    """An episode's page as it fits: its scale, its blocks above and under the chart, and the chart's height.

    `overflow` holds blocks for a second page; it is empty unless nothing else made it fit.
    """

    scale: float
    upper: tuple[Block, ...]
    chart: ChartBlock
    lower: tuple[Block, ...]
    remark: RuledBox
    overflow: tuple[Block, ...] = ()


@dataclass(frozen=True, slots=True)
class Room:
    """The room of a page: width and height in points, the unit of gas pressures, and who signs."""

    width: float
    height: float
    unit: str
    signed: Signatures


def fit_episode(page: EpisodePage, press: Press, room: Room) -> Fitted:
    """Make an episode's page fit: the largest scale that does, then fewer of the oldest rows, then two pages.

    An open flag is never left out.
    """
    for scale in SCALES:
        fitted = _at_scale(page, press.at_scale(scale), room)
        if fitted is not None:
            return fitted
    smallest = press.at_scale(SCALES[-1])
    while (fewer := _fewer(page)) is not None:
        page = fewer
        fitted = _at_scale(page, smallest, room)
        if fitted is not None:
            return fitted
    return _on_two_pages(page, smallest, room)


def _at_scale(page: EpisodePage, press: Press, room: Room) -> Fitted | None:
    upper, lower, remark = tuple(upper_blocks(page)), tuple(lower_blocks(page, room.unit)), RuledBox(page.remark)
    left = room.height - height_of((*upper, *lower), press, room.width) - _end_height(remark, press, room)
    if left < (GOOD_CHART if press.scale > _SMALL_PRINT else LEAST_CHART):
        return None
    return Fitted(press.scale, upper, ChartBlock(page.chart, min(left, MOST_CHART)), lower, remark)


def _end_height(remark: RuledBox, press: Press, room: Room) -> float:
    """The remark with its heading, and the lines to sign."""
    return height_of((Heading("Remark"), remark, room.signed), press, room.width)


def _on_two_pages(page: EpisodePage, press: Press, room: Room) -> Fitted:
    upper, lower, remark = tuple(upper_blocks(page)), tuple(lower_blocks(page, room.unit)), RuledBox(page.remark)
    left = room.height - height_of(upper, press, room.width) - LEAST_CHART - _end_height(remark, press, room)
    kept = 0
    while kept < len(lower) and height_of(lower[: kept + 1], press, room.width) <= left:
        kept += 1
    while kept and isinstance(lower[kept - 1], Heading):
        kept -= 1
    return Fitted(press.scale, upper, ChartBlock(page.chart, LEAST_CHART), lower[:kept], remark, lower[kept:])


def _fewer(page: EpisodePage) -> EpisodePage | None:
    """The page with a little less that the record holds anyway; None where nothing may go. It is said."""
    if len(page.to_check) > 1:
        return replace(page, to_check=page.to_check[:-1], left_out_checks=page.left_out_checks + 1)
    closed = [f for f in page.flags if not f.is_open]
    if closed:
        flags = tuple(f for f in page.flags if f is not closed[-1])
        return replace(page, flags=flags, left_out_flags=page.left_out_flags + 1)
    weaker = [f for f in page.flags if not f.is_strongest and f.evidence != _HIDDEN_EVIDENCE]
    if weaker:
        flags = tuple(replace(f, evidence=_HIDDEN_EVIDENCE) if f is weaker[-1] else f for f in page.flags)
        return replace(page, flags=flags, left_out_evidence=page.left_out_evidence + 1)
    if len(page.changes) > _FEWEST_CHANGES:
        return replace(page, changes=page.changes[1:], left_out_changes=page.left_out_changes + 1)
    if len(page.gases) > _FEWEST_GASES:
        return replace(page, gases=page.gases[1:], left_out_gases=page.left_out_gases + 1)
    return None


def upper_blocks(page: EpisodePage) -> Iterator[Block]:
    """What stands over the chart: facts, settings now, changes with their responses."""
    yield Facts(page.facts)
    yield Heading("Settings now")
    yield Text(page.settings, STRONG)
    yield Text(page.leak)
    yield Heading("Changes this shift and their responses", _left_out(page.left_out_changes, "earlier change"))
    if page.changes:
        columns = (Column("When", 11), Column("What", 40), Column("What it did", 60))
        rows = [(c.at, c.what, c.response) for c in page.changes]
        yield Table(columns, rows)
    else:
        yield Text("No change of settings recorded this shift.")
    yield Heading("The shift on one clock", _CHART_KEY)


def lower_blocks(page: EpisodePage, unit: str) -> Iterator[Block]:
    """What stands under the chart: gases, leak, flags, due, care, plan."""
    units = f"Gases (pressures in {unit}; HCO3 in mmol/L, c: calculated)"
    yield Heading(units, _left_out(page.left_out_gases, "gas"))
    if page.gases:
        yield gas_table(page.gases)
    else:
        yield Text("No gas recorded this shift or before it.")
    yield Heading("Flags", _left_out(page.left_out_flags, "settled flag"))
    if page.flags:
        for flag in page.flags:
            yield from flag_blocks(flag)
    else:
        yield Text("No flag was open or raised this shift.")
    yield Heading("Due in the next 4 h")
    yield from [Text(d) for d in page.due] or [Text("Nothing is due.")]
    yield Heading("Plan and care")
    told = "; ".join(page.told) or ABSENT
    yield Facts((("Plan", page.plan), ("Jobs not done", page.jobs), ("Told", told), *page.care), 2)
    if page.to_check:
        yield Heading("To check", _left_out(page.left_out_checks, "more"))
        yield from (Text(t, SMALL) for t in page.to_check)


def flag_blocks(flag: FlagLine) -> Iterator[Block]:
    """One flag: its head, evidence and source."""
    tier, _, head = flag.head.partition(" ")
    if flag.evidence == _HIDDEN_EVIDENCE:
        yield TierMark(tier.lower(), f"{head}. {flag.evidence}", BODY)
        return
    yield TierMark(tier.lower(), head, STRONG if flag.is_open else BODY)
    yield Text(f"{flag.evidence} {flag.source}".strip(), SMALL, 59)


def gas_table(gases: tuple[GasRow, ...]) -> Table:
    """The gases with their differences."""
    shares = (8, 6, 17, 17, 9, 9, 8, 9, 22, 33)
    right = {2, 3, 4, 5, 6, 7}
    columns = [Column(h, s, Align.RIGHT if n in right else Align.LEFT)
               for n, (h, s) in enumerate(zip(HEADINGS, shares, strict=True))]  # fmt: skip
    rows = [
        (g.at, g.site, _with(g.ph, g.delta_ph), _with(g.paco2, g.delta_paco2), g.pao2, g.hco3, g.pf, g.fio2,
         g.state + (" (before)" if g.is_before else ""), g.verdict)
        for g in gases
    ]  # fmt: skip
    quiet = frozenset(n for n, g in enumerate(gases) if g.is_before)
    return Table(columns, rows, quiet)


def _with(value: str, delta: str) -> str:
    return f"{value} ({delta})" if delta else value


def _left_out(count: int, what: str) -> str:
    if not count:
        return ""
    plural = what if count == 1 or what == "more" else f"{what}s" if not what.endswith("s") else f"{what}es"
    return f"{count} {plural} not shown: see the record"


def draw_episode(fitted: Fitted, press: Press, x: float, y: float, bottom: float, room: Room) -> None:
    """Draw a fitted page between `y` and `bottom`. The remark's box takes what room is left."""
    at, width = press.at_scale(fitted.scale), room.width
    y = draw_all(fitted.upper, at, x, y, width)
    fitted.chart.draw(at, x, y, width)
    y = draw_all(fitted.lower, at, x, y + fitted.chart.high, width)
    heading = Heading("Remark", "" if fitted.remark.words else "not recorded; room to write by hand")
    heading.draw(at, x, y, width)
    y += heading.height(at, width)
    top_of_signatures = bottom - room.signed.height(at, width)
    fitted.remark.draw_high(at, x, y, width, top_of_signatures - y)
    room.signed.draw(at, x, top_of_signatures, width)


def draw_overflow(fitted: Fitted, press: Press, x: float, y: float, width: float) -> None:
    """Draw what had no room on the episode's first page."""
    draw_all(fitted.overflow, press.at_scale(1.0), x, y, width)
