"""All scores of an episode: HACOR and its update, the COPD failure chart, NEWS2; ROX once its trend is known."""

from __future__ import annotations

from dataclasses import replace

from core.judgement.anchors import Anchor
from core.judgement.context import Context
from core.judgement.gas_findings import STANDS_FOR_ARTERIAL
from core.judgement.score_inputs import (
    Walls,
    barriers,
    gas_inputs,
    hacor_at_gases,
    news2_latest,
    on_mask,
    pf_reason,
    score_figure,
    texts_of,
)
from core.judgement.scores_copd_failure import RiskClass, copd_failure
from core.judgement.scores_hacor_updated import hacor_updated
from core.judgement.shapes import GasFigure, ScoreFigure, ScoreInput
from core.record.instant import HOUR
from core.record.message import Message

NO_GAS = ScoreFigure(reasons={"points": Message("score.no_gas", {})})


def with_scores(ctx: Context, anchors: tuple[Anchor, ...]) -> Context:
    """The context with every score at its moment, from inputs that no anchor or break parts from them."""
    walls = barriers(tuple(step.at for a in anchors for step in a.steps), ctx.support)
    at_gases = hacor_at_gases(ctx, walls)
    gas = next((g for g in reversed(ctx.gases) if g.site in STANDS_FOR_ARTERIAL and not g.off_support), None)
    scores = {
        "hacor": at_gases[gas.at] if gas is not None else NO_GAS,
        "hacor_updated": _updated(ctx, gas, walls) if gas is not None else NO_GAS,
        "news2": news2_latest(ctx, walls),
    }
    if ctx.indication == "copd" and gas is not None:
        scores["copd_failure"] = _copd(ctx, gas, walls)
    return replace(ctx, scores=scores, hacor_at_gases=at_gases)


def with_rox(ctx: Context) -> Context:
    """The context with ROX as a score, once its trend is known."""
    return replace(ctx, scores={**ctx.scores, "rox": rox_figure(ctx)})


def _updated(ctx: Context, gas: GasFigure, walls: Walls) -> ScoreFigure:
    """Updated HACOR at a gas: off, and saying so, until the ward switches it on."""
    found = gas_inputs(ctx, gas, walls)
    on = ctx.policy.scores.hacor_updated
    score = hacor_updated(
        enabled=on, hr=found["hr"].number, ph=gas.ph, gcs=found["gcs"].number, pf=gas.pf_mmHg,
        rr=found["rr"].number, sofa=ctx.episode.latest("sofa"), pneumonia=_fact(ctx, "pneumonia", "pneumonia"),
        cardiogenic_oedema=_is(ctx, "cardiogenic pulmonary oedema"),
        pulmonary_ards=_fact(ctx, "pulmonary_ards", None),
        immunosuppression=_fact(ctx, "immunosuppression", None), septic_shock=_fact(ctx, "septic_shock", None),
        paco2=gas.paco2_mmHg, texts=texts_of(found), on_mask=on_mask(ctx, gas.at),
    )  # fmt: skip
    figure = score_figure(score, gas.at, found, pf_reason(gas))
    return replace(figure, enabled=on, caveat=score.notes[0])


def hacor_updated_at(ctx: Context, gas: GasFigure) -> ScoreFigure:
    """Updated HACOR at any gas of a judged context; without figures until the ward switches it on."""
    return _updated(ctx, gas, barriers(tuple(s.at for a in ctx.anchors for s in a.steps), ctx.support))


def _is(ctx: Context, indication: str) -> bool | None:
    return None if ctx.indication is None else ctx.indication == indication


def _fact(ctx: Context, channel: str, indication: str | None) -> bool | None:
    """A risk fact as logged; where nobody said, the indication may say yes but never no."""
    said = {"yes": True, "no": False}.get(ctx.episode.latest_text(channel) or "")
    if said is None and indication is not None and ctx.indication == indication:
        return True
    return said


def _copd(ctx: Context, gas: GasFigure, walls: Walls) -> ScoreFigure:
    """The COPD failure chart's class at a gas. It has no points: the class stands in the caveat."""
    found = gas_inputs(ctx, gas, walls)
    late = ctx.support.start is not None and gas.at >= ctx.support.start + 2 * HOUR
    risk = copd_failure(
        ph=gas.ph, rr=found["rr"].number, gcs=found["gcs"].number, apache=ctx.episode.latest("apache"),
        after_two_hours=late, copd=True, texts=texts_of(found),
    )  # fmt: skip
    inputs = {
        name: ScoreInput(found[name].value, found[name].at, step, found[name].median_of) if name in found
        else ScoreInput(ctx.episode.latest(name), None, step)
        for name, step in risk.steps.items()
    }  # fmt: skip
    return ScoreFigure(
        at=gas.at, missing=risk.missing, inputs=inputs, population=risk.population, caveat=_class(risk),
        reasons={"points": Message("score.is_a_class", {})},
    )  # fmt: skip


def _class(risk: RiskClass) -> Message:
    return Message(
        "copd_failure.risk",
        {
            "lowest": risk.lowest.name.lower(),
            "highest": risk.highest.name.lower(),
            "up_to": None if risk.highest == risk.lowest else risk.highest.name.lower(),
            "known": risk.risk is not None,
            "published_above_percent": risk.published_above_percent,
        },
    )


def rox_figure(ctx: Context) -> ScoreFigure:
    """ROX as a score: validated in pneumonia on high-flow oxygen, so outside its population on a mask."""
    inside = ctx.settings.at(ctx.as_of).mode == "high-flow nasal" and ctx.indication == "pneumonia"
    reasons = {"points": ctx.rox.reasons["latest"]} if "latest" in ctx.rox.reasons else {}
    if ctx.rox.latest is None and not reasons:
        reasons = {"points": Message("score.no_vitals", {})}
    return ScoreFigure(
        points=ctx.rox.latest, lowest=ctx.rox.latest, highest=ctx.rox.latest, at=ctx.rox.at,
        population="inside" if inside else "outside", caveat=ctx.rox.caveat, reasons=reasons,
    )  # fmt: skip
