"""What kind of file it is, by its first bytes and never by its name alone."""

from __future__ import annotations

import csv
from enum import StrEnum
from pathlib import Path

from storage.intake.columns import REQUIRED

_HEAD = 4096
_MEANT_AS_LOG = 5
"""Names of the log file's header that show it is meant as one: what it lacks is then said by its reader."""
_HL7 = (b"MSH", b"FHS", b"BHS")


class FileKind(StrEnum):
    """The readers there are."""

    LOG_CSV = "log_csv"
    TABLE = "table"
    HL7V2 = "hl7v2"
    FHIR = "fhir"


def kind_of(path: Path | str) -> FileKind:
    """The kind of a file. What is neither of ours nor results is a table, whose reader says what is wrong with it.

    Raises:
        OSError: it cannot be opened.
    """
    with Path(path).open("rb") as file:
        head = file.read(_HEAD)
    plain = head.removeprefix(b"\xef\xbb\xbf").lstrip(b"\x0b \t\r\n")
    if plain.startswith(_HL7) and len(plain) > 3 and not plain[3:4].isalnum():
        return FileKind.HL7V2
    if plain.startswith((b"{", b"[")):
        return FileKind.FHIR
    first = plain.split(b"\n", 1)[0].decode("utf-8", "replace").rstrip("\r")
    try:
        names = {c.strip().lower() for c in next(csv.reader([first]), [])}
    except csv.Error:
        names = set()
    return FileKind.LOG_CSV if len(names & set(REQUIRED)) >= _MEANT_AS_LOG else FileKind.TABLE
