"""The catalogue as a table for DEVELOPERS.md: `python -m core.figures.catalogue_table` writes it to stdout.

It stands there between `<!-- figures:begin -->` and `<!-- figures:end -->`; a test says when it is stale.
"""

from __future__ import annotations

import sys
from typing import Final

from core.figures.catalogue import SECTIONS
from core.figures.catalogue_entry import FigureEntry

BEGIN: Final = "<!-- figures:begin -->"
END: Final = "<!-- figures:end -->"
_HEAD: Final = "| figure | unit | formula | source | how sure | computed by | outside check | doubt |"


def table() -> str:
    """The whole table, section by section, as Markdown; it ends with a newline.

    >>> table().splitlines()[0]
    '### Acid-base'
    """
    parts = []
    for title, entries in SECTIONS.items():
        lines = [f"### {title}", "", _HEAD, "|" + "---|" * _HEAD.count(" | ") + "---|"]
        parts.append("\n".join([*lines, *(_row(entry) for entry in entries)]))
    return "\n\n".join(parts) + "\n"


def _row(entry: FigureEntry) -> str:
    cells = (
        f"{entry.name} (`{entry.key}`)", entry.unit, entry.formula, entry.source, entry.certainty,
        f"`{entry.function}`", f"`{entry.check}`", entry.doubt,
    )  # fmt: skip
    return "| " + " | ".join(cell.replace("|", "\\|") for cell in cells) + " |"


def replaced(document: str) -> str:
    """A document with the table between its markers brought up to date.

    Raises:
        ValueError: the markers are not there once each, in order.

    >>> replaced(f"a {BEGIN} old {END} z").endswith(f"{END} z")
    True
    """
    if document.count(BEGIN) != 1 or document.count(END) != 1 or document.index(BEGIN) > document.index(END):
        raise ValueError(f"the document needs {BEGIN} and then {END}, once each")
    before, rest = document.split(BEGIN)
    return f"{before}{BEGIN}\n{table()}{END}{rest.split(END)[1]}"


if __name__ == "__main__":
    sys.stdout.write(table())
