"""The cautions as one text for the window, the command line, every printed sheet and every picture.

Plain strings without Qt: the command line and the print need no translator. `app.telling.cautions` translates them.
"""

from __future__ import annotations

from typing import Final

CAUTIONS: Final = (
    "Supports and never replaces clinical judgement: a qualified person decides.",
    "It is no alarm and no monitor: it knows only what was logged.",
    "Local policy and licensed practice come first. Thresholds marked *, 'from memory' or 'common practice' are to "
    "be confirmed locally.",
)
CAUTION: Final = " ".join(CAUTIONS)
"""All of them in one paragraph."""
REGULATION: Final = "A ward settles its regulatory position before it relies on flags."
"""Beside them at first start and in About, for who decides to use it."""
IN_SIGHT: Final = "No alarm, no monitor: it knows only what was logged."
"""What never leaves the window."""
