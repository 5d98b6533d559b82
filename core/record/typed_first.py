"""What people type first: words that can mean one thing are taken so, those that can mean two are asked about."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence

from core.record.channels import CHANNELS, MODES

MODE_WORDS: Mapping[str, str] = {
    "st": "BPAP-ST", "hfn": "high-flow nasal", "hfnc": "high-flow nasal", "hfno": "high-flow nasal",
} | {m.casefold(): m for m in MODES}  # fmt: skip
"""A mode by the words that name it."""
_SAME: Mapping[str, tuple[str, ...]] = {
    "vomited": ("vomiting",), "pressure support": ("ps",), "high flow": ("high-flow", "nasal"),
    "high-flow": ("high-flow", "nasal"), "high flow nasal": ("high-flow", "nasal"),
    "high-flow nasal": ("high-flow", "nasal"),
}  # fmt: skip
"""Words that mean what others mean, and nothing else."""
INSTEAD: Mapping[str, str] = {
    "gas": "ph 7.24 paco2 62 pao2 58, or the form of a blood gas (F11)",
    "abg": "ph 7.24 paco2 62 pao2 58, or the form of a blood gas (F11)",
    "bed": "label Bed 12, or the form of the patient's facts (Shift+F11)",
    "ceiling": "ceiling of care no intubation, or the form of the patient's facts (Shift+F11)",
    "started": "support started 01:20",
}
"""What is said in another way on the line."""
_RATES = (("br", "rate_set"), ("rr", "rr"), ("hr", "hr"))
_AIR = ("air", "ra")
_NUMBER = re.compile(r"\d+(?:[.,]\d+)?")
_NAMED = re.compile(r"([A-Za-z][A-Za-z0-9_]*)[:=](.*)")
_SIDE = r"\d+(?:[.,]\d+)?"
_LEFT, _RIGHT = re.compile(rf"{_SIDE}/?"), re.compile(rf"/?{_SIDE}")


def same_as(words: Sequence[str]) -> tuple[tuple[str, ...], int]:
    """What the first words mean in the grammar's own words, and how many they are; ((), 0) where they are its own.

    >>> same_as(["high", "flow", "60"]), same_as(["pressure", "support", "10"]), same_as(["rr", "20"])
    ((('high-flow', 'nasal'), 2), (('ps',), 2), ((), 0))
    """
    for count in (3, 2, 1):
        same = _SAME.get(" ".join(words[:count]).casefold())
        if same is not None:
            return same, min(count, len(words))
    return (), 0


def two_meanings(words: Sequence[str], mode: str | None = None) -> tuple[str, str] | None:
    """The words that could mean two things, and how to say each; None where the first could not. `mode`: the one
    named before them.

    >>> two_meanings(["rate", "16"])
    ('rate 16', 'br 16 (backup rate) | rr 16 (respiratory rate) | hr 16 (heart rate)')
    """
    word = words[0].casefold()
    if word == "rate":
        number = words[1] if len(words) > 1 and _NUMBER.fullmatch(words[1]) else ""
        shown = number or "16"
        ways = [f"{short} {shown} ({CHANNELS[key].name.lower()})" for short, key in _RATES if _can_be(key, number)]
        return f"{words[0]} {number}".strip(), " | ".join(ways)
    if word in _AIR or (word in ("room", "on") and len(words) > 1 and words[1].casefold() in _AIR):
        said = words[0] if word in _AIR else " ".join(words[:2])
        return said, "fio2 21 (support with air) | mask off (air without support)"
    if mode == "high-flow nasal" and _NUMBER.fullmatch(words[0]):
        return words[0], f"flow {words[0]} (L/min) | fio2 {words[0]}%"
    return None


def _can_be(key: str, number: str) -> bool:
    limits = CHANNELS[key].hard
    return not number or limits is None or limits[0] <= float(number.replace(",", ".")) <= limits[1]


def named_apart(word: str, names: Mapping[str, object]) -> tuple[str, ...] | None:
    """A name and what stands against it behind a colon: `spo2:91`; None where the word is none.

    >>> named_apart("spo2:91", {"spo2": 0}), named_apart("note:", {"note": 0}), named_apart("i:e", {})
    (('spo2', '91'), ('note',), None)
    """
    match = _NAMED.fullmatch(word)
    if match is None or match[1].casefold() not in names:
        return None
    return (match[1], match[2]) if match[2] else (match[1],)


def spaced_pair(words: Sequence[str]) -> tuple[str, int]:
    """A pair of pressures written with spaces, and how many words it took; ("", 0) where none stands first.

    >>> spaced_pair(["18", "/", "6", "40"]), spaced_pair(["18/", "6"]), spaced_pair(["18/6", "40"])
    (('18/6', 3), ('18/6', 2), ('', 0))
    """
    if len(words) > 2 and words[1] == "/" and _NUMBER.fullmatch(words[0]) and _NUMBER.fullmatch(words[2]):
        return f"{words[0]}/{words[2]}", 3
    if len(words) > 1 and _LEFT.fullmatch(words[0]) and _RIGHT.fullmatch(words[1]):
        pair = words[0] + words[1]
        if pair.count("/") == 1 and (words[0].endswith("/") or words[1].startswith("/")):
            return pair, 2
    return "", 0
