"""Derived figures, as shapes: one number each, with its inputs and their times, doubt, caveats and reason."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field

from core.record.instant import Instant
from core.record.message import Message


@dataclass(frozen=True, slots=True)
class FigureInput:
    """What a figure was made from: a value, and when it was."""

    value: float | str | None = None
    at: Instant | None = None


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
    minute_ventilation_for_usual_paco2_L_per_min: DerivedFigure = DerivedFigure("minute_ventilation_for_paco2")
    """For the logged usual PaCO2; for another wish see `core.judgement.ventilation_findings.needed_for`."""
