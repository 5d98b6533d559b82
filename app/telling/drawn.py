"""How a gas that judges nothing was drawn: the mask off, soon after it went on again, or after support ended.

The rule is the same for all three; the words must not say that the mask was off where it was on.
"""

from __future__ import annotations

from app.look.formats import minutes
from app.telling.language import in_language
from core.judgement.shapes import GasFigure


def drawn_word(gas: GasFigure) -> str:
    """E.g. "drawn while the mask was off"; "" for a gas on steady support.

    >>> drawn_word(GasFigure(1_800_000_000, off_support=True, back_on_at=1_500_000_000))
    'drawn 5 min after the mask went on again'
    """
    if not gas.off_support:
        return ""
    if gas.back_on_minutes is not None:
        told = in_language("drawn {length} after the mask went on again")
        return told.format(length=minutes(gas.back_on_minutes))
    if gas.support_ended:
        return in_language("drawn after support ended")
    return in_language("drawn while the mask was off")


def drawn_short(gas: GasFigure) -> str:
    """The same where there is little room, e.g. "5 min after mask on"; "" for a gas on steady support."""
    if not gas.off_support:
        return ""
    if gas.back_on_minutes is not None:
        return in_language("{length} after mask on").format(length=minutes(gas.back_on_minutes))
    return in_language("after support") if gas.support_ended else in_language("with mask off")


def fio2_source(gas: GasFigure) -> str:
    """Which FiO2 a gas off steady support was taken to be drawn on; "" elsewhere."""
    if not gas.off_support or gas.fio2 is None:
        return ""
    return in_language("given with the gas" if gas.fio2_from == "gas" else "as set on the device")
