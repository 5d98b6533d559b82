"""The figures of one episode as of one moment, computed in stages.

    record -> gases -> anchors and responses -> scores -> trends -> markers -> due items -> concern and levers

Each stage reads the context that the earlier ones filled and makes a new one. The stages up to the scores may be
kept (`stage_cache`): they change only when the record does or a window opens or closes. So may the spells of markers
that read nothing that moves with the clock.
"""

from __future__ import annotations

from dataclasses import replace

from core.figures.stage_cache import StageCache
from core.judgement.anchors import find_anchors
from core.judgement.concern import concern
from core.judgement.context import Context
from core.judgement.course import with_courses
from core.judgement.due import due_items
from core.judgement.expected_co2 import expected
from core.judgement.flags import evaluate
from core.judgement.gas_findings import gas_figures
from core.judgement.leak_trend import leak_doubts, leak_figure
from core.judgement.levers import levers
from core.judgement.markers.observed import Observed
from core.judgement.now import now_figure
from core.judgement.oxygenation_findings import oxygenation_figure
from core.judgement.policy import Policy
from core.judgement.response import judge_responses
from core.judgement.score_findings import with_rox, with_scores
from core.judgement.score_inputs import barriers
from core.judgement.shapes import EpisodeFigures, ExpectedCO2, RatioFigure
from core.judgement.support_findings import support_figure
from core.judgement.trend import channel_trend, ratio_trends
from core.judgement.ventilation_findings import ventilation_figure
from core.record.channels import Group, Kind, by_group
from core.record.episode import Episode
from core.record.instant import Instant
from core.record.settings import SettingsInForce
from core.record.support import support_time

TRENDED = ("rr", "spo2", "hr", "vte_per_kg", "mv")
"""Channels whose trend is shown beside the ratios and the leak."""


def record_stage(episode: Episode, as_of: Instant, policy: Policy) -> Context:
    """The record cut at the moment, with settings in force and support found in it."""
    cut = episode.until(as_of)
    settings = SettingsInForce(cut)
    return Context(cut, as_of, policy, settings, support_time(cut, settings))


def gas_stage(ctx: Context) -> Context:
    """Every sample by itself, and which of them are blood gases."""
    samples = gas_figures(ctx.episode.gases, ctx.settings, ctx.support, ctx.policy)
    return replace(ctx, samples=samples, gases=tuple(g for g in samples if g.is_blood_gas))


def response_stage(ctx: Context) -> Context:
    """Anchors, and what each did."""
    anchors = find_anchors(ctx.episode, ctx.settings, ctx.support, ctx.policy)
    responses = with_courses(ctx, anchors, judge_responses(ctx, anchors))
    return replace(ctx, anchors=anchors, responses=responses)


def trend_stage(ctx: Context) -> Context:
    """P/F, S/F, ROX and leak over the policy's span."""
    ratios = ratio_trends(ctx)
    return replace(ctx, pf=ratios["pf"], sf=ratios["sf"], rox=ratios["rox"], leak=leak_figure(ctx))


def early_stages(episode: Episode, as_of: Instant, policy: Policy) -> Context:
    """Record, gases, anchors, responses and scores: what stands until something new happens or a window turns."""
    ctx = response_stage(gas_stage(record_stage(episode, as_of, policy)))
    return with_scores(ctx, ctx.anchors)


def judged(episode: Episode, as_of: Instant, policy: Policy, cache: StageCache | None = None) -> Context:
    """Everything that markers and due items read."""
    if cache is None:
        early = early_stages(episode, as_of, policy)
    else:
        early = cache.early_stages(episode, as_of, policy, early_stages)
    return with_rox(trend_stage(early))


def channel_trends(ctx: Context) -> dict[str, RatioFigure]:
    """The trend of each channel that is trended and logged."""
    logged = (c for c in TRENDED if len(ctx.episode.number(c.removesuffix("_per_kg"))) or c == "rr")
    return {c: channel_trend(ctx, c) for c in logged}


def expected_co2(ctx: Context) -> ExpectedCO2 | None:
    """The PaCO2 to expect after the latest anchor that acts on CO2."""
    acting = [a for a in ctx.anchors if "co2" in a.effects]
    return expected(ctx, acting[-1]) if acting else None


def episode_figures(
    episode: Episode, as_of: Instant, policy: Policy, cache: StageCache | None = None
) -> EpisodeFigures:
    """Everything computed for one episode as of one moment.

    `episode` may hold later happenings: they are cut off first, so nothing later can leak into a figure. A
    `cache` keeps the early stages of an unchanged record; the figures are the same with and without one.
    """
    ctx = judged(episode, as_of, policy, cache)
    seen = Observed(ctx) if cache is None else cache.observed(ctx)
    flags = evaluate(ctx, seen)
    due = due_items(ctx, flags, seen)
    walls = barriers(tuple(step.at for a in ctx.anchors for step in a.steps), ctx.support)
    return EpisodeFigures(
        episode=episode.key,
        as_of=as_of,
        label=ctx.episode.label,
        zone=episode.zone,
        profile=profile(ctx.episode),
        support=support_figure(ctx.episode, ctx.settings, ctx.support, as_of, policy.freshness.silence_h.value),
        responses=ctx.responses,
        gases=ctx.gases,
        pf=ctx.pf,
        sf=ctx.sf,
        rox=ctx.rox,
        trends=channel_trends(ctx),
        leak=ctx.leak,
        scores=ctx.scores,
        flags=flags,
        due=due,
        concern=concern(ctx, flags, due),
        now=now_figure(seen),
        levers=levers(ctx, flags),
        expected_co2=expected_co2(ctx),
        oxygenation=oxygenation_figure(ctx, walls),
        ventilation=ventilation_figure(ctx, walls),
        policy_hash=policy.hash,
        warnings=leak_doubts(ctx.leak, policy.leak),
    )


def profile(episode: Episode) -> dict[str, float | str | None]:
    """The newest value of each profile fact, in canonical units; None where nothing was logged."""
    facts: dict[str, float | str | None] = {}
    for channel in by_group(Group.PROFILE):
        numeric = channel.kind in (Kind.NUMBER, Kind.INSTANT)
        facts[channel.key] = episode.latest(channel.key) if numeric else episode.latest_text(channel.key)
    return facts
