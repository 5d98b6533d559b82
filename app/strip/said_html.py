"""What stands under the line as rich text: every word of a person's or a file's goes through `escape`."""

from __future__ import annotations

from html import escape

from PySide6.QtCore import QCoreApplication

from app.look.formats import unbroken
from app.strip.preview_words import PreviewWords

translate = QCoreApplication.translate


def quiet(text: str, colour: str) -> str:
    """Words that stand back."""
    return f"<span style='color:{colour}'>{escape(unbroken(text))}</span>"


def marked(strong: str, rest: str) -> str:
    """What matters first, and the rest."""
    return f"<b>{escape(unbroken(strong))}</b> {escape(unbroken(rest))}"


def preview_html(words: PreviewWords, ink_quiet: str) -> str:
    """For whom and when, each value, what can act, and what is asked or how to record."""
    text = f"<b>{escape(words.head)}:</b> {escape(unbroken(', '.join(words.values)))}."
    if words.effects:
        text += f" {quiet(' '.join(words.effects), ink_quiet)}"
    if words.questions:
        return f"{text} <b>{escape(' '.join(words.questions))}</b>"
    return f"{text} {quiet(translate('LogStrip', 'Enter records.'), ink_quiet)}"


def completion_html(options: tuple[str, ...], ink_quiet: str) -> str:
    """What Tab would write, and what else could be meant."""
    first, *rest = options
    others = "&nbsp;&nbsp; ".join(escape(w) for w in rest)
    tab = escape(translate("LogStrip", "Tab:"))
    start = f"<span style='color:{ink_quiet}'>{tab}</span> <b>{escape(first)}</b>"
    return f"{start}&nbsp;&nbsp; <span style='color:{ink_quiet}'>{others}</span>"
