"""The cautions, word for word the same at first start, in About and on every printed sheet."""

from __future__ import annotations

from PySide6.QtCore import QCoreApplication

translate = QCoreApplication.translate


def cautions() -> tuple[str, ...]:
    """The cautions, one sentence or two each."""
    return (
        translate(
            "cautions",
            "This tool supports clinical judgement and never replaces it. A qualified person decides.",
        ),
        translate(
            "cautions",
            "It is no alarm and no monitor. It knows only what was logged, and nothing before it was logged.",
        ),
        translate(
            "cautions",
            "Local policy and licensed practice come first. Thresholds marked 'from memory' or "
            "'common practice' are to be confirmed locally before anyone relies on them.",
        ),
        translate("cautions", "A ward settles its regulatory position before it relies on flags."),
    )


def intended_use() -> str:
    """What it is for, in one paragraph."""
    return translate(
        "cautions",
        "Luffmark keeps a shift's log of mask ventilation (BPAP, CPAP) for acute respiratory failure, computes "
        "whether each patient is responding, flags those that meet published escalation markers, and writes "
        "the handover.",
    )
