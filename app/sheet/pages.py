"""Lays out the pages of a handover: what stands where, and how it is made to fit."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

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
from app.sheet.content import EpisodePage, FlagLine
from app.sheet.gas_table import HEADINGS, GasRow
from app.sheet.press import BODY, SMALL, STRONG, Align, Press

SCALES = (1.0, 0.96, 0.92, 0.88, 0.84, 0.8, 0.77, 0.74)
LEAST_CHART, GOOD_CHART, MOST_CHART = 118.0, 150.0, 215.0
_SMALL_PRINT = 0.86
"""Print is made this small before the chart is made less high."""
_CHART_KEY = "grey bands: pH 7.35 to 7.45, SpO2 target; dashed: changes; hollow: doubtful"
_FEWEST_CHANGES = 4
_FEWEST_GASES = 3


@dataclass(frozen=True, slots=True)
class Fitted:
    """An episode's page as it fits: its scale, its blocks above and under the chart, and the chart's height."""

    scale: float
    upper: tuple[Block, ...]
    chart: ChartBlock
    lower: tuple[Block, ...]
    remark: RuledBox
    remark_high: float


def fit_episode(
    page: EpisodePage, press: Press, width: float, high: float, unit: str, signed: Signatures
) -> Fitted:
    """Make an episode's page fit its height: the largest scale that does, then fewer of the oldest rows."""
    reduced = page
    while True:
        for scale in SCALES:
            fitted = _at_scale(reduced, press.at_scale(scale), width, high, unit, signed)
            if fitted is not None:
                return fitted
        fewer = _fewer(reduced)
        if fewer is None:
            return _forced(reduced, press.at_scale(SCALES[-1]), width, unit)
        reduced = fewer


def _at_scale(
    page: EpisodePage, press: Press, width: float, high: float, unit: str, signed: Signatures
) -> Fitted | None:
    upper, lower = tuple(upper_blocks(page)), tuple(lower_blocks(page, unit))
    remark = RuledBox(page.remark)
    fixed = height_of(upper, press, width) + height_of(lower, press, width) + signed.height(press, width)
    heading = Heading("Remark").height(press, width)
    room = high - fixed - heading - remark.height(press, width)
    if room < (GOOD_CHART if press.scale > _SMALL_PRINT else LEAST_CHART):
        return None
    chart = min(room, MOST_CHART)
    return Fitted(press.scale, upper, ChartBlock(page.chart, chart), lower, remark,
                  remark.height(press, width) + room - chart)  # fmt: skip


def _forced(page: EpisodePage, press: Press, width: float, unit: str) -> Fitted:
    upper, lower = tuple(upper_blocks(page)), tuple(lower_blocks(page, unit))
    remark = RuledBox(page.remark)
    return Fitted(press.scale, upper, ChartBlock(page.chart, LEAST_CHART), lower, remark, remark.height(press, width))


def _fewer(page: EpisodePage) -> EpisodePage | None:
    """The page with one of its oldest rows less; None where nothing may go. What was left out is said."""
    if len(page.changes) > _FEWEST_CHANGES:
        return replace(page, changes=page.changes[1:], left_out_changes=page.left_out_changes + 1)
    closed = [f for f in page.flags if not f.is_open]
    if closed:
        flags = tuple(f for f in page.flags if f is not closed[-1])
        return replace(page, flags=flags, left_out_flags=page.left_out_flags + 1)
    if len(page.gases) > _FEWEST_GASES:
        return replace(page, gases=page.gases[1:], left_out_gases=page.left_out_gases + 1)
    if len(page.to_check) > 1:
        return replace(page, to_check=page.to_check[:-1], left_out_checks=page.left_out_checks + 1)
    return None


def upper_blocks(page: EpisodePage) -> Iterator[Block]:
    """What stands over the chart: facts, settings now, changes with their responses."""
    yield Facts(page.facts)
    yield Heading("Settings now")
    yield Text(page.settings, STRONG)
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
    yield Heading("Leak and interface")
    yield Text(page.leak)
    yield Heading("Flags", _left_out(page.left_out_flags, "settled flag"))
    if page.flags:
        for flag in page.flags:
            yield from flag_blocks(flag)
    else:
        yield Text("No flag was open or raised this shift.")
    yield Heading("Due in the next 4 h")
    yield from [Text(d) for d in page.due] or [Text("Nothing is due.")]
    yield Heading("Plan and care")
    told = "; ".join(page.told) or "nobody recorded as told"
    yield Facts((("Plan", page.plan), ("Jobs not done", page.jobs), ("Told", told), *page.care), 2)
    if page.to_check:
        yield Heading("To check", _left_out(page.left_out_checks, "more"))
        yield from (Text(t, SMALL) for t in page.to_check)


def flag_blocks(flag: FlagLine) -> Iterator[Block]:
    """One flag: its head, evidence and source."""
    tier, _, head = flag.head.partition(" ")
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


def draw_episode(
    fitted: Fitted, press: Press, x: float, y: float, width: float, bottom: float, signed: Signatures
) -> None:
    """Draw a fitted page between `y` and `bottom`."""
    at = press.at_scale(fitted.scale)
    y = draw_all(fitted.upper, at, x, y, width)
    fitted.chart.draw(at, x, y, width)
    y = draw_all(fitted.lower, at, x, y + fitted.chart.high, width)
    heading = Heading("Remark", "" if fitted.remark.words else "none typed; room to write by hand")
    heading.draw(at, x, y, width)
    y += heading.height(at, width)
    top_of_signatures = bottom - signed.height(at, width)
    fitted.remark.draw_high(at, x, y, width, max(fitted.remark_high, top_of_signatures - y))
    signed.draw(at, x, top_of_signatures, width)
