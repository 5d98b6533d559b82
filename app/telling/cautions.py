"""The cautions in the reader's language; the text is that of the command line, of print and of pictures."""

from __future__ import annotations

from PySide6.QtCore import QCoreApplication

from app.telling.caution_texts import CAUTIONS, IN_SIGHT, REGULATION

translate = QCoreApplication.translate


def cautions() -> tuple[str, ...]:
    """The cautions, one sentence or two each, and what a ward settles before it uses this."""
    return tuple(translate("cautions", text) for text in (*CAUTIONS, REGULATION))


def caution_in_sight() -> str:
    """The line that stands in the window on every page."""
    return translate("cautions", IN_SIGHT)


def intended_use() -> str:
    """What it is for, in one paragraph."""
    return translate(
        "cautions",
        "Luffmark keeps a shift's log of mask ventilation (BPAP, CPAP) for acute respiratory failure, computes "
        "whether each patient is responding, flags those that meet published escalation markers, and writes "
        "the handover.",
    )
