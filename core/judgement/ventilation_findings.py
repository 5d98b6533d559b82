"""Ventilation on support, each figure with the doubt of the tidal volume that it is made from.

What is "now" is taken at the newest volume on the mask. What needs a PaCO2 is taken at the newest gas on support
that stands for an arterial one, with the ventilation of the quarter of an hour before it.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import dataclass, replace

from core.judgement.context import Context
from core.judgement.delivered_ventilation import DEAD_SPACE_ML, DEAD_SPACE_PER_KG
from core.judgement.derived import DerivedFigure, FigureInput, VentilationFigure, derive
from core.judgement.gas_findings import STANDS_FOR_ARTERIAL
from core.judgement.probable_breaks import in_any
from core.judgement.score_inputs import Walls, rate_at
from core.judgement.shapes import GasFigure
from core.judgement.tidal_volume import Measured, measured_at, newest
from core.judgement.typed_doubts import typed_doubts
from core.physiology import ventilation
from core.record.instant import Instant
from core.record.message import Message

_PER_L_TO_ML = 1000.0


@dataclass(frozen=True, slots=True)
class _Breathing:
    """Breathing at a moment: rate, tidal volume, minute volume of the device; None where not measured."""

    at: Instant | None
    rate: FigureInput
    volume: Measured | None
    minute: Measured | None
    no_volume: Message
    """Why there is no tidal volume, where there is none."""

    @property
    def doubt(self) -> Message | None:
        """The doubt of what the minute ventilation is made from."""
        source = self.minute or self.volume
        return source.doubt if source is not None else None


def ventilation_figure(ctx: Context, walls: Walls) -> VentilationFigure:
    """The ventilation figures of an episode; `walls` are the moments that no figure reaches across."""
    pbw = _predicted_weight(ctx)
    last_volume, last_minute = newest(ctx, "vte"), newest(ctx, "mv")
    latest = _breathing(ctx, max((t for t in (last_volume, last_minute) if t is not None), default=None), walls)
    now = latest if latest.volume is not None else _breathing(ctx, last_volume, walls)
    gas = _gas(ctx)
    then = _breathing(ctx, gas.at if gas is not None else None, walls)
    minute, at_gas = _minute(latest), _minute(then)
    if gas is None:
        at_gas = replace(at_gas, reason=Message("ventilation.no_gas_on_support"))
    paco2 = FigureInput(gas.paco2_mmHg, gas.at) if gas is not None else FigureInput()
    figure = VentilationFigure(
        predicted_body_weight_kg=pbw,
        tidal_volume_mL=_tidal_volume(now),
        tidal_volume_mL_per_kg=_of_volume("vt_per_kg", ventilation.tidal_volume_per_kg, now, {"pbw": _given(pbw)}),
        minute_ventilation_L_per_min=minute,
        alveolar_ventilation_L_per_min=_alveolar(latest, minute, pbw),
        rapid_shallow_breathing_index=_of_volume(
            "rsbi", ventilation.rapid_shallow_breathing_index, now, {"rr": now.rate}
        ),
        minute_ventilation_at_gas_L_per_min=at_gas,
        ventilatory_ratio=_of_minute(
            "ventilatory_ratio", ventilation.ventilatory_ratio, at_gas, {"paco2": paco2, "pbw": _given(pbw)}
        ),
        typed_doubts=typed_doubts(ctx),
    )
    usual = ctx.episode.number("usual_paco2")
    if not len(usual):
        unwished = DerivedFigure("minute_ventilation_for_paco2", reason=Message("ventilation.no_wished_paco2"))
        return replace(figure, minute_ventilation_for_usual_L_per_min=unwished)
    wish = FigureInput(float(usual.v[-1]), int(usual.t[-1]))
    return replace(figure, minute_ventilation_for_usual_L_per_min=needed_for(figure, wish))


def needed_for(figure: VentilationFigure, wished: FigureInput) -> DerivedFigure:
    """The minute ventilation that a wished PaCO2 (mmHg) would need, from the figures of an episode.

    At constant CO2 production and dead space fraction: weak on a mask, shown, never a setting.
    """
    at_gas = figure.minute_ventilation_at_gas_L_per_min
    inputs = {"paco2": figure.ventilatory_ratio.inputs.get("paco2", FigureInput()), "wished_paco2": wished}
    formula = ventilation.minute_ventilation_for_paco2
    return _of_minute("minute_ventilation_for_paco2", formula, at_gas, inputs)


def _predicted_weight(ctx: Context) -> DerivedFigure:
    height, sex = ctx.episode.number("height"), ctx.episode.latest_text("sex")
    base = ventilation.base_weight(sex)
    inputs = {
        "height": FigureInput(float(height.v[-1]), int(height.t[-1])) if len(height) else FigureInput(),
        "base_pbw": FigureInput(base),
    }
    found = derive("pbw", ventilation.predicted_body_weight, inputs, None)
    return replace(found, inputs={"height": inputs["height"], "sex": FigureInput(sex)})


def _gas(ctx: Context) -> GasFigure | None:
    """The newest gas on support that stands for an arterial one and has a PaCO2."""
    worn = (g for g in reversed(ctx.gases) if ctx.support.on_support(g.at) and not g.off_support)
    return next((g for g in worn if g.site in STANDS_FOR_ARTERIAL and g.paco2_mmHg is not None), None)


def _breathing(ctx: Context, at: Instant | None, walls: Walls) -> _Breathing:
    if at is None:
        return _Breathing(None, FigureInput(), None, None, _no_volume(ctx))
    found = rate_at(ctx, at, walls)
    rate = found.given
    volume = measured_at(ctx, "vte", at, walls)
    code = volume.code if volume is not None else None
    minute = measured_at(ctx, "mv", at, walls, rate=found.number, code=code)
    return _Breathing(at, rate, volume, minute, _no_volume(ctx))


def _no_volume(ctx: Context) -> Message:
    """That none was measured, or only with the mask off: a reading that stands on the screen is not denied."""
    volumes = ctx.episode.number("vte")
    if not len(volumes) or not in_any(volumes.t, ctx.support.off_times).all():
        return Message("ventilation.no_tidal_volume")
    return Message("ventilation.tidal_volume_off_mask", {"at": int(volumes.t[-1])})


def _tidal_volume(b: _Breathing) -> DerivedFigure:
    caveats = ventilation.CAVEATS["tidal_volume_per_kg"]
    if b.volume is None:
        return DerivedFigure("tidal_volume", caveats=caveats, reason=b.no_volume)
    value = b.volume.value
    return DerivedFigure("tidal_volume", value.value, value.at, {"vte": value}, b.volume.doubt, caveats)


def _of_volume(
    key: str, formula: Callable[..., float], b: _Breathing, others: Mapping[str, FigureInput]
) -> DerivedFigure:
    caveats = _caveats(formula)
    if b.volume is None:
        return DerivedFigure(key, caveats=caveats, reason=b.no_volume)
    inputs = {"vte": b.volume.value, **others}
    return derive(key, formula, inputs, b.volume.value.at, doubt=b.volume.doubt, caveats=caveats)


def _minute(b: _Breathing) -> DerivedFigure:
    """The device's own minute volume where it gives one, else tidal volume x rate."""
    formula = ventilation.minute_ventilation
    if b.minute is None:
        return _of_volume("minute_ventilation", formula, b, {"rr": b.rate})
    value = b.minute.value
    return DerivedFigure(
        "minute_ventilation", value.value, value.at, {"mv": value}, b.minute.doubt, _caveats(formula)
    )


