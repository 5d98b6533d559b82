"""The handover as one page to read on the screen. The words are those of the printed sheet."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from html import escape

from app.look.formats import whole_units
from app.look.theme import Theme, Tier, Verdict, tier_word
from app.sheet.gas_table import HEADINGS
from app.sheet.shapes import ChangeLine, EpisodePage, FlagLine, SheetContent, WardRow
from app.telling.language import in_language as tr
from app.telling.phrases import translate


def page_html(content: SheetContent, theme: Theme) -> str:
    """The whole handover as rich text in the theme's colours and sizes; everything is escaped."""
    writer = _Writer(theme)
    parts = [*writer.ward(content)]
    for page in content.episodes:
        parts += writer.episode(page, content.gas_unit)
    parts.append(writer.quiet(f"{content.printed}. {content.head}."))
    parts.append(writer.quiet(tr(content.caution)))
    return "".join(parts)


def anchor_of(place: int) -> str:
    """Where an episode's part of the page begins, by its place in the order of concern.

    >>> anchor_of(3)
    'episode-3'
    """
    return f"episode-{place}"


def _shown(text: str) -> str:
    """A text with every sign as it is, whose lines end between values."""
    return escape(whole_units(text))


class _Writer:
    """Writes parts of the page."""

    def __init__(self, theme: Theme) -> None:
        self.theme = theme
        self.c = theme.colours

    def heading(self, text: str, size: int, anchor: str = "") -> str:
        words = f'<a name="{anchor}">{_shown(text)}</a>' if anchor else _shown(text)  # an empty anchor is lost
        return (
            f'<p style="font-size:{self.theme.px(size)}px; font-weight:600; margin-top:{self.theme.px(14)}px; '
            f'margin-bottom:{self.theme.px(4)}px">{words}</p>'
        )

    def text(self, text: str) -> str:
        return f'<p style="margin:{self.theme.px(2)}px 0">{_shown(text)}</p>'

    def quiet(self, text: str) -> str:
        return f'<p style="color:{self.c.ink_quiet}; margin:{self.theme.px(2)}px 0">{_shown(text)}</p>'

    def ward(self, content: SheetContent) -> Iterator[str]:
        page = content.ward
        yield self.heading(page.shift, self.theme.type.title)
        if page.quiet:
            yield self.text(page.quiet[:1].upper() + page.quiet[1:])
        yield self.quiet(page.compared)
        first = translate("handover", "See first: {who}").format(who=page.see_first)
        yield self.heading(first, self.theme.type.emphasis)
        heads = (
            translate("handover", "Who"),
            translate("handover", "State"),
            translate("handover", "Support and response"),
            translate("handover", "Open flags"),
        )
        yield self.table(heads, (self.ward_row(r) for r in page.rows), (16, 22, 36, 26))
        yield self.heading(translate("handover", "Due, gases first"), self.theme.type.emphasis)
        yield from (self.text(line) for line in (*page.due, *page.due_other))
        if page.skin or not (page.due or page.due_other):
            yield self.text(page.skin or translate("handover", "Nothing due within 4 h."))
        yield from (self.quiet(line) for line in page.missing)

    def ward_row(self, r: WardRow) -> tuple[str, ...]:
        quiet = f'<span style="color:{self.c.ink_quiet}">'
        link = f'<a href="#{anchor_of(r.number)}" style="color:{self.c.accent}"><b>{_shown(r.label)}</b></a>'
        limits = f"<b>{_shown(r.limits)}</b>" if r.is_limited else _shown(r.limits)
        who = f"{link}<br>{quiet}{_shown(r.who)}</span><br>{limits}"
        change = f"<br>{_shown(r.change_of_state)}" if r.change_of_state else ""
        told = [_shown(f) for f in r.flags] + ([f"{quiet}{_shown(r.remarks)}</span>"] if r.remarks else [])
        told += [f"<b>{_shown(r.action)}</b>"] if r.action else []
        flags = "<br>".join(told) or f"{quiet}{_shown(translate('handover', 'none'))}</span>"
        support = f"{_shown(r.support)}<br>{self.response(r)}"
        return who, _shown(r.state) + change, support, flags

    def response(self, r: WardRow) -> str:
        """The response; what got worse or lost its gain in the colour of its sign, and strong."""
        if not r.is_grave:
            return _shown(r.response)
        colour = self.c.verdict_inks[Verdict(r.sign)]
        return f'<span style="color:{colour}; font-weight:600">{_shown(r.response)}</span>'

    def table(self, heads: Iterable[str], rows: Iterable[Iterable[str]], widths: Iterable[int]) -> str:
        """Cells are rich text already; widths in per cent."""
        pad, line = self.theme.px(5), self.c.line
        quiet = f"color:{self.c.ink_quiet}; padding:{pad}px"
        head = "".join(
            f'<td width="{w}%" style="{quiet}">{_shown(h)}</td>' for h, w in zip(heads, widths, strict=True)
        )
        cell = f'style="padding:{pad}px; border-top:1px solid {line}"'
        body = "".join("<tr>" + "".join(f'<td {cell} valign="top">{x}</td>' for x in row) + "</tr>" for row in rows)
        return f'<table width="98%" cellspacing="0" style="border-collapse:collapse"><tr>{head}</tr>{body}</table>'

    def episode(self, page: EpisodePage, unit: str) -> Iterator[str]:
        yield f'<hr style="background:{self.c.line}">'
        yield self.heading(page.label, self.theme.type.title, anchor_of(page.place))
        yield self.quiet(page.subtitle)
        yield self.text(page.standing)
        facts = (*page.facts, *page.support)
        cells = ((f'<span style="color:{self.c.ink_quiet}">{_shown(k)}</span>', _shown(v)) for k, v in facts)
        yield self.table(("", ""), cells, (22, 78))
        yield self.heading(page.since_head, self.theme.type.emphasis)
        yield from (self.text(line) for line in page.since)
        if page.flags:
            yield self.heading(translate("handover", "Flags"), self.theme.type.emphasis)
            yield from (self.flag(f) for f in page.flags)
        yield self.heading(translate("handover", "Changes this shift"), self.theme.type.emphasis)
        yield from self.changes(page.changes)
        yield from self.gases(page, unit)
        yield self.heading(translate("handover", "Due next"), self.theme.type.emphasis)
        yield from (self.text(d) for d in page.due or (translate("handover", "Nothing due within 4 h."),))
        yield self.heading(
            translate("handover", "Levers that could act (a qualified person decides)"), self.theme.type.emphasis
        )
        yield from (self.text(x) for x in page.levers or (translate("handover", "None by what is recorded."),))
        yield self.heading(translate("handover", "Care, plan, calls"), self.theme.type.emphasis)
        yield from (self.text(f"{k}: {v}") for k, v in page.care)
        yield from (self.text(translate("handover", "Told: {who}").format(who=t)) for t in page.told)
        yield from (self.text(f"{k}: {v}") for k, v in page.plan)
        yield self.text(
            translate("handover", "Handover remark: {remark}").format(
                remark=page.remark
                or translate("handover", "not recorded. Type 'handover remark ...' on the log strip.")
            )
        )
        yield from (self.quiet(line) for line in page.to_check)

    def gases(self, page: EpisodePage, unit: str) -> Iterator[str]:
        """The gases with their differences."""
        told = "Gases (pressures in {unit}, HCO3 in mmol/L; +/−: against the gas before the change)"
        title = translate("handover", told).format(unit=unit)
        yield self.heading(title, self.theme.type.emphasis)
        if not page.gases:
            yield self.text(translate("handover", "No gas recorded this shift or before it."))
            return
        rows = (
            (g.at, g.site, g.ph, g.delta_ph, g.paco2, g.delta_paco2, g.pao2, g.hco3, g.pf, g.fio2,
             g.state + (translate("handover", " (before)") if g.is_before else ""), g.verdict)
            for g in page.gases
        )  # fmt: skip
        widths = (10, 5, 6, 6, 6, 6, 6, 6, 6, 7, 16, 20)
        yield self.table(map(tr, HEADINGS), ([_shown(cell) for cell in row] for row in rows), widths)

    def flag(self, f: FlagLine) -> str:
        word = tier_word(Tier(f.tier)).upper()
        weight = 600 if f.is_open else 400
        return (
            f'<p style="margin:{self.theme.px(3)}px 0">'
            f'<span style="font-weight:{weight}">{_shown(word)}: {_shown(f.head)}</span><br>'
            f'{_shown(f.evidence)} <span style="color:{self.c.ink_quiet}">{_shown(f.source)}</span></p>'
        )

    def changes(self, lines: tuple[ChangeLine, ...]) -> Iterator[str]:
        if not lines:
            yield self.text(translate("handover", "No change of settings this shift."))
            return
        heads = (
            translate("handover", "When"),
            translate("handover", "What"),
            translate("handover", "What followed"),
        )
        yield self.table(heads, ((_shown(x.at), _shown(x.what), _shown(x.response)) for x in lines), (15, 25, 60))
