"""What the word being typed could become: channels, modes and events that the line understands."""

from __future__ import annotations

import re

from core.record.channels import CHANNELS, MODES, Channel, Group, Kind
from core.record.line_words import words_of_channels

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
    "support started",
    "note",
)
"""What a night types most stands first."""
_OXYGEN = {"o2": CHANNELS["o2_flow"], "oxygen": CHANNELS["o2_flow"]}
_VALUE = re.compile(r"([+-]?\d+(?:[.,]\d+)?)(\D*)")


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
    """What the word at the cursor could become: a unit behind a value, a choice behind its channel, else a channel,
    mode or event; nothing for times and whole words.

    >>> completions("ipa", 3), completions("paco2 8.3 k", 11), completions("acvpu v", 7), completions("mask o", 6)
    (('ipap',), ('kPa',), ('voice',), ('off', 'on'))
    """
    start, token = token_at(text, cursor)
    before = text[:start].casefold().split()
    if not token or before[-1:] in (["note"], ["told"], ["drug"]):
        return ()
    low = token.casefold()
    return (_choices(before, low) or _rest_of_words(before, low) or _units(before, token) + _words(low))[:most]


def _rest_of_words(before: list[str], low: str) -> tuple[str, ...]:
    """The rest of names of several words that begin with what stands there: `mask o`."""
    for count in (2, 1):
        typed = " ".join([*before[-count:], low])
        if len(before) >= count and (found := [w for w in words() if w.startswith(typed) and w != typed]):
            return tuple(w[len(typed) - len(low) :] for w in found)
    return ()


def _words(low: str) -> tuple[str, ...]:
    if not low[0].isalpha() or low in words_of_channels():
        return ()
    return tuple(w for w in words() if w.startswith(low) and w != low)


def _units(before: list[str], token: str) -> tuple[str, ...]:
    """Units that a value may have, written behind it or at it: `8.3 k`, `8.3k`."""
    match = _VALUE.fullmatch(token)
    number, low = (match[1], match[2].casefold()) if match else ("", token.casefold())
    named = before if match else before[:-1] if before and _VALUE.fullmatch(before[-1]) else []
    channel = _named(named)
    if channel is None or channel.kind is not Kind.NUMBER or not low or not low[0].isalpha():
        return ()
    names = (u.name for u in channel.units if u.name.casefold() != channel.key)  # pH is no unit to be typed
    return tuple(f"{number}{n}" for n in names if n.casefold().startswith(low) and n.casefold() != low)


def _choices(before: list[str], low: str) -> tuple[str, ...]:
    """The rest of choices that begin with what stands behind their channel."""
    for count in range(len(before), 0, -1):
        channel = _named(before[:count])
        if channel is None or channel.kind is not Kind.CHOICE:
            continue
        typed = " ".join([*before[count:], low])
        skip = len(typed) - len(low)
        return tuple(c[skip:] for c in channel.choices if c.casefold().startswith(typed) and c.casefold() != typed)
    return ()


def _named(before: list[str]) -> Channel | None:
    """The channel that the last words name, three words first."""
    known = words_of_channels() | _OXYGEN
    return next((known[n] for k in (3, 2, 1) if len(before) >= k and (n := " ".join(before[-k:])) in known), None)


def completed(text: str, cursor: int, word: str) -> tuple[str, int]:
    """The text with the word under the cursor made whole, and where the cursor stands then.

    >>> completed("ipa", 3, "ipap")
    ('ipap ', 5)
    """
    start, _ = token_at(text, cursor)
    tail = text[cursor:].lstrip()
    made = f"{text[:start]}{word} {tail}"
    return made, start + len(word) + 1