def _of_minute(
    key: str, formula: Callable[..., float], minute: DerivedFigure, others: Mapping[str, FigureInput]
) -> DerivedFigure:
    inputs = {"mv": _given(minute), **others}
    if minute.reason is not None:
        return DerivedFigure(key, None, None, inputs, caveats=_caveats(formula), reason=minute.reason)
    return derive(key, formula, inputs, minute.at, doubt=minute.doubt, caveats=_caveats(formula))


def _alveolar(b: _Breathing, minute: DerivedFigure, pbw: DerivedFigure) -> DerivedFigure:
    """Alveolar ventilation of the breath that the minute ventilation and the rate make; dead space is assumed."""
    formula, key = ventilation.alveolar_ventilation, "alveolar_ventilation"
    rate = b.rate.value
    if minute.reason is not None or not isinstance(minute.value, float):
        return DerivedFigure(key, caveats=_caveats(formula), reason=minute.reason)
    if not isinstance(rate, float) or rate <= 0:
        return DerivedFigure(key, caveats=_caveats(formula), reason=Message("ventilation.no_rate"))
    dead = DEAD_SPACE_PER_KG * pbw.value if isinstance(pbw.value, float) else DEAD_SPACE_ML
    breath = FigureInput(minute.value * _PER_L_TO_ML / rate, minute.at, _span(minute))
    inputs = {"vte": breath, "rr": b.rate, "dead_space": FigureInput(dead)}
    return derive(key, formula, inputs, minute.at, doubt=b.doubt, caveats=_caveats(formula))


def _caveats(formula: Callable[..., float]) -> tuple[Message, ...]:
    return ventilation.CAVEATS.get(formula.__name__, ())


def _given(figure: DerivedFigure) -> FigureInput:
    return FigureInput(figure.value, figure.at, _span(figure))


def _span(figure: DerivedFigure) -> tuple[Instant, Instant] | None:
    """The samples that the volume a figure is made from is the median of."""
    volume = figure.inputs.get("mv") or figure.inputs.get("vte")
    return volume.median_of if volume is not None else None
