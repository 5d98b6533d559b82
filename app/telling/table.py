"""A table with its title and its text: what a chart is for screen readers and for copying."""

from __future__ import annotations

from dataclasses import dataclass


@dataclass(frozen=True, slots=True)
class Table:
    """A table with its title and its text."""

    title: str
    heads: tuple[str, ...]
    rows: tuple[tuple[str, ...], ...]
    text: str = ""

    def as_tsv(self) -> str:
        """Tab-separated, as spreadsheets paste it."""
        lines = [
            "\t".join(self.heads),
            *("\t".join(c.replace("\t", " ").replace("\n", " ") for c in row) for row in self.rows),
        ]
        return "\n".join(lines)
