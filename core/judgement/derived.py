"""Derived figures: one number each, with its inputs and their times, its doubt, its caveats, its reason."""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, field

from core.physiology.formula import reasoned
from core.record.instant import Instant
from core.record.message import Message


@dataclass(frozen=True, slots=True)
class FigureInput:
    """What a figure was made from: a value, and when it was.

    `median_of`: the first and the last of the device's samples whose median it is; None for a single value.
    """

    value: float | str | None = None
    at: Instant | None = None
    median_of: tuple[Instant, Instant] | None = None


@dataclass(frozen=True, slots=True)
class DerivedFigure:
    """One computed figure with everything that has to be said beside it.

    `key` is its line in the catalogue of figures (formula, unit, source, how sure). `value` None has its `reason`.
    `doubt` is of this value, now; `caveats` are of the figure, always.
    """

    key: str
    value: float | str | None = None
    at: Instant | None = None
    inputs: Mapping[str, FigureInput] = field(default_factory=dict)
    doubt: Message | None = None
    caveats: tuple[Message, ...] = ()
    reason: Message | None = None


def derive(
    key: str, formula: Callable[..., float], inputs: Mapping[str, FigureInput], at: Instant | None, *,
    doubt: Message | None = None, caveats: tuple[Message, ...] = (),
) -> DerivedFigure:  # fmt: skip
    """The figure that a formula of `core.physiology` makes of inputs named like its parameters.

    A missing or impossible input gives None with the reason, never a guess.

    >>> from core.physiology.oxygenation import pf_ratio
    >>> inputs = {"pao2": FigureInput(60.0, 0), "fio2": FigureInput(0.5, 0)}
    >>> derive("pf", pf_ratio, inputs, 0).value
    120.0
    >>> derive("pf", pf_ratio, inputs | {"fio2": FigureInput()}, 0).reason.key
    'undefined.fio2_unknown'
    """
    numbers = {k: i.value if isinstance(i.value, (int, float)) else None for k, i in inputs.items()}
    found = reasoned(formula, **numbers)
    value = None if found.reason is not None else found.value
    return DerivedFigure(key, value, at, inputs, None if value is None else doubt, caveats, found.reason)


@dataclass(frozen=True, slots=True)
class OxygenationFigure:
    """Oxygenation beside the ratios: kept out of sight until asked for, never judged by.

    What needs SpO2 is taken at the newest SpO2 on support, what needs PaO2 at the newest arterial gas on support.
    """

    pf_imputed_mmHg: DerivedFigure = DerivedFigure("pf_imputed")
    """By the one method that is shown (non-linear); the other two are beside it."""
    pf_imputed_linear_mmHg: DerivedFigure = DerivedFigure("pf_imputed_linear")
    pf_imputed_loglinear_mmHg: DerivedFigure = DerivedFigure("pf_imputed_loglinear")
    mean_airway_pressure_cmH2O: DerivedFigure = DerivedFigure("mean_airway_pressure")
    oxygenation_index: DerivedFigure = DerivedFigure("oxygenation_index")
    oxygen_saturation_index: DerivedFigure = DerivedFigure("oxygen_saturation_index")
    berlin_2012: DerivedFigure = DerivedFigure("berlin_band")
    """"not met", "mild", "moderate" or "severe"."""
    global_2023: DerivedFigure = DerivedFigure("global_band")
    """"not met" or "met" (no severity grade without intubation)."""
    rox_hr: DerivedFigure = DerivedFigure("rox_hr")
    mrox: DerivedFigure = DerivedFigure("mrox")


@dataclass(frozen=True, slots=True)
class TypedDoubt:
    """A reading of the device that a person typed and that is not judged, or is in doubt, with why."""

    channel: str
    at: Instant
    why: Message


@dataclass(frozen=True, slots=True)
class VentilationFigure:
    """Breathing on support. The doubt of a tidal volume travels with every figure made from it."""

    predicted_body_weight_kg: DerivedFigure = DerivedFigure("pbw")
    tidal_volume_mL: DerivedFigure = DerivedFigure("tidal_volume")
    tidal_volume_mL_per_kg: DerivedFigure = DerivedFigure("vt_per_kg")
    minute_ventilation_L_per_min: DerivedFigure = DerivedFigure("minute_ventilation")
    alveolar_ventilation_L_per_min: DerivedFigure = DerivedFigure("alveolar_ventilation")
    rapid_shallow_breathing_index: DerivedFigure = DerivedFigure("rsbi")
    minute_ventilation_at_gas_L_per_min: DerivedFigure = DerivedFigure("minute_ventilation")
    """Around the newest gas that judges; the two below are made from it."""
    ventilatory_ratio: DerivedFigure = DerivedFigure("ventilatory_ratio")
    minute_ventilation_for_usual_L_per_min: DerivedFigure = DerivedFigure("minute_ventilation_for_paco2")
    """For the logged usual PaCO2; for another wish see `core.judgement.ventilation_findings.needed_for`."""
    typed_doubts: tuple[TypedDoubt, ...] = ()
    """Which readings of the device that people typed are left out or in doubt."""
