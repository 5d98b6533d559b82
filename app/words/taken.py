"""How a value was taken, as part of a sentence: the span of a median, or the moment of one value."""

from typing import Final

TAKEN: Final = "[[median from {since:time} to {at:clock}]][[!since|{at:time}]]"
BEFORE_TAKEN: Final = "[[median from {before_since:time} to {before_at:clock}]][[!before_since|{before_at:time}]]"
