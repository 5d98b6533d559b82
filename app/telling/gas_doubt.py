"""That a gas is in doubt, said beside its state wherever it stands: a state alone would look as sure as any other."""

from __future__ import annotations

from app.telling.phrases import translate
from core.judgement.shapes import GasFigure
from core.record.channels import CHANNELS


def rests_on_doubt(gas: GasFigure) -> bool:
    """Whether its state cannot be relied on: values that hardly belong together, one that nobody confirmed, or two
    that were recorded for one moment and differ.

    An unusual value that somebody confirmed keeps its mark alone.
    """
    return gas.in_doubt


def state_in_doubt(gas: GasFigure, state: str) -> str:
    """The state with its doubt before it, where a narrow place cannot cut it off: doubtful: severe."""
    return translate("doubt", "doubtful: {state}").format(state=state) if rests_on_doubt(gas) else state


def doubt_reason(gas: GasFigure) -> str:
    """What makes a gas doubtful, the worst first; "" where nothing does."""
    if gas.implausible is not None:
        return translate("doubt", "its values hardly belong together")
    if gas.unconfirmed:
        return translate("doubt", "a value that nobody confirmed")
    if gas.disputed:
        return rivals_word(gas) or translate("doubt", "two corrections differ")
    return translate("doubt", "outside usual limits, confirmed") if gas.doubt else ""


def rivals_word(gas: GasFigure) -> str:
    """What else was recorded for the moment of a gas: "pH 7.19 was recorded for it too"; "" where nothing was."""
    if not gas.rivals:
        return ""
    values = ", ".join(f"{CHANNELS[key].name} {text}" for key, text in gas.rivals)
    return translate("doubt", "{values} was recorded for it too").format(values=values)


def doubt_word(gas: GasFigure) -> str:
    """That a gas is doubtful and why; "" where it is not."""
    reason = doubt_reason(gas)
    return translate("doubt", "doubtful: {reason}").format(reason=reason) if reason else ""
