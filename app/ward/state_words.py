"""The state of an episode at the end of its lane, and a shorter form of it for where there is little room."""

from __future__ import annotations

from app.telling.gas_doubt import state_in_doubt
from app.telling.headline import gas_state_word, off_mask_word, pf_word, state_now
from app.telling.phrases import translate
from app.words import Reader
from app.words.short_forms import ph_as_reported
from core.judgement.shapes import EpisodeFigures, GasFigure

_ACID = ("severe", "acidotic")


def state_word(f: EpisodeFigures, gas: GasFigure | None, reader: Reader) -> str:
    """The state; a mask that is off comes first, since no setting acts then. `gas`: the newest that is not venous."""
    if off := off_mask_word(f, reader.zone):  # a state that is none of acidosis is left to its shape
        if gas is None or gas.state not in _ACID:
            return off
        return f"{off}; {state_in_doubt(gas, gas_state_word(f, gas))}"
    if gas is None:
        return translate("ward", "no gas logged yet")
    told = state_now(f, gas, reader.gas_unit, reader.zone)
    if gas.state in _ACID and not gas.off_support and (ph := ph_as_reported(gas)):
        return translate("ward", "{state}, pH {ph}").format(state=told, ph=ph)
    return told


def state_short(f: EpisodeFigures, gas: GasFigure | None, reader: Reader) -> str:
    """Oxygen and pH by their values, the state left to its shape; "" where there is nothing shorter to say."""
    pf = "" if gas is None else pf_word(f, gas, reader.gas_unit, reader.zone)
    ph = "" if gas is None else ph_as_reported(gas)
    if gas is None or not pf or not ph or off_mask_word(f, reader.zone) or gas.off_support:
        return ""
    return state_in_doubt(gas, f"{pf}, pH {ph}")
