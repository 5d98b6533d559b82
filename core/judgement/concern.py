"""Whom to see first and why: the rank of an episode among the ward's.

An open flag that is to be escalated comes first, then concern, then what is overdue. Among equals the state of the
last gas drives the order: severe before acidotic before the rest; then how long a flag has stood. Comfort care lowers
the rank and hides nothing.
"""

from __future__ import annotations

from collections.abc import Iterable

from core.judgement.context import Context
from core.judgement.flags import open_flags, strength
from core.judgement.gas_findings import STANDS_FOR_ARTERIAL
from core.judgement.shapes import Concern, DueFigure, FlagFigure
from core.record.instant import HOUR, Instant
from core.record.message import Message, Value

ESCALATE, CONCERN, OVERDUE, REMARK, SOON, QUIET, ENDED = range(7)
_TIER_RANK = {"escalate": ESCALATE, "concern": CONCERN, "remark": REMARK}
_STATE_ORDER = {"severe": 0.0, "acidotic": 1.0}
COMFORT_FROM = REMARK
UNCONFIRMED = frozenset({"from memory", "common practice"})
"""How sure a threshold is that a ward has to confirm: it says so wherever it is shown."""
CARE = frozenset({"skin_check", "ceiling", "probable_break"})
"""Due items that nobody has to be seen for first."""


def concern(ctx: Context, flags: Iterable[FlagFigure], due: Iterable[DueFigure]) -> Concern:
    """The rank of an episode, its order among equals (lower first), and why it stands there."""
    flags, due = tuple(flags), tuple(due)
    end = ctx.support.end
    if end is not None and end <= ctx.as_of:
        return Concern(ENDED, 0.0, Message("concern.ended", {"ended_at": end, "by": ctx.support.ended_by}))
    rank, why, since = _ranked(ctx, flags, due)
    if ctx.comfort_care:
        rank = max(rank, COMFORT_FROM)
    return Concern(rank, _order(ctx, flags, since), why)


def _ranked(
    ctx: Context, flags: tuple[FlagFigure, ...], due: tuple[DueFigure, ...]
) -> tuple[int, Message | None, Instant]:
    standing = sorted(open_flags(flags), key=strength)
    settled = [f for f in flags if f.state == "settled"]
    overdue = [d for d in due if d.state == "overdue" and d.what not in CARE]
    care = [d for d in due if d.state == "overdue" and d.what in CARE]
    soon = [d for d in due if d.state == "soon"]
    first = standing[0] if standing else None
    if first is not None and first.tier != "remark":
        return _TIER_RANK[first.tier], _flag_why(ctx, first, standing), first.since
    if overdue:
        oldest = min(overdue, key=lambda d: d.due_until)
        return OVERDUE, _due_why("concern.overdue", oldest), oldest.due_until
    if first is not None or settled:
        shown = first if first is not None else min(settled, key=strength)
        return REMARK, _flag_why(ctx, shown, standing or settled), shown.since
    if care:
        oldest = min(care, key=lambda d: d.due_until)
        return REMARK, _due_why("concern.overdue", oldest), oldest.due_until
    if soon:
        next_due = min(soon, key=lambda d: d.due_until)
        return SOON, _due_why("concern.due_soon", next_due), next_due.due_until
    return QUIET, None, ctx.as_of


def _due_why(key: str, due: DueFigure) -> Message:
    return Message(key, {"what": due.what, "until": due.due_until})


def _flag_why(ctx: Context, flag: FlagFigure, standing: list[FlagFigure]) -> Message:
    values: dict[str, Value] = {
        "marker": flag.marker, "tier": flag.tier, "since": flag.since,
        "more": len({f.group for f in standing}) - 1,  # a group counts once, here as on the ward's lanes
        "state": _state(ctx), "unconfirmed": flag.sure in UNCONFIRMED,
    }  # fmt: skip
    return Message("concern.flag", values)


def _state(ctx: Context) -> str | None:
    return next((g.state for g in reversed(ctx.gases) if g.site in STANDS_FOR_ARTERIAL and g.state), None)


def _order(ctx: Context, flags: tuple[FlagFigure, ...], since: Instant) -> float:
    """State first, then the number of groups that flag, then how long it has stood (at most two days)."""
    groups = len({f.group for f in open_flags(flags) if f.tier != "remark"})
    hours = min((ctx.as_of - since) / HOUR, 48.0)
    return _STATE_ORDER.get(_state(ctx) or "", 2.0) * 100.0 - min(groups, 9) * 10.0 - hours / 48.0 * 9.0
