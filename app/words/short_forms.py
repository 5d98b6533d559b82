"""The parts that every telling of settings and gases shares: abbreviations, values and units, in no language.

Screen, command line and printed sheet put their own words around them, so that a value reads the same in each.
"""

from __future__ import annotations

from app.look.formats import fixed, gas_pressure, trimmed
from core.judgement.shapes import GasFigure


def ph_as_reported(gas: GasFigure) -> str:
    """The pH with the precision it was typed with; "" where there is none."""
    return gas.ph_text or (fixed(gas.ph, 2) if gas.ph is not None else "")


def paco2_as_reported(gas: GasFigure, gas_unit: str) -> str:
    """The PCO2 in the reader's unit, as typed where it was typed in it; "" where there is none."""
    if gas.paco2_mmHg is None:
        return ""
    typed = gas.paco2_text or ""
    return typed if typed.endswith(f" {gas_unit}") else gas_pressure(gas.paco2_mmHg, gas_unit)


def two_levels(ipap: float, epap: str, support: float | None) -> str:
    """Two pressures and what lies between them; `epap` "" where nothing is to be said of it.

    >>> two_levels(24.0, "5", 19.0)
    'IPAP 24 / EPAP 5 cmH2O (PS 19)'
    >>> two_levels(24.0, "", None)
    'IPAP 24 cmH2O'
    """
    low = f" / EPAP {epap}" if epap else ""
    between = f" (PS {trimmed(support)})" if support is not None else ""
    return f"IPAP {trimmed(ipap)}{low} cmH2O{between}"
