"""Whom to see first and why: the rank of an episode among the ward's.

An open flag that is to be escalated comes first, then concern, then what is overdue. The state of the last gas holds
the rank up where no flag does: severe stands with the concerns, acidotic with what is overdue. Among equals it drives
the order: severe before acidotic before the rest, without support before on it; then how long a flag has stood.
Comfort care lowers the rank and hides nothing.
"""

from __future__ import annotations

from collections.abc import Iterable

from core.judgement.context import Context
from core.judgement.flags import open_flags, strength
from core.judgement.gas_findings import STANDS_FOR_ARTERIAL
from core.judgement.markers.registry import ABSOLUTE
from core.judgement.shapes import Concern, DueFigure, FlagFigure, GasFigure
from core.record.instant import HOUR, Instant
from core.record.message import Message, Value

ESCALATE, CONCERN, OVERDUE, REMARK, SOON, QUIET, ENDED = range(7)
_TIER_RANK = {"escalate": ESCALATE, "concern": CONCERN, "remark": REMARK}
_STATE_ORDER = {"severe": 0.0, "acidotic": 1.0}
_STATE_RANK = {"severe": CONCERN, "acidotic": OVERDUE}
UNSUPPORTED = 0.5
"""How much nearer to the sicker state an acidosis stands that no support treats."""
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
        return _ended(ctx, flags, end)
    rank, why, since = _ranked(ctx, flags, due)
    floor = _STATE_RANK.get(_state(ctx) or "", QUIET)
    if floor < rank:
        rank, why = floor, _state_why(ctx)
    if ctx.comfort_care:
        rank = max(rank, COMFORT_FROM)
    return Concern(rank, _order(ctx, flags, since), why)


def _ended(ctx: Context, flags: tuple[FlagFigure, ...], end: Instant) -> Concern:
    """An ended episode stands last, unless something after the end raised a flag that is still open."""
    since = [f for f in open_flags(flags) if f.marker in ABSOLUTE]
    if not since or ctx.comfort_care:
        return Concern(ENDED, 0.0, Message("concern.ended", {"ended_at": end, "by": ctx.support.ended_by}))
    rank, why, began = _ranked(ctx, tuple(since), ())
    return Concern(rank, _order(ctx, tuple(since), began), why)


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
    gas = _last_with_state(ctx)
    return gas.state if gas is not None else None


def _last_with_state(ctx: Context) -> GasFigure | None:
    return next((g for g in reversed(ctx.gases) if g.site in STANDS_FOR_ARTERIAL and g.state), None)


def _supported(ctx: Context) -> bool:
    return ctx.support.on_support(ctx.as_of)


def _state_why(ctx: Context) -> Message | None:
    gas = _last_with_state(ctx)
    if gas is None:
        return None
    values: dict[str, Value] = {"state": gas.state, "gas_at": gas.at, "ph": gas.ph,
                                "support": "on support" if _supported(ctx) else "not on support"}  # fmt: skip
    return Message("concern.state", values)


def _order(ctx: Context, flags: tuple[FlagFigure, ...], since: Instant) -> float:
    """State and support first, then the number of groups that flag, then how long it has stood (two days at most)."""
    groups = len({f.group for f in open_flags(flags) if f.tier != "remark"})
    hours = min((ctx.as_of - since) / HOUR, 48.0)
    state = _state(ctx)
    step = _STATE_ORDER.get(state or "", 2.0) - (
        UNSUPPORTED if state in _STATE_ORDER and not _supported(ctx) else 0.0
    )
    return step * 100.0 - min(groups, 9) * 10.0 - hours / 48.0 * 9.0
