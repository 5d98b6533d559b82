"""The language that the program speaks: one place through which every text made without Qt passes.

The window sends it through Qt's translators (`app.session.readers.speak_through_qt`); the command line leaves texts
as they are written. Clinical abbreviations and units are in no language.
"""

from __future__ import annotations

from collections.abc import Callable

_language: Callable[[str], str] = str


def speak(language: Callable[[str], str]) -> None:
    """Have every text pass through `language` from now on; without it texts stay as they are written."""
    global _language  # one program speaks one language
    _language = language


def in_language(text: str) -> str:
    """A text in the language that the program speaks."""
    return _language(text)
