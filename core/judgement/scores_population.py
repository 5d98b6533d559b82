"""Who a score was made for. A figure outside its population is shown and says so; it raises no flag."""

from __future__ import annotations

from math import isfinite

from core.physiology.pressure import above_pressure_limit
from core.record.message import Message

INSIDE = "inside"
OUTSIDE = "outside"


def hypoxaemic_not_hypercapnic(
    *, pf: float | None, ph: float | None, paco2: float | None, on_mask: bool | None = True
) -> tuple[str, Message | None]:
    """Inside: on mask ventilation, P/F at most 300, and not acutely hypercapnic.

    Acutely hypercapnic is pH below 7.35 with PaCO2 above 45 mmHg (6.0 kPa).
    What is not known does not count as inside: the reason names it.

    >>> hypoxaemic_not_hypercapnic(pf=150, ph=7.40, paco2=38)
    ('inside', None)
    >>> hypoxaemic_not_hypercapnic(pf=150, ph=7.28, paco2=60)[1].key
    'population.acute_hypercapnia'
    """
    if on_mask is not True:
        return OUTSIDE, Message("population.not_on_mask" if on_mask is False else "population.support_unknown")
    known_pf = pf is not None and isfinite(pf)
    if pf is not None and known_pf and pf > 300.0:
        return OUTSIDE, Message("population.not_hypoxaemic", {"pf": float(pf), "limit": 300.0})
    acidotic = None if ph is None or not isfinite(ph) else ph < 7.35
    hypercapnic = None if paco2 is None or not isfinite(paco2) else bool(above_pressure_limit(paco2, 6.0))
    if acidotic and hypercapnic:  # said before a P/F that is missing: it is outside whatever that is
        return OUTSIDE, Message("population.acute_hypercapnia", {"ph": ph, "paco2": paco2})
    if not known_pf:
        return OUTSIDE, Message("population.input_unknown", {"input": "pf"})
    if acidotic is False or hypercapnic is False:
        return INSIDE, None
    return OUTSIDE, Message("population.input_unknown", {"input": "ph" if acidotic is None else "paco2"})
