"""Text in a CSV file that a spreadsheet must not run: an apostrophe before it on the way out, gone on the way in."""

from __future__ import annotations

_FORMULA = ("=", "+", "-", "@", "\uff1d", "\uff0b", "\uff0d", "\uff20", "\t", "\r", "\n")
"""The full-width signs too: a spreadsheet set to a language that writes them reads them as the others."""


def guarded(text: str) -> str:
    """The text as written to a file.

    >>> guarded("=1+1"), guarded("Bed 3"), guarded("'=")
    ("'=1+1", 'Bed 3', "''=")
    """
    return "'" + text if _needs(text) else text


def unguarded(text: str) -> str:
    """The text as it was before `guarded`.

    >>> unguarded("'=1+1"), unguarded("'tis"), unguarded("''=")
    ('=1+1', "'tis", "'=")
    """
    return text[1:] if text.startswith("'") and _needs(text[1:]) else text


def _needs(text: str) -> bool:
    return text.lstrip("'").startswith(_FORMULA)
