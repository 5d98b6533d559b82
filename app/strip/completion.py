"""What the word being typed could become: channels, modes and events that the line understands."""

from __future__ import annotations

from core.record.channels import CHANNELS, MODES, Group, Kind
from core.record.log_line import words_of_channels

_FIRST = (
    "ipap",
    "epap",
    "fio2",
    "rr",
    "spo2",
    "ph",
    "paco2",
    "pao2",
    "gas sent",
    "mask off",
    "mask on",
    "note",
)
"""What a night types most stands first."""


def words() -> tuple[str, ...]:
    """Every word offered: the common ones, then settings, vitals, gas, device, events, profile."""
    order = (Group.SETTING, Group.VITAL, Group.GAS, Group.DEVICE, Group.EVENT, Group.PROFILE)
    rest = [
        c.key.replace("_", " ") if c.kind is Kind.MARK else c.key
        for g in order
        for c in CHANNELS.values()
        if c.group is g
    ]
    return tuple(dict.fromkeys((*_FIRST, *rest, *(m.casefold() for m in MODES))))


def token_at(text: str, cursor: int) -> tuple[int, str]:
    """Where the word under the cursor begins, and the word up to the cursor.

    >>> token_at("14:20 ipa", 9)
    (6, 'ipa')
    """
    start = text.rfind(" ", 0, cursor) + 1
    return start, text[start:cursor]


def completions(text: str, cursor: int, most: int = 6) -> tuple[str, ...]:
    """What the word at the cursor could become; nothing for numbers, times and whole words.

    >>> completions("ipa", 3)
    ('ipap',)
    """
    start, token = token_at(text, cursor)
    low = token.casefold()
    if not low or not low[0].isalpha() or low in words_of_channels():
        return ()
    if start > 0 and text[:start].split()[-1:] in (["note"], ["told"], ["drug"]):
        return ()
    return tuple(w for w in words() if w.startswith(low) and w != low)[:most]


def completed(text: str, cursor: int, word: str) -> tuple[str, int]:
    """The text with the word under the cursor made whole, and where the cursor stands then.

    >>> completed("ipa", 3, "ipap")
    ('ipap ', 5)
    """
    start, _ = token_at(text, cursor)
    tail = text[cursor:].lstrip()
    made = f"{text[:start]}{word} {tail}"
    return made, start + len(word) + 1
