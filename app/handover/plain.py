"""A handover as plain text, for pasting into another system: the same words as the printed sheet."""

from __future__ import annotations

from collections.abc import Iterator
from textwrap import fill

from app.look.formats import ABSENT, plain
from app.sheet.gas_table import GasRow
from app.sheet.shapes import EpisodePage, FlagLine, SheetContent, WardPage, WardRow

WIDTH = 100


def handover_text(content: SheetContent) -> str:
    """The whole handover in lines of at most 100 letters."""
    lines = [*_ward(content.ward), *(x for p in content.episodes for x in _episode(p, content.gas_unit))]
    at = content.signed_at or "__________"
    lines += ["", "-" * WIDTH, *_wrapped(content.caution), f"{content.printed}. {content.head}.",
              f"Given by: {content.given_by or '____________________'}  Time: {at}",
              f"Taken by: {content.taken_by or '____________________'}  Time: {at}"]  # fmt: skip
    return plain("\n".join(lines)) + "\n"


def _wrapped(text: str, indent: str = "") -> list[str]:
    """A text in lines; line ends typed in a note stay."""
    out: list[str] = []
    for part in text.splitlines() or [""]:
        made = fill(part, WIDTH, initial_indent=indent, subsequent_indent=indent + "  ", break_on_hyphens=False)
        out += made.splitlines() or [indent.rstrip()]
    return out


def _ward(page: WardPage) -> Iterator[str]:
    yield from (f"{page.title.upper()}. {page.shift}", "=" * WIDTH)
    if page.quiet:
        yield page.quiet[:1].upper() + page.quiet[1:]
    yield from _wrapped(f"SEE FIRST: {page.see_first}")
    yield from _wrapped(page.compared)
    for row in page.rows:
        yield from _row(row)
    yield from ("", "DUE IN THE NEXT 4 H, AND OVERDUE")
    for item in [x for x in (*page.due, *page.due_other, page.skin) if x] or ["Nothing is due."]:
        yield from _wrapped(item, "  ")
    if page.missing:
        yield from ("", "MISSING FROM THE RECORD")
        for item in page.missing:
            yield from _wrapped(item, "  ")


def _row(row: WardRow) -> Iterator[str]:
    yield ""
    change = f" ({row.change_of_state})" if row.change_of_state else ""
    yield from _wrapped(f"{row.number}. {row.label}: {row.state}{change}")
    for text in (f"{row.who}. {row.limits}", row.support, row.response, *row.flags, row.action):
        yield from _wrapped(text, "   ") if text else ()
    if row.remarks:
        yield from _wrapped(f"REMARK {row.remarks}", "   ")


def _episode(page: EpisodePage, unit: str) -> Iterator[str]:
    yield from ("", "=" * WIDTH)
    yield from _wrapped(f"{page.place}. {page.label.upper()}: {page.standing}")
    yield from _wrapped(page.subtitle)
    for name, value in (*page.facts, *page.support):
        yield from _wrapped(f"{name}: {value}", "  ")
    yield from ("", page.since_head)
    for item in page.since:
        yield from _wrapped(item, "  ")
    yield from ("", "Changes this shift and their responses")
    for c in page.changes:
        yield from _wrapped(f"{c.at} {c.what}. {c.response}", "  ")
    if not page.changes:
        yield "  No change of settings recorded this shift."
    yield from _gases(page.gases, unit)
    yield from ("", "Flags")
    yield from _flags(page.flags)
    yield from ("", "Due in the next 4 h")
    for item in page.due or ("Nothing is due.",):
        yield from _wrapped(item, "  ")
    yield from ("", "Levers that could act (a qualified person decides)")
    for item in page.levers or ("None by what is recorded.",):
        yield from _wrapped(item, "  ")
    yield from ("", "Plan and care")
    told = "; ".join(page.told) or ABSENT
    for name, value in (*page.plan, ("Calls, answers", told), *page.care):
        yield from _wrapped(f"{name}: {value}", "  ")
    yield from ("", "Handover remark", *_wrapped(page.remark or ABSENT, "  "))
    if page.to_check:
        yield from ("", "To check")
        for item in page.to_check:
            yield from _wrapped(item, "  ")


def _gases(gases: tuple[GasRow, ...], unit: str) -> Iterator[str]:
    yield from ("", f"Gases (pressures in {unit}, HCO3 in mmol/L; in brackets: against the gas before the change)")
    for g in gases:
        ph = f"{g.ph} ({g.delta_ph})" if g.delta_ph else g.ph
        paco2 = f"{g.paco2} ({g.delta_paco2})" if g.delta_paco2 else g.paco2
        yield from _wrapped(
            f"{g.at} {g.site}: pH {ph}, PaCO2 {paco2}, PaO2 {g.pao2}, HCO3 {g.hco3}, P/F {g.pf}, FiO2 {g.fio2}, "
            f"{g.state}. {g.verdict}", "  ",
        )  # fmt: skip
    if not gases:
        yield "  No gas recorded this shift or before it."


def _flags(flags: tuple[FlagLine, ...]) -> Iterator[str]:
    for flag in flags:
        yield from _wrapped(flag.head, "  ")
        yield from _wrapped(f"{flag.evidence} {flag.source}", "    ")
    if not flags:
        yield "  No flag was open or raised this shift."
