"""The blocks of an episode's page from top to bottom, as short as the page asks them to be."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from typing import Final

from app.look.formats import ABSENT
from app.sheet.blocks import Block, Column, Facts, Flag, Heading, SideBySide, Table, Text
from app.sheet.gas_table import HEADINGS, GasRow
from app.sheet.press import BODY, SMALL, STRONG, Align
from app.sheet.shapes import TIERS, EpisodePage, Fact, FlagLine, PageBrevity
from app.sheet.writer import lowered
from app.telling.language import in_language as tr

_CHART_KEY: Final = (
    "grey: pH 7.35 to 7.45, SpO2 target; dashed: changes; hollow: doubtful; bold: newest of the device"
)
_RECORD: Final = "see the record"


def upper_blocks(page: EpisodePage) -> Iterator[Block]:
    """What stands over the chart: facts, settings now, what changed since the last handover, every change."""
    yield Facts(page.facts)
    for fact in page.support:
        yield Facts((fact,), 1, value_style=STRONG if fact[0] == "Settings now" else BODY)
    since = page.since_short if page.brief.since else page.since
    yield Facts(((tr("What changed"), f"{page.since_head}: {' '.join(since)}"),), 1)
    yield from _changes(page)
    yield Heading(tr("The shift on one clock"), _CHART_KEY)


def _changes(page: EpisodePage) -> Iterator[Block]:
    b = page.brief
    yield Heading(tr("Changes this shift and their responses"), _left_out(b.changes_out, tr("earlier change")))
    short, whole = page.changes[b.changes_out : b.changes], page.changes[b.changes :]
    if short:
        yield Text(tr("Earlier, by verdict alone: {those}.").format(those="; ".join(c.brief for c in short)))
    if whole:
        columns = (Column(tr("When"), 12), Column(tr("What"), 46), Column(tr("What followed"), 54))
        yield Table(columns, [(c.at, c.what, c.response) for c in whole])
    if not page.changes:
        yield Text(tr("No change of settings recorded this shift."))


def lower_blocks(page: EpisodePage, unit: str) -> Iterator[Block]:
    """What stands under the chart: gases, flags, due items and levers, plan and care, what is to be checked."""
    b = page.brief
    told = tr("Gases (pressures in {unit}; HCO3 in mmol/L, c: calculated; +/−: against the gas before the change)")
    heading = told.format(unit=unit)
    yield Heading(heading, _left_out(b.gases_out, tr("earlier gas")))
    gases = page.gases[b.gases_out :]
    yield gas_table(gases) if gases else Text(tr("No gas recorded this shift or before it."))
    yield Heading(tr("Flags, open and settled"), _hidden(page))
    yield from flag_blocks(page.flags, b)
    said = [line.partition(": ")[0] for line in page.due] if b.due else page.due
    due: tuple[Block, ...] = (Heading(tr("Due in the next 4 h, and overdue")), *_texts(said, tr("Nothing is due.")))
    decides = Heading(tr("Levers that could act"), tr("a qualified person decides"))
    levers: tuple[Block, ...] = (decides, *_texts(page.levers, tr("None by what is recorded.")))
    yield SideBySide(due, levers)
    told = "; ".join(page.told) or ABSENT
    plan = _recorded((*page.plan, (tr("Calls, answers"), told)))
    yield SideBySide((Heading(tr("Plan, calls")), *plan), (Heading(tr("Care")), *_recorded(page.care)))
    if page.to_check:
        kept = page.to_check[: len(page.to_check) - b.checks]
        more = tr(" {checks} more: {RECORD}.").format(checks=b.checks, RECORD=_RECORD) if b.checks else ""
        yield Facts(((tr("To check"), " ".join(kept) + more),), 1, value_style=SMALL)


def _recorded(facts: Iterable[Fact]) -> tuple[Block, ...]:
    """What was recorded in rows; the names of what was not on one line."""
    facts = tuple(facts)
    known = tuple(f for f in facts if f[1] != ABSENT)
    missing = ", ".join(
        name if n == 0 else lowered(name) for n, (name, _) in enumerate(f for f in facts if f not in known)
    )
    blocks: tuple[Block, ...] = (Facts(known, 1),) if known else ()
    return (*blocks, Text(tr("Not recorded: {missing}.").format(missing=missing), SMALL)) if missing else blocks


def _texts(lines: Iterable[str], none: str) -> tuple[Block, ...]:
    return tuple(Text(line) for line in lines) or (Text(none),)


def _hidden(page: EpisodePage) -> str:
    """Whose evidence the page leaves to the record."""
    rows = [f for f in page.flags if f.is_open and (f.is_strongest or not page.brief.weaker_evidence)]
    hidden = [t for t in TIERS if t not in page.brief.evidence_of and any(f.tier == t for f in rows)]
    told = tr("evidence and sources of the flags of {tiers}: {where}")
    return told.format(tiers=tr(" and ").join(hidden), where=tr(_RECORD)) if hidden else ""


def flag_blocks(flags: tuple[FlagLine, ...], brief: PageBrevity) -> Iterator[Block]:
    """Open flags each in a row, the strongest of each group first; those closed this shift in one paragraph."""
    opened = [f for f in flags if f.is_open]
    rows = [f for f in opened if f.is_strongest or not brief.weaker_evidence]
    yield from (_flag(f, evidence=True) for f in rows if f.tier in brief.evidence_of)
    alone = [_flag(f, evidence=False) for f in rows if f.tier not in brief.evidence_of]
    yield from (SideBySide(tuple(alone[n : n + 1]), tuple(alone[n + 1 : n + 2])) for n in range(0, len(alone), 2))
    under = [f for f in opened if f not in rows]
    if under:
        yield Text(tr("Under these, counted once: {those}.").format(those="; ".join(f.head for f in under)))
    closed = [f for f in flags if not f.is_open]
    if closed:
        for head, found in ((tr("Settled"), True), (tr("No longer met"), False)):
            told = [f for f in closed if f.is_settled is found]
            if told:
                yield Text(f"{head}: {'; '.join(_closed(told, times=found or not brief.ended))}.")
    if not flags:
        yield Text(tr("No flag was open or raised this shift."))


def _flag(flag: FlagLine, *, evidence: bool) -> Flag:
    tier, _, head = flag.head.partition(" ")
    shown = f"{flag.evidence} {flag.source}".strip() if evidence else ""
    return Flag(tier.lower(), head, shown, STRONG if flag.is_strongest else BODY)


def _closed(flags: Iterable[FlagLine], *, times: bool) -> Iterator[str]:
    """Each marker once, with every time it was met, or with how often."""
    spells: dict[str, list[str]] = {}
    for flag in flags:
        spells.setdefault(flag.marker, []).append(flag.spell)
    for marker, found in spells.items():
        often = tr(" {found} times").format(found=len(found)) if len(found) > 1 else ""
        yield f"{marker} {', '.join(found)}" if times else f"{marker}{often}"


def gas_table(gases: tuple[GasRow, ...]) -> Table:
    """The gases with their differences."""
    shares = (10, 5, 8, 8, 9, 7, 7, 8, 7, 8, 18, 33)
    right = range(2, 10)
    columns = [Column(h, s, Align.RIGHT if n in right else Align.LEFT)
               for n, (h, s) in enumerate(zip(map(tr, HEADINGS), shares, strict=True))]  # fmt: skip
    rows = [
        (g.at, g.site, g.ph, g.delta_ph, g.paco2, g.delta_paco2, g.pao2, g.hco3, g.pf, g.fio2,
         g.state + (" (before)" if g.is_before else ""), g.verdict)
        for g in gases
    ]  # fmt: skip
    return Table(columns, rows, frozenset(n for n, g in enumerate(gases) if g.is_before), pad=7.0)


def _left_out(count: int, what: str) -> str:
    if not count:
        return ""
    plural = what if count == 1 or what == "more" else f"{what}s" if not what.endswith("s") else f"{what}es"
    return tr("{count} {plural} not shown: {RECORD}").format(count=count, plural=plural, RECORD=_RECORD)
