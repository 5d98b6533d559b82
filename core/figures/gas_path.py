"""The gases of an episode as a numbered path over the acid-base map, each with its class and the reasoning.

Arterial and capillary gases make the path; venous ones are numbered with them and stand apart, for a venous PCO2
is no arterial one (rules of judgement 3.7).
"""

from __future__ import annotations

from dataclasses import dataclass

from core.judgement.gas_findings import STANDS_FOR_ARTERIAL
from core.judgement.gas_reading import GasReading, read
from core.judgement.response_shapes import JudgedGas, ResponseFigure
from core.judgement.shapes import EpisodeFigures, GasFigure


@dataclass(frozen=True, slots=True)
class PathGas:
    """One gas of the path. `number` counts from 1 over every gas of the episode, placed or not.

    `on_path` is False for a venous sample. `judged` is the gas against the newest change it is attributed to, with
    that `response`; both None where it judges none.
    """

    number: int
    gas: GasFigure
    reading: GasReading
    on_path: bool
    judged: JudgedGas | None = None
    response: ResponseFigure | None = None


@dataclass(frozen=True, slots=True)
class GasPath:
    """The gases that can be placed, in order of time, and those that cannot (pH or PCO2 is missing)."""

    gases: tuple[PathGas, ...]
    not_placed: tuple[PathGas, ...]


def gas_path(figures: EpisodeFigures) -> GasPath:
    """The path of an episode's gases.

    >>> path = gas_path(EpisodeFigures("E", 0, gases=(GasFigure(0, "arterial", ph=7.22, paco2_mmHg=80.0),)))
    >>> path.gases[0].reading.classification.key
    'gas_class.acute_on_chronic_respiratory_acidosis'
    """
    age = figures.profile.get("age")
    found = {g.at: (g, r) for r in figures.responses for g in r.gases if g.attributable}
    made = []
    for number, gas in enumerate(figures.gases, 1):
        judged, response = found.get(gas.at, (None, None)) if gas.site in STANDS_FOR_ARTERIAL else (None, None)
        reading = read(gas, age if isinstance(age, float) else None)
        made.append(PathGas(number, gas, reading, gas.site in STANDS_FOR_ARTERIAL, judged, response))
    placed = tuple(p for p in made if p.gas.ph is not None and p.gas.paco2_mmHg is not None)
    return GasPath(placed, tuple(p for p in made if p not in placed))
