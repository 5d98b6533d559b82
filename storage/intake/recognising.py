"""Which kept mapping a table fits, opened as that mapping says that it is written."""

from __future__ import annotations

from collections.abc import Mapping as Map
from dataclasses import dataclass, replace
from pathlib import Path

from core.record.message import RecordError
from storage.intake.findings import UnreadableFileError
from storage.intake.mapping import Mapping, fits, to_text
from storage.intake.table import Table, open_table
from storage.intake.writing import AS_FOUND, Writing


@dataclass(frozen=True, slots=True)
class Recognised:
    """A table, how it was opened, and the mapping that fits it.

    Where several fit that read it in different ways none is taken, and `several` names them: a person chooses.
    """

    table: Table
    said: Writing
    mapping: Mapping | None = None
    several: tuple[str, ...] = ()


def recognise(path: Path, kept: Map[str, Mapping], said: Writing = AS_FOUND) -> Recognised:
    """Open a table, and find the kept mapping that fits it. What a person says beats what a mapping says.

    A mapping that says how its tables are written is tried on the table as it says: by looking alone, another
    header might be found.

    Raises:
        UnreadableFileError: it is no table, or one that cannot be read safely.
        RecordError: what is said of it cannot be.
        OSError: it cannot be opened.
    """
    opened: dict[Writing, Table | UnreadableFileError | RecordError] = {}

    def table_as(wanted: Writing) -> Table | UnreadableFileError | RecordError:
        if wanted not in opened:
            known = opened.get(said)
            try:
                opened[wanted] = open_table(path, wanted, known.book if isinstance(known, Table) else None)
            except (UnreadableFileError, RecordError) as error:
                opened[wanted] = error
        return opened[wanted]

    found = table_as(said)
    fitting: dict[str, tuple[Mapping, Writing, Table]] = {}
    for name, mapping in kept.items():
        wanted = said.over(mapping.written)
        table = table_as(wanted) if mapping.header else found
        if isinstance(table, Table) and fits(mapping, table.header):
            fitting[name] = (mapping, wanted, table)
    ways = {to_text(replace(mapping, name="", header=())) for mapping, _, _ in fitting.values()}
    if len(ways) == 1:
        mapping, wanted, table = next(iter(fitting.values()))
        return Recognised(table, wanted, mapping)
    if not isinstance(found, Table):
        raise found
    return Recognised(found, said, None, tuple(fitting))
