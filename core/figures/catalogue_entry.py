"""One line of the catalogue: what a figure is, where it comes from, and how sure that is."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal, get_args

Certainty = Literal["confirmed", "secondary", "from memory", "computed here", "common practice"]
"""confirmed: read in the paper, abstract, guideline or standard. secondary: read in another's account of it.
from memory: not confirmed; to be checked locally before clinical use. computed here: follows from the rest.
common practice: no source found."""

CERTAINTIES: tuple[str, ...] = get_args(Certainty)


@dataclass(frozen=True, slots=True)
class FigureEntry:
    """A figure as the catalogue and the window's explanation know it.

    `function` is the full dotted name of what computes it; `check` is the test that holds it to something
    outside (`file::test`). `doubt` is a sentence on its limits, or empty.
    """

    key: str
    name: str
    unit: str
    formula: str
    source: str
    certainty: Certainty
    function: str
    check: str
    doubt: str = ""

    @property
    def module(self) -> str:
        """The module that computes it."""
        return self.function.rpartition(".")[0]
