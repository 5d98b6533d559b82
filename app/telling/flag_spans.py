"""A flag that was met with short gaps: its evidence tells of the newest stretch, the flag of all of them."""

from __future__ import annotations

from app.words import Reader
from core.judgement.shapes import FlagFigure


def with_gaps(flag: FlagFigure, reader: Reader) -> str:
    """That a flag was met before the stretch its evidence tells of, with gaps too short to end it; "" elsewhere."""
    for told in flag.evidence:
        since = told.values.get("since")
        if told.key == "evidence.sustained" and isinstance(since, int) and since > flag.since:
            return reader.translate("With short gaps since {time}.").format(time=reader.time(flag.since))
    return ""
