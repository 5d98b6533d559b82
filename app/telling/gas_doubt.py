"""That a gas is in doubt, said beside its state wherever it stands: a state alone would look as sure as any other."""

from __future__ import annotations

from app.telling.phrases import translate
from core.judgement.shapes import GasFigure


def rests_on_doubt(gas: GasFigure) -> bool:
    """Whether its state cannot be relied on: values that hardly belong together, or one that nobody confirmed.

    An unusual value that somebody confirmed keeps its mark alone.
    """
    return gas.unconfirmed or gas.implausible is not None


def state_in_doubt(gas: GasFigure, state: str) -> str:
    """The state with its doubt before it, where a narrow place cannot cut it off: doubtful: severe."""
    return translate("doubt", "doubtful: {state}").format(state=state) if rests_on_doubt(gas) else state


def doubt_reason(gas: GasFigure) -> str:
    """What makes a gas doubtful, the worst first; "" where nothing does."""
    if gas.implausible is not None:
        return translate("doubt", "its values hardly belong together")
    if gas.unconfirmed:
        return translate("doubt", "a value that nobody confirmed")
    if gas.doubt:
        return translate("doubt", "outside usual limits, confirmed")
    return translate("doubt", "two corrections differ") if gas.disputed else ""


def doubt_word(gas: GasFigure) -> str:
    """That a gas is doubtful and why; "" where it is not."""
    reason = doubt_reason(gas)
    return translate("doubt", "doubtful: {reason}").format(reason=reason) if reason else ""
