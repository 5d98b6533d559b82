"""What a gas says in plain words, and what its rules make one expect: read on demand, never judged by.

Only the window's explanation and the JSON ask for it, so it stays out of the figures' hot path. Arterial and
capillary samples are read by the rules of compensation; a venous one is not (rules of judgement 3.7).
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace

from core.judgement.derived import DerivedFigure, FigureInput, derive
from core.judgement.shapes import GasFigure
from core.physiology import acid_base, compensation, oxygenation, saturation, temperature
from core.physiology.classification import Disturbance, classify
from core.physiology.specimen import why_not_arterial
from core.record.instant import Instant
from core.record.message import Message

Formula = Callable[..., float]
Inputs = dict[str, FigureInput]
_EXPECTED = "aa_gradient_expected"
_METABOLIC = {
    Disturbance.METABOLIC_ACIDOSIS: (
        "paco2_expected_metabolic_acidosis", compensation.expected_paco2_metabolic_acidosis,
    ),
    Disturbance.METABOLIC_ALKALOSIS: (
        "paco2_expected_metabolic_alkalosis", compensation.expected_paco2_metabolic_alkalosis,
    ),
}  # fmt: skip
_FROM_MEMORY = (Message("caveat.constants_from_memory"),)
_GAIN = (
    Message(
        "caveat.chronic_gain_varies",
        {"low": compensation.CHRONIC_GAIN_LOW * 10.0, "high": compensation.CHRONIC_GAIN_HIGH * 10.0},
    ),
)
_GUESS = (Message("caveat.usual_paco2_is_a_guess"),)
_OFF = Message("gas.temperature_correction_off")


@dataclass(frozen=True, slots=True)
class GasReading:
    """A gas in words, with the reasoning step by step, and the figures that explain it.

    `classification` is None for a venous sample, `classification_reason` says so. The expected values are those of
    a purely acute and a purely chronic change to this PaCO2.
    """

    classification: Message | None
    classification_reason: Message | None
    steps: tuple[Message, ...]
    hydrogen_ion_nmol_L: DerivedFigure
    sbe_siggaard_mmol_L: DerivedFigure
    hco3_expected_acute_mmol_L: DerivedFigure
    hco3_expected_chronic_mmol_L: DerivedFigure
    ph_expected_acute: DerivedFigure
    ph_expected_chronic: DerivedFigure
    paco2_expected_metabolic_mmHg: DerivedFigure
    usual_paco2_estimate_mmHg: DerivedFigure
    aa_gradient_full_mmHg: DerivedFigure
    aa_gradient_expected_mmHg: DerivedFigure
    sao2_expected_percent: DerivedFigure
    ph_at_temperature: DerivedFigure
    paco2_at_temperature_mmHg: DerivedFigure
    pao2_at_temperature_mmHg: DerivedFigure


def read(gas: GasFigure, age: float | None = None) -> GasReading:
    """Read one gas. `age` in years, for the A-a gradient that an age makes one expect.

    >>> read(GasFigure(0, "arterial", ph=7.22, paco2_mmHg=80.0)).classification.key
    'gas_class.acute_on_chronic_respiratory_acidosis'
    >>> read(GasFigure(0, "venous", ph=7.22, paco2_mmHg=80.0)).classification_reason.key
    'specimen.venous_is_not_arterial'
    """
    closed = why_not_arterial(gas.site, "paco2")
    main, classification, steps = _classified(gas, closed)
    return GasReading(
        classification, closed, steps,
        paco2_expected_metabolic_mmHg=_metabolic(main, FigureInput(gas.hco3_calculated_mmol_L, gas.at), closed),
        **_of_any_sample(gas), **_compensation(gas, closed), **_gradients(gas, age), **_corrected(gas),
    )  # fmt: skip


def _of_any_sample(gas: GasFigure) -> dict[str, DerivedFigure]:
    at, ph = gas.at, FigureInput(gas.ph, gas.at)
    base = {"ph": ph, "hco3": FigureInput(gas.hco3_calculated_mmol_L, at)}
    curve = {"pao2": FigureInput(gas.pao2_mmHg, at), "ph": ph}
    return {
        "hydrogen_ion_nmol_L": derive("hydrogen_ion", acid_base.hydrogen_ion, {"ph": ph}, at),
        "sbe_siggaard_mmol_L": derive(
            "sbe_siggaard", acid_base.standard_base_excess_siggaard, base, at, caveats=_FROM_MEMORY
        ),
        "sao2_expected_percent": derive(
            "saturation_of_po2_at_ph",
            saturation.severinghaus_saturation_at_ph,
            curve,
            at,
            caveats=_FROM_MEMORY,
        ),
    }


def _compensation(gas: GasFigure, closed: Message | None) -> dict[str, DerivedFigure]:
    paco2 = {"paco2": FigureInput(gas.paco2_mmHg, gas.at)}
    hco3 = {"hco3": FigureInput(gas.hco3_calculated_mmol_L, gas.at)}

    def rule(key: str, formula: Formula, inputs: Inputs, caveats: tuple[Message, ...] = ()) -> DerivedFigure:
        return _shut(key, gas.at, closed) if closed else derive(key, formula, inputs, gas.at, caveats=caveats)

    return {
        "hco3_expected_acute_mmol_L": rule("hco3_expected_acute", compensation.expected_hco3_acute, paco2),
        "hco3_expected_chronic_mmol_L": rule(
            "hco3_expected_chronic", compensation.expected_hco3_chronic, paco2, _GAIN
        ),
        "ph_expected_acute": rule("ph_expected_acute", compensation.expected_ph_acute, paco2),
        "ph_expected_chronic": rule("ph_expected_chronic", compensation.expected_ph_chronic, paco2, _GAIN),
        "usual_paco2_estimate_mmHg": rule("usual_paco2_estimate", compensation.usual_paco2_estimate, hco3, _GUESS),
    }


def _gradients(gas: GasFigure, age: float | None) -> dict[str, DerivedFigure]:
    closed, at = why_not_arterial(gas.site, "pao2"), gas.at
    fio2 = FigureInput(gas.fio2, at)
    if closed is not None:
        full = _shut("aa_gradient_full", at, closed)
        return {"aa_gradient_full_mmHg": full, "aa_gradient_expected_mmHg": _shut(_EXPECTED, at, closed)}
    inputs = {"pao2": FigureInput(gas.pao2_mmHg, at), "paco2": FigureInput(gas.paco2_mmHg, at), "fio2": fio2}
    full = derive("aa_gradient_full", oxygenation.aa_gradient_full, inputs, at)
    return {"aa_gradient_full_mmHg": full, "aa_gradient_expected_mmHg": _expected_gradient(age, fio2, at)}


def _corrected(gas: GasFigure) -> dict[str, DerivedFigure]:
    """The values at the patient's temperature; absent unless the ward's policy asks for them (alpha-stat else)."""

    def at_temperature(key: str, formula: Formula, name: str, value: float | None) -> DerivedFigure:
        if gas.temperature is None:
            return _shut(key, gas.at, _OFF)
        inputs = {name: FigureInput(value, gas.at), "temp": gas.temperature}
        return derive(key, formula, inputs, gas.at)

    by = temperature
    return {
        "ph_at_temperature": at_temperature("ph_at_temperature", by.ph_at_temperature, "ph", gas.ph),
        "paco2_at_temperature_mmHg": at_temperature(
            "paco2_at_temperature", by.paco2_at_temperature, "paco2", gas.paco2_mmHg
        ),
        "pao2_at_temperature_mmHg": at_temperature(
            "pao2_at_temperature", by.pao2_at_temperature, "pao2", gas.pao2_mmHg
        ),
    }


def _shut(key: str, at: Instant | None, reason: Message) -> DerivedFigure:
    return DerivedFigure(key, None, at, reason=reason)


def _classified(gas: GasFigure, closed: Message | None) -> tuple[Disturbance, Message | None, tuple[Message, ...]]:
    if closed is not None:
        return Disturbance.NOT_KNOWN, None, ()
    nan = float("nan")
    found = classify(nan if gas.ph is None else gas.ph, nan if gas.paco2_mmHg is None else gas.paco2_mmHg)
    return found.main, found.message, found.steps


def _metabolic(main: Disturbance, hco3: FigureInput, closed: Message | None) -> DerivedFigure:
    """The PCO2 that a metabolic disturbance makes one expect, only where the main disturbance is one."""
    at = hco3.at
    if main not in _METABOLIC:
        key = _METABOLIC[Disturbance.METABOLIC_ACIDOSIS][0]
        return _shut(key, at, closed if closed is not None else Message("gas.not_metabolic"))
    key, formula = _METABOLIC[main]
    tolerance = Message("caveat.within", {"tolerance": compensation.WINTERS_TOLERANCE})
    return derive(key, formula, {"hco3": hco3}, at, caveats=(tolerance,))


def _expected_gradient(age: float | None, fio2: FigureInput, at: Instant) -> DerivedFigure:
    """The A-a gradient expected for an age, on air only; what the two other published rules say is beside it."""
    found = derive(_EXPECTED, oxygenation.aa_gradient_expected, {"age": FigureInput(age), "fio2": fio2}, at)
    if age is None or found.value is None or not isinstance(fio2.value, float):
        return found
    others = {
        "quarter": oxygenation.aa_gradient_expected_quarter(age, fio2.value),
        "regression": oxygenation.aa_gradient_expected_regression(age, fio2.value),
    }
    return replace(found, caveats=(Message("caveat.other_rules_of_age", {**others}),))
