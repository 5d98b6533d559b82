"""What a score lacks, and why an older value of it does not count: unsaid, it reads as if nobody had looked."""

from __future__ import annotations

from app.words import Reader, sentence
from app.words.template import quantity_name
from core.judgement.shapes import ScoreFigure


def missing_names(score: ScoreFigure) -> str:
    """The names of the missing inputs.

    >>> missing_names(ScoreFigure(missing=("gcs", "hr")))
    'GCS, heart rate'
    """
    return ", ".join(quantity_name(m) for m in score.missing)


def why_missing(score: ScoreFigure, reader: Reader) -> tuple[str, ...]:
    """Why each missing input does not count though an older value was logged; nothing of one that never was."""
    return tuple(sentence(part.reason, reader) for part in score.inputs.values() if part.reason is not None)
