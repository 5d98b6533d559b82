"""Oxygenation index and saturation index with the mean pressure of bilevel support.

No adult cut-off exists in mask ventilation: shown when asked for, never judged by.
Pressures in cmH2O, PaO2 in mmHg, SpO2 in %, FiO2 as a fraction, times in s, rates per minute.
"""

from __future__ import annotations

from core.physiology.domains import SPO2_BELOW_CEILING, Domain
from core.physiology.elementary import N, choose
from core.physiology.formula import formula

_MEAN_PRESSURE = Domain("cmH2O", 0.0, 60.0, "undefined.breath_longer_than_cycle", "undefined.result_outside")
_NAN = float("nan")


@formula(_MEAN_PRESSURE)
def mean_airway_pressure(ipap: N, epap: N, ti: N, rr: N) -> N:
    """Mean airway pressure of bilevel support, cmH2O: EPAP + (IPAP - EPAP) x Ti / Ttot, Ttot = 60 / rate.

    A square wave and no leak assumed. Undefined where Ti does not fit into the breath. Computed here.

    >>> mean_airway_pressure(18.0, 6.0, 1.0, 20.0)
    10.0
    """
    part = ti * rr / 60.0
    return choose(part < 1.0, epap + (ipap - epap) * part, _NAN)


@formula()
def oxygenation_index(paw_mean: N, fio2: N, pao2: N) -> N:
    """Oxygenation index: mean airway pressure x FiO2 x 100 / PaO2. Source: Chen, J Clin Med 2018;7:205.

    >>> oxygenation_index(12.0, 0.5, 60.0)
    10.0
    """
    return paw_mean * fio2 * 100.0 / pao2


@formula(spo2=SPO2_BELOW_CEILING)
def oxygen_saturation_index(paw_mean: N, fio2: N, spo2: N) -> N:
    """Oxygen saturation index: mean airway pressure x FiO2 x 100 / SpO2; none above 97 %, as for S/F.

    Source: Chen, J Clin Med 2018;7:205.

    >>> round(oxygen_saturation_index(12.0, 0.5, 90.0), 2)
    6.67
    """
    return paw_mean * fio2 * 100.0 / spo2
