"""Contraindications that appear on support: vomiting, agitation, apnoea, an undrained pneumothorax."""

from __future__ import annotations

from collections.abc import Iterable

from core.judgement.markers.observed import Observed
from core.judgement.markers.spells import Point, Spell, from_points
from core.judgement.policy_sections import MarkerRule
from core.record.instant import MINUTE
from core.record.message import Message


def _events(seen: Observed, rule: MarkerRule, channel: str) -> list[Spell]:
    """Each event on support stands for the policy's minutes; events within them are one."""
    start, hold = seen.support.start, int(rule.limits["hold_min"] * MINUTE)
    events = seen.episode.text(channel)
    found: list[Spell] = []
    for at, text in zip(events.t.tolist(), events.v, strict=True):
        if start is None or at < start:
            continue
        told = Message("evidence.event", {"event": channel, "at": at, "text": text})
        until = at + hold if at + hold <= seen.as_of else None
        last = found[-1] if found else None
        if last is not None and (last.until is None or at <= last.until):
            found[-1] = Spell(last.since, until, (*last.evidence, told))
        else:
            found.append(Spell(at, until, (told,)))
    return found


def vomiting(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """Vomiting on support: a relative contraindication appeared."""
    return _events(seen, rule, "vomiting")


def agitation(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """Agitation on support: a relative contraindication appeared."""
    return _events(seen, rule, "agitation")


def apnoea(seen: Observed, rule: MarkerRule) -> Iterable[Spell]:
    """Apnoea on support."""
    return _events(seen, rule, "apnoea")


def undrained_pneumothorax(seen: Observed, _rule: MarkerRule) -> Iterable[Spell]:
    """An undrained pneumothorax is a contraindication."""
    words = seen.episode.text("pneumothorax")
    points = []
    for at, text in zip(words.t.tolist(), words.v, strict=True):
        told = Message("evidence.event", {"event": "pneumothorax", "at": at, "text": text})
        points.append(Point(at, text == "yes", (told,)))
    return from_points(points)
