"""What is asked before support begins: readiness, absolute and relative contraindications, each with its source.

Items without a source are marked `common practice`. An item answered from a value (pH, GCS) is not asked: the
value answers it.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Final

if TYPE_CHECKING:

    def QT_TRANSLATE_NOOP(context: str, text: str) -> str:  # the stub says object
        """Mark a text for translation and give it back."""

else:
    from PySide6.QtCore import QT_TRANSLATE_NOOP


@dataclass(frozen=True, slots=True)
class Item:
    """One question. `channel` keeps the answer; `good` is the answer that lets support begin without a remark."""

    channel: str
    kind: str
    good: str
    source: str
    sure: str


READY: Final = QT_TRANSLATE_NOOP("readiness", "Readiness")
ABSOLUTE: Final = QT_TRANSLATE_NOOP("readiness", "Absolute contraindications")
RELATIVE: Final = QT_TRANSLATE_NOOP("readiness", "Relative contraindications")
KINDS: Final = (ABSOLUTE, RELATIVE, READY)

_BTS = "BTS/ICS 2016, Thorax 71 S2"
ITEMS: Final = (
    Item("facial_injury", ABSOLUTE, "no", _BTS, "secondary"),
    Item("airway_obstruction", ABSOLUTE, "no", _BTS, "secondary"),
    Item("pneumothorax", ABSOLUTE, "no", _BTS, "from memory"),
    Item("confused", RELATIVE, "no", _BTS, "secondary"),
    Item("cognitive_impairment", RELATIVE, "no", _BTS, "secondary"),
    Item("treated_first", READY, "yes", _BTS, "confirmed"),
    Item("chest_film", READY, "yes", "no source found", "common practice"),
    Item("monitoring", READY, "yes", "BTS Quality Standards 2018, BMJ Open Respir Res 5:e000283", "secondary"),
)
"""The decision on escalation before support begins (the same standards, secondary) is asked by its own fields."""


@dataclass(frozen=True, slots=True)
class Measured:
    """A relative contraindication that a value answers."""

    channel: str
    below: float
    source: str
    sure: str


MEASURED: Final = (
    Measured("ph", 7.15, _BTS, "secondary"),
    Measured("gcs", 8.0, _BTS, "secondary"),
)


def of_kind(kind: str) -> tuple[Item, ...]:
    """The items of a kind, in order."""
    return tuple(i for i in ITEMS if i.kind == kind)


def answered_against(answers: dict[str, str], kind: str) -> tuple[str, ...]:
    """The channels of a kind whose answer speaks against beginning.

    >>> answered_against({"facial_injury": "yes", "pneumothorax": "not known"}, ABSOLUTE)
    ('facial_injury',)
    """
    return tuple(i.channel for i in of_kind(kind) if answers.get(i.channel) == ("yes" if i.good == "no" else "no"))
