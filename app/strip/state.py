"""What the log strip is at."""

from enum import StrEnum


class State(StrEnum):
    """What the line under the strip says."""

    IDLE = "idle"
    AWAITED = "awaited"
    READY = "ready"
    ASKING = "asking"
    REFUSED = "refused"
    TOLD = "told"
    UNDOING = "undoing"


NOT_SHOWN = (State.REFUSED, State.IDLE, State.UNDOING)
"""What the line would record does not stand under it."""
