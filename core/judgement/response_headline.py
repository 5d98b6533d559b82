"""The headline of an anchor: the verdict of the newest gas that counts for it, or why there is none."""

from __future__ import annotations

from dataclasses import dataclass

from core.judgement import arms
from core.judgement.anchors import Anchor
from core.judgement.context import Context
from core.judgement.response_baseline import VENOUS, Baseline
from core.judgement.response_shapes import JudgedGas
from core.judgement.shapes import GasFigure
from core.record.instant import Instant
from core.record.message import Message


@dataclass(frozen=True, slots=True)
class Headline:
    """A verdict, "not yet known" or "not judged", the gas it rests on, that gas's state, and why."""

    headline: str
    gas_at: Instant | None
    state: str | None
    why: tuple[Message, ...]


def headline(
    ctx: Context, anchor: Anchor, base: Baseline, judged: tuple[JudgedGas, ...], until: Instant | None
) -> Headline:
    """The headline of an anchor. An early gas never gives it: CO2 stores are not steady so soon.

    The newest gas in the window or after it counts, so that a late relapse is never hidden behind an early gain.
    """
    moments = {j.at for j in judged}
    by_at = {g.at: g for g in ctx.gases if g.at in moments} if moments else {}
    steady = [j for j in judged if _counts(by_at[j.at], j)]
    decided = [j for j in steady if j.verdict is not None]
    cannot_tell = bool(steady) and steady[-1].verdict is None
    if cannot_tell and (by_at[steady[-1].at].in_doubt or (decided and decided[-1].verdict == arms.BETTER)):
        # an older better must not stand in for the newest gas: somebody has to settle what that one says
        return Headline(arms.NOT_JUDGED, steady[-1].at, steady[-1].state, steady[-1].why)
    if decided:
        newest = decided[-1]
        assert newest.verdict is not None
        return Headline(newest.verdict, newest.at, newest.state, newest.why)
    listed = [j for j in judged if j.attributable and by_at[j.at].site != VENOUS]
    state = listed[-1].state if listed else None
    if anchor.running_before:
        return Headline(arms.NOT_JUDGED, None, state, _reason(base, "response.support_was_running"))
    if steady:
        return Headline(arms.NOT_JUDGED, steady[-1].at, steady[-1].state, steady[-1].why)
    return _waiting(ctx, base, judged, until, state)


def _counts(gas: GasFigure, judged: JudgedGas) -> bool:
    return judged.attributable and judged.timing != "early" and gas.site != VENOUS and not gas.off_support


def _waiting(
    ctx: Context, base: Baseline, judged: tuple[JudgedGas, ...], until: Instant | None, state: str | None
) -> Headline:
    """No gas counts yet, or none can any more."""
    said = [_seen_so_far(j) for j in judged if j.attributable]
    if base.gas is None and base.why is not None:
        said.append(base.why)
    if until is not None:
        return Headline(arms.NOT_JUDGED, None, state, (Message("response.superseded", {"next_at": until}), *said))
    end = ctx.support.end
    if end is not None and end <= ctx.as_of:
        ended = Message("response.support_ended", {"ended_at": end, "by": ctx.support.ended_by})
        return Headline(arms.NOT_JUDGED, None, state, (ended, *said))
    return Headline(arms.NOT_YET, None, state, (Message("response.no_gas_yet", {}), *said))


def _seen_so_far(judged: JudgedGas) -> Message:
    """A gas that does not count for the headline, and what it says by itself."""
    if judged.verdict is None and judged.why:
        return judged.why[0]
    return Message(
        "response.only_early",
        {"gas_at": judged.at, "minutes": judged.minutes, "verdict": judged.verdict},
    )


def _reason(base: Baseline, key: str) -> tuple[Message, ...]:
    return (Message(key, {}), *((base.why,) if base.why is not None else ()))
