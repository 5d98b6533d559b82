"""Ventilation: predicted body weight, tidal volume per kg, minute and alveolar ventilation, and their caveats.

Units: cm, kg, mL, L/min, mmHg, /min. On a mask a tidal volume is modelled from flow and leak: whether it can be
trusted is for `tidal_volume_trust`, and that doubt travels with every figure made from it (`CAVEATS`).
Shapes: scalars or arrays that broadcast; no function raises for a number.
"""

from __future__ import annotations

from collections.abc import Mapping
from types import MappingProxyType
from typing import Final

import numpy as np

from core.physiology.constants import CO2_EQUATION
from core.physiology.domains import Domain
from core.physiology.elementary import N, Values
from core.physiology.formula import POSITIVE, formula
from core.record.message import Message

BASE_PBW: Final = MappingProxyType({"male": 50.0, "female": 45.5})
"""kg at 152.4 cm (Devine; ARDSNet)."""

_PBW = Domain("kg", 20.0, 160.0, "undefined.result_outside", "undefined.result_outside")
_ALVEOLAR = Domain("L/min", 0.01, 80.0, "undefined.tidal_volume_within_dead_space", "undefined.result_outside")

CAVEATS: Final[Mapping[str, tuple[Message, ...]]] = MappingProxyType(
    {
        "tidal_volume_per_kg": (Message("caveat.tidal_volume_modelled_on_mask"),),
        "minute_ventilation": (Message("caveat.tidal_volume_modelled_on_mask"),),
        "alveolar_ventilation": (
            Message("caveat.tidal_volume_modelled_on_mask"),
            Message("caveat.dead_space_assumed"),
        ),
        "minute_ventilation_for_paco2": (Message("caveat.co2_production_and_dead_space_constant"),),
        "ventilatory_ratio": (
            Message("caveat.validated_intubated_no_leak"),
            Message("caveat.ratio_misses_changed_mechanics"),
        ),
        "rapid_shallow_breathing_index": (Message("caveat.validated_off_support"),),
    }
)
"""What to say beside a figure of this module, always."""


def base_weight(sex: str | None) -> float:
    """kg of predicted body weight at 152.4 cm; NaN where the sex is not known.

    >>> base_weight("female"), base_weight("not known")
    (45.5, nan)
    """
    return BASE_PBW.get((sex or "").casefold(), float("nan"))


def base_weights(sexes: object) -> Values:
    """`base_weight` for an array of texts.

    >>> base_weights(["male", "female", ""]).tolist()
    [50.0, 45.5, nan]
    """
    texts = np.asarray(sexes, dtype=np.str_)
    flat = [base_weight(str(text)) for text in texts.reshape(-1)]
    return np.asarray(flat, dtype=np.float64).reshape(texts.shape)


@formula(_PBW)
def predicted_body_weight(height: N, base_pbw: N) -> N:
    """Predicted body weight, kg: base + 0.91 x (height cm - 152.4), base 50 (male) or 45.5 (female).

    Take the base from `base_weight(sex)`. Height from 130 cm: shorter, the line has no meaning (common
    practice). Source: ARDSNet (Devine). In inches, 2.3 kg per inch gives 0.15 % less.

    >>> round(predicted_body_weight(175.0, base_weight("male")), 2)
    70.57
    """
    return base_pbw + 0.91 * (height - 152.4)


@formula()
def tidal_volume_per_kg(vte: N, pbw: N) -> N:
    """Tidal volume per kg of predicted body weight, mL/kg.

    Above 9.5 in the first hours of hypoxaemic failure with P/F <= 200 goes with failure (Carteaux, Crit Care
    Med 2016;44:282; the threshold from memory).

    >>> round(tidal_volume_per_kg(670.0, 70.57), 1)
    9.5
    """
    return vte / pbw


@formula()
def minute_ventilation(vte: N, rr: N) -> N:
    """Minute ventilation, L/min: tidal volume (mL) x rate / 1000.

    >>> minute_ventilation(400.0, 25.0)
    10.0
    """
    return vte * rr / 1000.0


@formula(_ALVEOLAR)
def alveolar_ventilation(vte: N, rr: N, dead_space: N) -> N:
    """Alveolar ventilation, L/min: (tidal volume - dead space, mL) x rate / 1000. Dead space is an assumption.

    >>> round(alveolar_ventilation(400.0, 25.0, 150.0), 2)
    6.25
    """
    return (vte - dead_space) * rr / 1000.0


@formula(POSITIVE)
def alveolar_ventilation_for_paco2(vco2: N, wished_paco2: N) -> N:
    """Alveolar ventilation (L/min BTPS) that holds a PaCO2 (mmHg): 0.863 x VCO2 (mL/min STPD) / PaCO2.

    >>> round(alveolar_ventilation_for_paco2(200.0, 40.0), 1)
    4.3
    """
    return CO2_EQUATION * vco2 / wished_paco2


@formula(POSITIVE)
def paco2_of_alveolar_ventilation(vco2: N, va: N) -> N:
    """PaCO2 (mmHg) of an alveolar ventilation (L/min BTPS): 0.863 x VCO2 (mL/min STPD) / VA.

    >>> round(paco2_of_alveolar_ventilation(200.0, 4.3), 1)
    40.1
    """
    return CO2_EQUATION * vco2 / va


@formula(POSITIVE)
def minute_ventilation_for_paco2(mv: N, paco2: N, wished_paco2: N) -> N:
    """Minute ventilation (L/min) for a wished PaCO2, at constant CO2 production and VD/VT: MV x PaCO2 / wished.

    The assumption is weak on a mask (leak, work of breathing): shown, never a setting.

    >>> round(minute_ventilation_for_paco2(8.0, 60.0, 50.0), 2)
    9.6
    """
    return mv * paco2 / wished_paco2


@formula(POSITIVE)
def ventilatory_ratio(mv: N, paco2: N, pbw: N) -> N:
    """Ventilatory ratio: MV (mL/min) x PaCO2 (mmHg) / (PBW x 100 x 37.5).

    Source: Sinha, Br J Anaesth 2009;102:692. Intubated; not validated in leak.

    >>> round(ventilatory_ratio(10.0, 60.0, 70.57), 2)
    2.27
    """
    return mv * 1000.0 * paco2 / (pbw * 100.0 * 37.5)


@formula(POSITIVE)
def rapid_shallow_breathing_index(rr: N, vte: N) -> N:
    """Rapid shallow breathing index, breaths/min/L: rate / tidal volume in L. 105 (Yang and Tobin 1991).

    On support it reads lower than the index of its source; above 105 on the first mask support intubation was
    commoner (Berg, Respir Care 2012;57:1548, n = 101, low support).

    >>> round(rapid_shallow_breathing_index(30.0, 400.0), 1)
    75.0
    """
    return rr / (vte / 1000.0)
