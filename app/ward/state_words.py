"""The state of an episode at the end of its lane, and a shorter form of it for where there is little room."""

from __future__ import annotations

from app.look.formats import gas_pressure
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


def state_shorter(f: EpisodeFigures, gas: GasFigure | None, reader: Reader) -> tuple[str, ...]:
    """Shorter forms of the state, the longest first: each says the mask, the oxygen that fails and a gas off support,
    and leaves the name of the state to its shape rather than any of them. () where there is nothing shorter."""
    if off_mask_word(f, reader.zone):
        off = translate("ward", "mask off")
        if gas is None or gas.state not in _ACID:
            return (off,)
        return (f"{off}; {state_in_doubt(gas, gas_state_word(f, gas))}",)
    if gas is None:
        return (translate("ward", "no gas yet"),)
    ph = ph_as_reported(gas)
    of_ph = translate("ward", "pH {ph}").format(ph=ph) if ph else translate("ward", "pH not known")
    pf = pf_word(f, gas, reader.gas_unit, reader.zone)
    if gas.off_support:
        off = translate("ward", "off support: {state}" if gas.back_on_at is None else "just back on: {state}")
        lone = gas_pressure(f.now.pf_mmHg, reader.gas_unit) if pf and f.now.pf_mmHg is not None else ""
        oxygen = dict.fromkeys((f"{pf}; ", f"P/F {lone}; ")) if pf else {"": None}
        forms = [f"{o}{off.format(state=t)}" for o in oxygen for t in (gas_state_word(f, gas), of_ph)]
    elif pf and ph:
        forms = [f"{pf}, {of_ph}"]
    else:
        forms = [of_ph] if ph and gas.state not in _ACID else []
    return tuple(state_in_doubt(gas, form) for form in forms)
