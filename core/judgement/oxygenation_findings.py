"""Oxygenation beside the ratios: imputed P/F, indices with the mean pressure, bands of the definitions, ROX-HR, mROX.

What needs SpO2 is taken at the point that S/F and ROX are taken at; what needs PaO2 at the newest arterial gas that
was not drawn off support. Nothing here judges.
"""

from __future__ import annotations

from collections.abc import Callable
from dataclasses import dataclass, replace
from math import isnan
from typing import Final

from core.judgement.context import Context
from core.judgement.derived import DerivedFigure, FigureInput, OxygenationFigure, derive
from core.judgement.score_inputs import Walls, nearest, rate_at
from core.judgement.shapes import GasFigure
from core.physiology import definitions, imputation, oxygenation_index, rox
from core.physiology.definitions import Band
from core.record.instant import MINUTE, Instant
from core.record.message import Message

Inputs = dict[str, FigureInput]
_MEAN: Final = "mean_airway_pressure"
_OFF: Final = Message("oxygenation.off_support")
_NO_GAS: Final = Message("oxygenation.no_arterial_gas")
_HIGH_FLOW: Final = (rox.VALIDATED_IN_HIGH_FLOW,)
_NO_CUT_OFF: Final = (Message("caveat.no_adult_cut_off_on_mask"), Message("caveat.square_wave_no_leak"))
_CRITERION: Final = Message("caveat.oxygenation_criterion_only")
_BANDS: Final = {
    Band.NOT_MET: "not met", Band.MILD: "mild", Band.MODERATE: "moderate", Band.SEVERE: "severe",
    Band.MET_UNGRADED: "met",
}  # fmt: skip


@dataclass(frozen=True, slots=True)
class _Saturation:
    """The SpO2 and FiO2 of S/F, or why there is no S/F."""

    at: Instant | None
    inputs: Inputs
    reason: Message | None


def oxygenation_figure(ctx: Context, walls: Walls) -> OxygenationFigure:
    """The oxygenation figures of an episode; `walls` are the moments that no figure reaches across."""
    sat = _saturation(ctx)
    gas = next((g for g in reversed(ctx.gases) if g.site == "arterial" and not g.off_support), None)
    pressure = _mean_pressure(ctx, ctx.as_of if sat.at is None else sat.at, walls)
    return OxygenationFigure(
        pf_imputed_mmHg=_imputed("pf_imputed", "non-linear", sat),
        pf_imputed_linear_mmHg=_imputed("pf_imputed_linear", "linear", sat),
        pf_imputed_loglinear_mmHg=_imputed("pf_imputed_loglinear", "log-linear", sat),
        mean_airway_pressure_cmH2O=pressure,
        oxygenation_index=_oxygenation_index(ctx, gas, walls),
        oxygen_saturation_index=_saturation_index(sat, pressure),
        berlin_2012=_berlin(ctx, gas),
        global_2023=_global(ctx, gas, sat),
        rox_hr=_rox_hr(ctx, walls),
        mrox=_mrox(ctx, gas, walls),
    )


def _saturation(ctx: Context) -> _Saturation:
    if ctx.sf.latest is None:
        return _Saturation(None, {}, ctx.sf.reasons.get("latest", Message("trend.no_values")))
    return _Saturation(ctx.sf.at, dict(ctx.sf.inputs), None)


def _imputed(key: str, method: str, sat: _Saturation) -> DerivedFigure:
    """P/F imputed by one method, named; none above SpO2 97 % or without a known FiO2."""
    caveats = (Message("caveat.imputed_by", {"method": method}),)
    if sat.reason is not None:
        return DerivedFigure(key, caveats=caveats, reason=sat.reason)
    return derive(key, imputation.METHODS[method], sat.inputs, sat.at, caveats=caveats)


def _mean_pressure(ctx: Context, at: Instant, walls: Walls) -> DerivedFigure:
    """Mean airway pressure at a moment: of two fixed pressures with a known inspiratory time and rate, or CPAP."""
    now = ctx.settings.at(at)
    if not ctx.support.on_support(at):
        return DerivedFigure(_MEAN, None, at, reason=_OFF)
    if now.is_cpap:
        inputs = {"cpap": FigureInput(_number(now.low_pressure), at)}
        missing = Message("support.not_recorded", {"channel": "cpap"}) if isnan(now.low_pressure) else None
        return DerivedFigure(_MEAN, inputs["cpap"].value, at, inputs, reason=missing)
    if not now.is_bilevel or now.mode == "volume-assured":
        return DerivedFigure(_MEAN, None, at, reason=Message("oxygenation.no_fixed_pressure", {"mode": now.mode}))
    rate = rate_at(ctx, at, walls)
    inputs = {
        "ipap": FigureInput(_number(now.ipap), at), "epap": FigureInput(_number(now.epap), at),
        "ti": FigureInput(_number(now.ti), at), "rr": rate.given,
    }  # fmt: skip
    formula = oxygenation_index.mean_airway_pressure
    return derive(_MEAN, formula, inputs, at, caveats=(Message("caveat.square_wave_no_leak"),))


def _indexed(
    key: str, formula: Callable[..., float], pressure: DerivedFigure, inputs: Inputs, at: Instant | None
) -> DerivedFigure:
    """An index of a mean pressure: why the pressure is not known is why the index is not."""
    if pressure.reason is not None:
        return DerivedFigure(key, None, at, inputs, caveats=_NO_CUT_OFF, reason=pressure.reason)
    with_pressure = {"paw_mean": FigureInput(pressure.value, pressure.at), **inputs}
    return derive(key, formula, with_pressure, at, caveats=_NO_CUT_OFF)


