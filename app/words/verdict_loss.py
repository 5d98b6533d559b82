"""A verdict whose gain was lost, in words: the loss comes first, so that nobody reads "better" and stops there."""

from __future__ import annotations

from typing import Final

_SAID: Final[dict[str, str]] = {
    "better": "gain lost, still better",
    "worse": "worse, gain lost",
    "over-correction": "over-correction, gain lost",
    "mixed": "gain lost, mixed",
    "no clear change": "gain lost, no clear change",
}
LOST_SINCE: Final = "gain lost since, was better"
"""For a verdict of better whose gain a newer gas has lost: whether it is still better is not said."""


def with_loss(verdict: str, *, lost: bool) -> str:
    """The words of a verdict, e.g. `better`, with the gain that was lost.

    >>> with_loss("better", lost=True)
    'gain lost, still better'
    >>> with_loss("better", lost=False)
    'better'
    """
    return _SAID.get(verdict, f"gain lost, {verdict}") if lost else verdict
