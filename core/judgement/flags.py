"""Flags: the markers that are or were met, with their evidence, and what people have said of them.

Whether a marker is met is computed; what happened to its flag (raised, seen, settled, no longer met, undone by a
correction) is in the ledger. This module brings both together.
"""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, replace

from core.judgement.context import Context
from core.judgement.flag_history import History, history_of, transitions, word_on
from core.judgement.markers.gas_points import not_settled
from core.judgement.markers.observed import Observed
from core.judgement.markers.population import inside
from core.judgement.markers.registry import ABSOLUTE, MARKERS, ORDER, Marker
from core.judgement.markers.spells import Spell, united, without_flicker
from core.judgement.policy_sections import MarkerRule
from core.judgement.shapes import FlagFigure
from core.record.instant import MINUTE, Instant, iso
from core.record.message import Message

__all__ = ["evaluate", "flag_id", "open_flags", "transitions", "word_on"]

TIERS = ("escalate", "concern", "remark")
STILL_WATCHED = frozenset({"stopped", "ended_at"})
"""Ends after which a patient breathes without support, so that a gas logged then counts. Not intubation or arrest."""
RAISED, SEEN, SETTLED, NO_LONGER = "raised", "seen", "settled", "no longer met"


def evaluate(ctx: Context, seen: Observed | None = None) -> tuple[FlagFigure, ...]:
    """Every flag of an episode: met now or earlier, strongest first, ended ones last; and those undone."""
    seen = seen if seen is not None else Observed(ctx)
    found = [
        _Met(marker, ctx.policy.markers[key], spell)
        for key, marker in MARKERS.items()
        if key in ctx.policy.markers and ctx.policy.markers[key].on
        for spell in spells_of(seen, marker, ctx.policy.markers[key])
    ]
    history = history_of(e for e in ctx.episode.transitions)
    flags = _identified(found, history, seen)
    return tuple(_with_strongest([*flags, *_vanished(flags, history, ctx)]))


@dataclass(frozen=True, slots=True)
class _Met:
    marker: Marker
    rule: MarkerRule
    spell: Spell


def spells_of(seen: Observed, marker: Marker, rule: MarkerRule) -> list[Spell]:
    """The spells of one marker: flicker joined, ended with support, outside its population only as a remark."""
    shipped = rule is seen.policy.markers.get(marker.key)  # another rule is tried out: not kept
    found = seen.once(lambda s: _found(s, marker, rule), marker.key) if shipped else _found(seen, marker, rule)
    if not found:
        return []
    spells = without_flicker(found, int(rule.gap_min * MINUTE), seen.as_of)
    end = seen.support.end
    if end is None or end > seen.as_of or marker.after_end:
        return spells
    if marker.key not in ABSOLUTE or seen.support.ended_by not in STILL_WATCHED:
        return _until(end, spells)
    after = [s for s in spells if newest_of(s.evidence) >= end]
    return sorted([*_until(end, (s for s in spells if s not in after)), *after], key=lambda s: s.since)


def _found(seen: Observed, marker: Marker, rule: MarkerRule) -> list[Spell]:
    """Where a marker was met; outside its population only as a remark."""
    found = list(marker.find(seen, rule))
    if not marker.judges_population and rule.population != "any":
        found = [replace(s, outside_population=not inside(seen, rule.population, s.since)) for s in found]
    return united(s for s in found if rule.outside == "remark" or not s.outside_population)


def _until(end: Instant, spells: Iterable[Spell]) -> list[Spell]:
    return [replace(s, until=end if s.until is None else min(s.until, end)) for s in spells if s.since < end]


def newest_of(evidence: Iterable[Message]) -> Instant:
    """When the newest value that a flag rests on was; 0 where none says."""
    return max((int(m.values.get(k) or 0) for m in evidence for k in ("at", "second_at")), default=0)


def flag_id(marker: str, since: Instant) -> str:
    """The name of a flag: its marker and when it began, the same in every window.

    >>> flag_id("ph_below_severe", 1_774_664_880_000_000)
    'ph_below_severe@2026-03-28T02:28:00+00:00'
    """
    return f"{marker}@{iso(since)}"


