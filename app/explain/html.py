"""An explanation as rich text: parts under small headings, in the theme's sizes. Typed text is escaped."""

from __future__ import annotations

from collections.abc import Iterator
from html import escape

from app.explain.explanation import Explanation
from app.explain.findings import translate
from app.look.formats import unbroken
from app.look.theme import Theme
from app.telling.certainty import certainty_words


def html_of(explanation: Explanation, theme: Theme) -> str:
    """The explanation as rich text."""
    return "".join(_parts(explanation, theme))


def _parts(e: Explanation, theme: Theme) -> Iterator[str]:
    size = theme.px(theme.type.title)
    yield f'<p style="font-size:{size}px; font-weight:600; margin-bottom:2px">{escape(e.title)}</p>'
    if e.when:
        yield _quiet(e.when, theme)
    if e.reason:
        yield _headed(translate("explain", "Why there is none"), (e.reason,), theme)
    if e.doubt:
        yield _headed(translate("explain", "Doubt"), (e.doubt,), theme, strong=True)
    if e.formula:
        yield _headed(translate("explain", "Formula"), (e.formula,), theme)
    if e.rules:
        head = translate("explain", "How it was read") if e.formula else ""
        yield _headed(head, e.rules, theme)
    if e.inputs:
        yield _heading(translate("explain", "Made from"), theme) + _table(e.inputs, theme)
    if e.population:
        yield _headed(translate("explain", "For whom"), (e.population,), theme)
    if e.notes:
        yield _headed(translate("explain", "Keep in mind") if e.formula else "", e.notes, theme)
    if e.source:
        yield _headed(translate("explain", "Source"), (e.source,), theme)
    if e.sure:
        yield _headed(translate("explain", "How sure"), (certainty_words(e),), theme)


def _headed(head: str, lines: tuple[str, ...], theme: Theme, *, strong: bool = False) -> str:
    weight = "; font-weight:600" if strong else ""
    style = f"margin-top:0; margin-bottom:2px{weight}"
    body = "".join(f'<p style="{style}">{escape(unbroken(line))}</p>' for line in lines)
    return _heading(head, theme) + body


def _heading(text: str, theme: Theme) -> str:
    size = theme.px(theme.type.caption)
    style = f"color:{theme.colours.ink_quiet}; font-size:{size}px; margin-top:12px; margin-bottom:2px"
    return f'<p style="{style}">{escape(text)}</p>'


def _quiet(text: str, theme: Theme) -> str:
    return f'<p style="color:{theme.colours.ink_quiet}; margin-top:0; margin-bottom:2px">{escape(text)}</p>'


def _table(inputs: tuple[tuple[str, str, str], ...], theme: Theme) -> str:
    quiet, cell = theme.colours.ink_quiet, "padding-right:20px; padding-bottom:3px"
    rows = "".join(
        f'<tr><td style="color:{quiet}; {cell}">{escape(name)}</td>'
        f'<td style="{cell}">{escape(value)}</td><td style="color:{quiet}">{escape(when) or "&nbsp;"}</td></tr>'
        for name, value, when in inputs
    )
    return f'<table cellspacing=0 style="margin-top:0">{rows}</table>'
