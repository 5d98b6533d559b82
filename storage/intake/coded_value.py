"""A value that came with a code becomes a reading: unit by its code, never by what was meant for display."""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType

from core.record.channels import Channel, Kind
from core.record.message import refuse
from core.record.reading import Reading, read_value
from storage.codes import Coding, unit_of_ucum

_WITH_COMPARATOR = re.compile(r"\s*(<=|>=|<|>|~)")
SELF_EVIDENT = frozenset({"pH", "fraction"})
"""Units that a value itself tells apart: 7.4 is no nmol/L, 35 no fraction."""


@dataclass(frozen=True, slots=True)
class CodeBook:
    """Codes that a ward's senders use and that are no LOINC, by 'system|code' or 'code', with their channels."""

    codes: Mapping[str, str] = field(default_factory=lambda: MappingProxyType({}))

    def channel(self, codings: list[Coding]) -> str | None:
        """The channel that a person gave one of the codes; empty where it is not wanted; None where nobody said."""
        said = [self.codes.get(code_key(c), self.codes.get(c[1])) for c in codings]
        return next((s for s in said if s), "" if "" in said else None)


def code_key(coding: Coding) -> str:
    """How a code is kept: with its system, where it has one.

    >>> code_key(("L", "GLU")), code_key(("", "GLU"))
    ('L|GLU', 'GLU')
    """
    system, code = coding
    return f"{system}|{code}" if system else code


def coded_reading(channel: Channel, text: str, unit_code: str, *, is_ucum: bool) -> Reading:
    """Read a value whose unit is `unit_code`: a UCUM code where `is_ucum`, else as our units are spelled.

    Raises:
        RecordError: `value.comparator`, `unit.missing`, `unit.unknown`, and as `read_value`.

    >>> from core.record.channels import channel
    >>> round(coded_reading(channel("paco2"), "6.2", "kPa", is_ucum=True).number, 1)
    46.5
    """
    if channel.kind is not Kind.NUMBER:
        return read_value(channel, text)
    refuse_limit(channel, text)
    if not unit_code.strip():
        if len(channel.units) > 1 and channel.unit not in SELF_EVIDENT:
            accepted = ", ".join(u.name for u in channel.units)
            raise refuse("unit.missing", channel=channel.key, value=text[:40], accepted=accepted)
        return read_value(channel, text)
    return read_value(channel, text, unit_name(channel, unit_code, is_ucum=is_ucum))


def refuse_limit(channel: Channel, text: str) -> None:
    """Refuse `> 60` and its like: a limit is no value.

    Raises:
        RecordError: `value.comparator`.
    """
    if _WITH_COMPARATOR.match(text):
        raise refuse("value.comparator", channel=channel.key, value=text[:40], accepted="one exact number")


def unit_name(channel: Channel, code: str, *, is_ucum: bool) -> str:
    """Our name of a unit that a sender codes.

    Raises:
        RecordError: `unit.unknown`.
    """
    found = unit_of_ucum(channel, code.strip())
    if found is not None:
        return found.name
    if is_ucum:
        accepted = ", ".join(unit.name for unit in channel.units) or "no unit"
        raise refuse("unit.unknown", channel=channel.key, unit=code[:40], accepted=accepted)
    return channel.unit_named(code).name
