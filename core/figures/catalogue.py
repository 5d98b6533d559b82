"""The catalogue of figures: what is computed, by which formula, from which source, how sure, and who checks it.

It feeds the table in DEVELOPERS.md and the window's explanation of a figure. A new figure needs its line in one
of the `catalogue_*` modules; a test fails while a formula has none.
"""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType
from typing import Final

from core.figures.catalogue_breathing import COURSE, SCORES, VENTILATION
from core.figures.catalogue_course import LEAK, MEASURED, SUPPORT, TRENDS
from core.figures.catalogue_entry import CERTAINTIES, Certainty, FigureEntry
from core.figures.catalogue_gases import ACID_BASE, COMPENSATION
from core.figures.catalogue_oxygen import OXYGENATION, SATURATION

SECTIONS: Final[Mapping[str, tuple[FigureEntry, ...]]] = MappingProxyType(
    {
        "Acid-base": ACID_BASE,
        "Compensation, consistency, specimen, temperature": COMPENSATION,
        "Oxygenation": OXYGENATION,
        "Saturation": SATURATION,
        "Ventilation": VENTILATION,
        "Measured by the device, checked and expected": MEASURED,
        "Expected course of PaCO2": COURSE,
        "Time on support": SUPPORT,
        "Trends": TRENDS,
        "Leak": LEAK,
        "Scores": SCORES,
    }
)

CATALOGUE: Final[Mapping[str, FigureEntry]] = MappingProxyType(
    {entry.key: entry for entries in SECTIONS.values() for entry in entries}
)


def figure(key: str) -> FigureEntry:
    """The catalogue's line of a figure.

    Raises:
        KeyError: no figure of that key.

    >>> figure("pf").formula
    'PaO2 / FiO2'
    """
    return CATALOGUE[key]


__all__ = ["CATALOGUE", "CERTAINTIES", "SECTIONS", "Certainty", "FigureEntry", "figure"]
