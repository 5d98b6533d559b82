"""Rows of a log file as tests write them: the header, a moment, and what reads rows."""

from collections.abc import Callable

from storage.intake.findings import Intake

HEADER = "episode,at,channel,value,unit,by,note"
FULL = HEADER + ",recorded_at,id,replaces,action,reason,zone"
AT = "2026-03-28T01:00:00+00:00"
Reader = Callable[..., Intake]
"""Reads rows under a header as a file: `(*rows, header=HEADER, existing=None, raw=None)`."""


def refused(intake: Intake) -> list[tuple[int, str, str]]:
    """What was refused: line, column, and the key of why."""
    return [(r.line, r.column, r.message.key) for r in intake.refusals]
