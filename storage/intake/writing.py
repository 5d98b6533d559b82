"""What a person says of how a table is written: encoding, delimiter, line of the header, sheet."""

from __future__ import annotations

import codecs
from dataclasses import dataclass

from core.record.message import refuse

_NAMES = {"comma": ",", "semicolon": ";", "tab": "\t", "\\t": "\t", "bar": "|", "space": " ", "colon": ":"}
_ACCEPTED = "one character that is no letter, digit or quote, or comma, semicolon, tab, bar, space, colon"
_NO_DELIMITER = '"\r\n\x00'


@dataclass(frozen=True, slots=True)
class Writing:
    """What is empty is found by looking. `header_line` counts from 1; `sheet` is of spreadsheets alone."""

    encoding: str = ""
    delimiter: str = ""
    header_line: int = 0
    sheet: str = ""

    def over(self, other: Writing) -> Writing:
        """This, and what the other says where this is silent.

        >>> Writing(delimiter=":").over(Writing("cp437", ";")) == Writing("cp437", ":")
        True
        """
        return Writing(self.encoding or other.encoding, self.delimiter or other.delimiter,
                       self.header_line or other.header_line, self.sheet or other.sheet)  # fmt: skip


AS_FOUND = Writing()


def delimiter_said(text: str) -> str:
    """The character that a person means by a delimiter, typed or named.

    Raises:
        RecordError: `table.delimiter`.

    >>> delimiter_said("tab"), delimiter_said("^"), delimiter_said("")
    ('\\t', '^', '')
    """
    mark = _NAMES.get(text.strip().casefold(), text.strip(" ") or text[:1])
    if len(mark) > 1 or mark.isalnum() or (mark and mark in _NO_DELIMITER):
        raise refuse("table.delimiter", value=text[:20], accepted=_ACCEPTED)
    return mark


def check_writing(said: Writing) -> None:
    """Refuse an encoding or delimiter that cannot be one.

    Raises:
        RecordError: `table.encoding_unknown`, `table.delimiter`, `table.header_line`.
    """
    delimiter_said(said.delimiter)
    if said.header_line < 0:
        raise refuse("table.header_line", value=said.header_line, accepted="a line from 1 on")
    if not said.encoding:
        return
    try:
        "".encode(said.encoding)
        codecs.getincrementaldecoder(said.encoding)
    except (LookupError, ValueError):
        raise refuse("table.encoding_unknown", value=said.encoding[:40],
                     accepted="e.g. utf-8, cp1252, iso8859-15, cp437, utf-16") from None  # fmt: skip
