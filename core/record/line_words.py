"""The words of a typed line before they are read: which names a word may begin with, and words written as one."""

from __future__ import annotations

import re
from collections.abc import Mapping

from core.record.channels import CHANNELS, Channel, Kind

_BEGINS_A_VALUE = re.compile(r"\d|[.,]\d")


_MOST_WORDS = 3
"""Words that the name of a channel may have on the line."""


def words_of_channels() -> dict[str, Channel]:
    """Every word that names a channel on the line: keys, keys with spaces, short words, names as shown."""
    found: dict[str, Channel] = {}
    for c in CHANNELS.values():
        for word in (c.key, c.key.replace("_", " "), *c.short):
            found.setdefault(word, c)
    for c in CHANNELS.values():
        name = c.name.casefold()
        if len(name.split()) <= _MOST_WORDS and name.replace(" ", "").isalnum():
            found.setdefault(name, c)
    return found


CHANNEL_WORDS: Mapping[str, Channel] = words_of_channels()
_WITH_NUMBERS = frozenset({w for w, c in CHANNEL_WORDS.items() if c.kind is Kind.NUMBER} | {"ps", "o2", "oxygen"})


def parted(word: str) -> tuple[str, str] | None:
    """A name and the number written against it, or None where the word is none or could be parted in two ways.

    >>> parted("rr28"), parted("spo291"), parted("ph7,31"), parted("paco29.2kpa"), parted("maskoff")
    (('rr', '28'), ('spo2', '91'), ('ph', '7,31'), ('paco2', '9.2kpa'), None)
    """
    low = word.casefold()
    ways = [(low[:n], word[n:]) for n in range(1, len(low)) if low[:n] in _WITH_NUMBERS
            and _BEGINS_A_VALUE.match(word[n:])]  # fmt: skip
    return ways[0] if len(ways) == 1 else None


def names_beginning(word: str) -> tuple[str, ...]:
    """The names of several words whose first is `word`: what may stand behind it.

    >>> names_beginning("mask")[:2]
    ('mask on', 'mask off')
    """
    return tuple(w for w in CHANNEL_WORDS if w.startswith(f"{word.casefold()} "))
