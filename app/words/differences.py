"""By how much a judged gas differs from its baseline, in the differences of the numbers that are shown."""

from __future__ import annotations

from app.look import formats
from app.words.shown_difference import DUST, difference_text, pressure_difference
from app.words.template import Reader
from core.judgement.response_shapes import JudgedGas


def ph_change(g: JudgedGas) -> str:
    """By how much pH differs from the baseline; "" where that is not known."""
    if g.delta_ph is None:
        return ""
    return formats.signed(g.delta_ph, 2) if g.ph is None else difference_text(_before(g.ph, g.delta_ph), g.ph, 2)


def paco2_change(g: JudgedGas, unit: str) -> str:
    """The same of PaCO2, with its unit."""
    return _pressure_change(g.paco2_mmHg, g.delta_paco2_mmHg, unit)


def changes_of(g: JudgedGas, reader: Reader, *, of_pf: bool = True) -> list[str]:
    """By how much pH, PaCO2 and, if wanted, P/F differ from the baseline, by name; what is not known is left out."""
    unit = reader.gas_unit
    told = (("pH", ph_change(g)), ("PaCO2", paco2_change(g, unit)),
            ("P/F", _pressure_change(g.pf_mmHg, g.delta_pf_mmHg, unit) if of_pf else ""))  # fmt: skip
    return [f"{name} {text}" for name, text in told if text]


def _pressure_change(after: float | None, delta: float | None, unit: str) -> str:
    if delta is None:
        return ""
    if after is None:
        return formats.gas_pressure(delta, unit, sign=True)
    return pressure_difference(_before(after, delta), after, unit)


def _before(after: float, delta: float) -> float:
    return round(after - delta, DUST)