def _identified(found: list[_Met], history: dict[str, History], seen: Observed) -> list[FlagFigure]:
    """A flag that the ledger already holds keeps its name and what people said, though its beginning moved."""
    taken: set[str] = set()
    flags = []
    for met in found:
        own = flag_id(met.marker.key, met.spell.since)
        known = history.get(own) or next(
            (h for h in history.values() if h.flag_id not in taken and _same(h, met)), None
        )
        name = known.flag_id if known is not None else own
        taken.add(name)
        flags.append(_figure(met, name, known, seen))
    return flags


def _same(history: History, met: _Met) -> bool:
    until = met.spell.until
    inside = met.spell.since <= history.since and (until is None or history.since < until)
    return history.marker == met.marker.key and inside


def _figure(met: _Met, name: str, known: History | None, seen: Observed) -> FlagFigure:
    rule, spell = met.rule, met.spell
    flag = FlagFigure(
        flag_id=name, marker=met.marker.key, group=rule.group,
        tier="remark" if spell.outside_population else rule.tier, since=spell.since,
        evidence=(*spell.evidence, *_beside(met, seen)), source=rule.source, sure=rule.sure,
        policy=seen.policy.hash, ended_at=spell.until, state=RAISED if spell.until is None else NO_LONGER,
        outside_population=spell.outside_population, detail_sure=rule.detail_sure or "",
    )  # fmt: skip
    return flag if known is None else _as_handled(flag, known)


def _beside(met: _Met, seen: Observed) -> tuple[Message, ...]:
    """What is said beside the evidence: outside the population, a newer gas that does not settle it, nothing newer
    for long, a ceiling of care."""
    rule, spell, ctx = met.rule, met.spell, seen.ctx
    said: list[Message] = []
    if spell.outside_population:
        said.append(Message("evidence.outside_population", {"population": rule.population}))
    newest = newest_of(spell.evidence)
    unsettled = not_settled(seen, met.marker.key, spell.evidence) if spell.until is None else None
    said += [unsettled] if unsettled is not None else []
    if spell.until is None and 0 < newest < ctx.as_of - rule.stale_min * MINUTE:
        said.append(Message("evidence.stale", {"at": newest, "minutes": (ctx.as_of - newest) // MINUTE}))
    ceiling = ctx.episode.latest_text("ceiling_of_care")
    if rule.tier == "escalate" and ceiling not in (None, "full", "not recorded"):
        said.append(Message("evidence.ceiling", {"ceiling": ceiling}))
    return tuple(said)


def _as_handled(flag: FlagFigure, known: History) -> FlagFigure:
    """The flag with who has seen and who has settled it."""
    state = flag.state
    if state == RAISED and known.seen_at is not None:
        state = SEEN
    if state in (RAISED, SEEN) and known.settled_at is not None:
        state = SETTLED
    return replace(
        flag, state=state, seen_by=known.seen_by, seen_at=known.seen_at, settled_by=known.settled_by,
        settled_at=known.settled_at, settled_why=known.settled_why,
    )  # fmt: skip


def _vanished(flags: list[FlagFigure], history: dict[str, History], ctx: Context) -> list[FlagFigure]:
    """Flags that were raised once and that the record, as it is known now, no longer bears out."""
    present = {f.flag_id for f in flags}
    gone = (h for h in history.values() if h.flag_id not in present and h.since <= ctx.as_of)
    return [_as_handled(h.figure(ctx.as_of, ctx.policy.hash), h) for h in gone]


def strength(flag: FlagFigure) -> tuple[int, int, int, Instant]:
    """The order of flags: open before settled before ended, then tier, then the marker's own order."""
    handled = {RAISED: 0, SEEN: 0, SETTLED: 1}.get(flag.state, 2)
    return handled, TIERS.index(flag.tier), ORDER.get(flag.marker, len(ORDER)), flag.since


def _with_strongest(flags: Iterable[FlagFigure]) -> list[FlagFigure]:
    """The strongest of each group shows, the others stand under it. A new flag is never under a settled one."""
    out = []
    groups: set[str] = set()
    for flag in sorted(flags, key=strength):
        over = flag.state == NO_LONGER
        shown = flag.group not in groups
        out.append(flag if flag.strongest is shown else replace(flag, strongest=shown))
        if not over:
            groups.add(flag.group)
    return out


def open_flags(flags: Iterable[FlagFigure]) -> list[FlagFigure]:
    """The flags that stand and that nobody has settled."""
    return [f for f in flags if f.state in (RAISED, SEEN)]
