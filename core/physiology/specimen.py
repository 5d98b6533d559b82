"""Arterial, capillary, venous: what a sample may stand for. Never silently converted.

Venous: compared with venous only; no P/F; no baseline or verdict for arterial. Capillary stands for arterial in
pH and PCO2, not in PO2 (in hypoxaemic COPD arterial PO2 is 6 mmHg higher, limits of agreement -5.9 to 17.9).
"""

from __future__ import annotations

from dataclasses import dataclass
from math import isfinite
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from core.physiology.pressure import below_pressure_limit
from core.record.channels import SITES
from core.record.message import Message

_STANDS_FOR_ARTERIAL: Final = {
    "arterial": frozenset({"ph", "paco2", "pao2", "hco3", "be", "sao2", "lactate", "hb"}),
    "capillary": frozenset({"ph", "paco2", "hco3", "be"}),
    "venous": frozenset[str](),
}


@dataclass(frozen=True, slots=True)
class PublishedDifference:
    """A published arterial-venous difference: to show beside a venous sample, never to apply to it."""

    source: str
    ph_arterial_minus_venous: float
    pco2_venous_minus_arterial: float | None
    limits_of_agreement: tuple[float, float] | None


PUBLISHED_DIFFERENCES: Final = (
    PublishedDifference("Kelly, review to Sep 2012, n = 2087 (pH)", 0.034, 6.2, (-20.0, 20.0)),
    PublishedDifference("Byrne, Respirology 2014, n = 1768", 0.03, None, (-2.4, 10.7)),
    PublishedDifference("Lou 2019, exacerbated COPD, n = 1234", 0.02, 2.9, None),
    PublishedDifference("Chung, n about 1750", 0.017, 2.5, (-16.8, 21.7)),
)


def why_not_arterial(site: str, channel: str) -> Message | None:
    """Why a value of a sample does not stand for the arterial one, or None where it does.

    Raises:
        ValueError: a site that no sample has.

    >>> why_not_arterial("capillary", "paco2") is None
    True
    >>> why_not_arterial("venous", "pao2").key
    'specimen.venous_is_not_arterial'
    """
    if site not in _STANDS_FOR_ARTERIAL:
        raise ValueError(f"sample site {site!r} is not one of {', '.join(SITES)}")
    if channel in _STANDS_FOR_ARTERIAL[site]:
        return None
    return Message(f"specimen.{site}_is_not_arterial", {"site": site, "channel": channel})


def rules_out_hypercapnia(pvco2: ArrayLike) -> NDArray[np.bool_]:
    """Whether a venous PCO2 (mmHg) rules out arterial hypercapnia: below 45 mmHg (6.0 kPa); False for NaN.

    Sensitivity and negative predictive value 100 % (n = 529). Not a substitute value, and not in shock.
    Compared in tenths of a kPa, so that both units get the same answer.

    >>> rules_out_hypercapnia([44.0, 45.0, 60.0]).tolist()
    [True, False, False]
    """
    return np.asarray(below_pressure_limit(pvco2, 6.0), dtype=np.bool_)


def venous_rule_out(pvco2: float, *, shock: bool | None = None) -> Message:
    """What a venous PCO2 says of arterial hypercapnia. `shock` None: not known, and said so.

    >>> venous_rule_out(40.0, shock=False).key, venous_rule_out(40.0, shock=True).key
    ('specimen.hypercapnia_ruled_out', 'specimen.no_rule_out_in_shock')
    >>> venous_rule_out(52.0).key
    'specimen.hypercapnia_not_ruled_out'
    """
    values = {"pvco2": pvco2, "limit_mmHg": 45.0, "limit_kPa": 6.0}
    if not isfinite(pvco2):
        return Message("specimen.pco2_unknown")
    if shock:
        return Message("specimen.no_rule_out_in_shock", {**values})
    if bool(rules_out_hypercapnia(pvco2)):
        return Message("specimen.hypercapnia_ruled_out", {**values, "shock_known": shock is not None})
    return Message("specimen.hypercapnia_not_ruled_out", {**values})