def _saturation_index(sat: _Saturation, pressure: DerivedFigure) -> DerivedFigure:
    key = "oxygen_saturation_index"
    if sat.reason is not None:
        return DerivedFigure(key, caveats=_NO_CUT_OFF, reason=sat.reason)
    return _indexed(key, oxygenation_index.oxygen_saturation_index, pressure, sat.inputs, sat.at)


def _of_gas(gas: GasFigure) -> Inputs:
    return {"pao2": FigureInput(gas.pao2_mmHg, gas.at), "fio2": FigureInput(gas.fio2, gas.at)}


def _oxygenation_index(ctx: Context, gas: GasFigure | None, walls: Walls) -> DerivedFigure:
    key = "oxygenation_index"
    if gas is None:
        return DerivedFigure(key, caveats=_NO_CUT_OFF, reason=_NO_GAS)
    pressure = _mean_pressure(ctx, gas.at, walls)
    return _indexed(key, oxygenation_index.oxygenation_index, pressure, _of_gas(gas), gas.at)


def _mrox(ctx: Context, gas: GasFigure | None, walls: Walls) -> DerivedFigure:
    if gas is None:
        return DerivedFigure("mrox", caveats=_HIGH_FLOW, reason=_NO_GAS)
    rate = rate_at(ctx, gas.at, walls)
    inputs = {**_of_gas(gas), "rr": rate.given}
    return derive("mrox", rox.mrox, inputs, gas.at, caveats=_HIGH_FLOW)


def _rox_hr(ctx: Context, walls: Walls) -> DerivedFigure:
    """ROX-HR of the ROX that is shown, with the heart rate nearest to it."""
    at = ctx.rox.at
    if ctx.rox.latest is None or at is None:
        reason = ctx.rox.reasons.get("latest", Message("trend.no_values"))
        return DerivedFigure("rox_hr", caveats=_HIGH_FLOW, reason=reason)
    heart = nearest(ctx.episode, "hr", at, ctx.policy.freshness.of("hr"), walls)
    inputs = {**ctx.rox.inputs, "hr": heart.given}
    return derive("rox_hr", rox.rox_hr, inputs, at, caveats=_HIGH_FLOW)


@dataclass(frozen=True, slots=True)
class _Support:
    """What the definitions ask of support at a moment: its low pressure (cmH2O), its high flow (L/min)."""

    peep: float
    flow: float
    reason: Message | None


def _support_at(ctx: Context, at: Instant) -> _Support:
    nan = float("nan")
    if not ctx.support.on_support(at):
        return _Support(nan, nan, _OFF)
    now = ctx.settings.at(at)
    if now.mode == "high-flow nasal":
        missing = Message("support.not_recorded", {"channel": "o2_flow"}) if isnan(now.o2_flow) else None
        return _Support(nan, now.o2_flow, missing)
    missing = Message("support.not_recorded", {"channel": "epap"}) if isnan(now.low_pressure) else None
    return _Support(now.low_pressure, nan, missing)


def _berlin(ctx: Context, gas: GasFigure | None) -> DerivedFigure:
    caveats = (_CRITERION, Message("caveat.berlin_grades_on_mask"))
    shut = DerivedFigure("berlin_band", caveats=caveats, reason=_NO_GAS)
    if gas is None:
        return shut
    support = _support_at(ctx, gas.at)
    inputs = {"pf": FigureInput(gas.pf_mmHg, gas.at), "epap": FigureInput(_number(support.peep), gas.at)}
    reason = support.reason or gas.reasons.get("pf_mmHg")
    if reason is None and isnan(support.peep):
        reason = Message("oxygenation.needs_a_pressure")
    if reason is not None:
        return replace(shut, at=gas.at, inputs=inputs, reason=reason)
    band = Band(int(definitions.berlin(gas.pf_mmHg, support.peep)))
    return DerivedFigure("berlin_band", _BANDS[band], gas.at, inputs, caveats=caveats)


def _global(ctx: Context, gas: GasFigure | None, sat: _Saturation) -> DerivedFigure:
    """By the newer of P/F and S/F; by both where the gas belongs to the SpO2's moment: either suffices."""
    shut = DerivedFigure("global_band", caveats=(_CRITERION,), reason=sat.reason)
    with_pf = gas is not None and gas.pf_mmHg is not None
    if not with_pf and sat.at is None:
        return shut
    gas_at = gas.at if gas is not None and with_pf else None
    at = max(t for t in (gas_at, sat.at) if t is not None)
    reach = int(ctx.policy.freshness.vitals_min.value * MINUTE)
    inputs: Inputs = {}
    if gas is not None and gas_at is not None and at - gas_at <= reach:
        inputs["pf"] = FigureInput(gas.pf_mmHg, gas_at)
    if sat.at is not None and at - sat.at <= reach:
        inputs |= {"spo2": sat.inputs["spo2"], "sf": FigureInput(ctx.sf.latest, sat.at)}
    support = _support_at(ctx, at)
    if support.reason is not None:
        return replace(shut, at=at, inputs=inputs, reason=support.reason)
    pf, sf, spo2 = (_value(inputs.get(name)) for name in ("pf", "sf", "spo2"))
    band = Band(int(definitions.global_not_intubated(pf, sf, spo2, support.peep, support.flow)))
    supported = {
        "epap": FigureInput(_number(support.peep), at),
        "o2_flow": FigureInput(_number(support.flow), at),
    }
    inputs |= {name: given for name, given in supported.items() if given.value is not None}
    return DerivedFigure("global_band", _BANDS[band], at, inputs, caveats=(_CRITERION,))


def _value(given: FigureInput | None) -> float | None:
    return given.value if given is not None and isinstance(given.value, float) else None


def _number(value: float) -> float | None:
    return None if isnan(value) else float(value)
