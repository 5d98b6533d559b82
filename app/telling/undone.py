"""Why a flag that was raised stands no more, though nothing ended it: the record is another one now."""

from __future__ import annotations

from app.telling.language import in_language


def undone_word() -> str:
    """What undid a flag. A value typed late does it as a correction does: who typed late has corrected nothing.

    >>> undone_word()
    'undone by what was logged later or corrected'
    """
    return in_language("undone by what was logged later or corrected")
