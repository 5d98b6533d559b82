"""The header of the log file: which column stands where."""

from __future__ import annotations

import csv
from collections.abc import Sequence
from dataclasses import dataclass

from storage.apostrophe import unguarded
from storage.intake.findings import unreadable

REQUIRED = ("episode", "at", "channel", "value", "unit", "by", "note")
OPTIONAL = ("recorded_at", "id", "replaces", "action", "reason", "zone", "leak_definition")
ACCEPTED = ",".join(REQUIRED) + " [," + ",".join(OPTIONAL) + "]"


@dataclass(frozen=True, slots=True)
class Columns:
    """The columns of one file, in its order."""

    names: tuple[str, ...]

    def index(self, name: str) -> int | None:
        """Where a column stands, or None where the file has none of that name."""
        return self.names.index(name) if name in self.names else None

    def row(self, cells: Sequence[str]) -> dict[str, str]:
        """One row by column name, with an empty text for columns the file has not."""
        found = dict.fromkeys((*REQUIRED, *OPTIONAL), "")
        found.update(zip(self.names, (c.strip() for c in cells), strict=True))
        for name in ("episode", "by", "note", "reason"):
            if found[name].startswith("'"):
                found[name] = unguarded(found[name])
        return found


def read_header(line: str) -> Columns:
    """The columns named by the first line.

    Raises:
        UnreadableFileError: `header.*` naming what is missing, unknown or double.
    """
    try:
        cells = next(csv.reader([line], strict=True), [])
    except csv.Error as error:
        raise unreadable(1, line[:80], "header.missing", detail=str(error), accepted=ACCEPTED) from None
    names = tuple(c.strip().lower() for c in cells)
    missing = [n for n in REQUIRED if n not in names]
    if missing:
        key = "header.missing" if len(missing) == len(REQUIRED) else "header.lacks"
        raise unreadable(1, line[:80], key, missing=", ".join(missing), accepted=ACCEPTED)
    unknown = [n for n in names if n not in REQUIRED and n not in OPTIONAL]
    if unknown:
        raise unreadable(1, unknown[0][:80], "header.unknown", accepted=ACCEPTED)
    if len(set(names)) != len(names):
        raise unreadable(1, line[:80], "header.double", accepted=ACCEPTED)
    return Columns(names)
