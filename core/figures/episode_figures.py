"""The figures of one episode as of one moment, computed in stages.

    record -> gases -> anchors and responses -> trends and scores -> markers -> due items -> concern

Each stage reads the context that the earlier ones filled and makes a new one.
"""

from __future__ import annotations

from dataclasses import replace

from core.judgement.anchors import Anchor, find_anchors
from core.judgement.context import Context
from core.judgement.gas_findings import gas_figures
from core.judgement.policy import Policy
from core.judgement.response import judge_responses
from core.judgement.score_inputs import barriers, hacor_at_gases, news2_latest
from core.judgement.shapes import EpisodeFigures, ScoreFigure
from core.judgement.support_findings import support_figure
from core.record.channels import Group, Kind, by_group
from core.record.episode import Episode
from core.record.instant import Instant
from core.record.message import Message
from core.record.settings import SettingsInForce
from core.record.support import support_time


def record_stage(episode: Episode, as_of: Instant, policy: Policy) -> Context:
    """The record cut at the moment, with settings in force and support found in it."""
    cut = episode.until(as_of)
    settings = SettingsInForce(cut)
    return Context(cut, as_of, policy, settings, support_time(cut, settings))


def gas_stage(ctx: Context) -> Context:
    """Every gas by itself."""
    return replace(ctx, gases=gas_figures(ctx.episode.gases, ctx.settings, ctx.support, ctx.policy))


def response_stage(ctx: Context) -> tuple[Context, tuple[Anchor, ...]]:
    """Anchors, and what each did."""
    anchors = find_anchors(ctx.episode, ctx.settings, ctx.support, ctx.policy)
    return replace(ctx, responses=judge_responses(ctx, anchors)), anchors


def score_stage(ctx: Context, anchors: tuple[Anchor, ...]) -> Context:
    """Scores at their moments, from inputs that no anchor or break parts from them."""
    walls = barriers(tuple(step.at for a in anchors for step in a.steps), ctx.support)
    at_gases = hacor_at_gases(ctx, walls)
    scores = {"news2": news2_latest(ctx, walls)}
    scores["hacor"] = (
        at_gases[max(at_gases)] if at_gases else ScoreFigure(reasons={"points": Message("score.no_gas", {})})
    )
    return replace(ctx, scores=scores, hacor_at_gases=at_gases)


def episode_figures(episode: Episode, as_of: Instant, policy: Policy) -> EpisodeFigures:
    """Everything computed for one episode as of one moment.

    `episode` may hold later happenings: they are cut off first, so nothing later can leak into a figure.
    """
    ctx, anchors = response_stage(gas_stage(record_stage(episode, as_of, policy)))
    ctx = score_stage(ctx, anchors)
    return EpisodeFigures(
        episode=episode.key,
        as_of=as_of,
        label=ctx.episode.label,
        zone=episode.zone,
        profile=profile(ctx.episode),
        support=support_figure(ctx.episode, ctx.settings, ctx.support, as_of),
        responses=ctx.responses,
        gases=ctx.gases,
        scores=ctx.scores,
        policy_hash=policy.hash,
    )


def profile(episode: Episode) -> dict[str, float | str | None]:
    """The newest value of each profile fact, in canonical units; None where nothing was logged."""
    facts: dict[str, float | str | None] = {}
    for channel in by_group(Group.PROFILE):
        numeric = channel.kind in (Kind.NUMBER, Kind.INSTANT)
        facts[channel.key] = episode.latest(channel.key) if numeric else episode.latest_text(channel.key)
    return facts
