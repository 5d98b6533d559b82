"""What one marker says of a few lines of log: its spells as text, so that a table of cases reads like a chart."""

from __future__ import annotations

import msgspec

from core.figures.episode_figures import judged
from core.judgement.context import Context
from core.judgement.due import due_items
from core.judgement.flags import evaluate, spells_of
from core.judgement.markers.evidence import KEYS
from core.judgement.markers.observed import Observed
from core.judgement.markers.registry import MARKERS
from core.judgement.markers.spells import Spell
from core.judgement.policy import Policy, read_policy, shipped_text
from core.judgement.shapes import DueFigure, FlagFigure
from core.record.instant import Instant, iso
from core.record.message import Message
from tests.support.log_cases import at, episode

START = "01:00 mode BPAP-ST ipap 20 epap 5 fio2 30 rate_set 12\n"
BEFORE = "00:30 ph 7.28 paco2 70 pao2 60 site arterial rr 30 gcs 15\n"
COPD = "00:20 indication copd target_spo2_low 88 target_spo2_high 92 ceiling_of_care full\n"
LUNG = "00:20 indication pneumonia target_spo2_low 94 target_spo2_high 98 ceiling_of_care full\n"


def ctx(log: str, as_of: str = "12:00", policy: Policy | None = None) -> Context:
    """The judged record of a log as of a moment."""
    return judged(episode(log), at(as_of), policy or read_policy(shipped_text()))


def clock(moment: Instant) -> str:
    """Day and time of a moment as the cases write it."""
    day = (moment - at("00:00")) // 86_400_000_000
    return (f"d{day} " if day else "") + iso(moment)[11:16]


def spells(marker: str, log: str, as_of: str = "12:00", policy: Policy | None = None) -> list[Spell]:
    """The spells of a marker."""
    context = ctx(log, as_of, policy)
    found = spells_of(Observed(context), MARKERS[marker], context.policy.markers[marker])
    for message in (m for s in found for m in s.evidence):
        assert set(message.values) == set(KEYS[message.key]), f"{message.key} has other values than its list says"
    return found


def met(marker: str, log: str, as_of: str = "12:00", policy: Policy | None = None) -> str:
    """The spells of a marker as text: `02:10-03:00, 05:00-`."""
    found = spells(marker, log, as_of, policy)
    return ", ".join(f"{clock(s.since)}-{'' if s.until is None else clock(s.until)}" for s in found)


def told(marker: str, log: str, as_of: str = "12:00") -> dict[str, Message]:
    """The evidence of the newest spell, by key (the last of each)."""
    return {m.key: m for m in spells(marker, log, as_of)[-1].evidence}


def flags(log: str, as_of: str = "12:00") -> tuple[FlagFigure, ...]:
    """Every flag of a log as of a moment."""
    return evaluate(ctx(log, as_of))


def due(log: str, as_of: str, what: str | None = None) -> list[DueFigure]:
    """What is due as of a moment, or only the items of one kind."""
    context = ctx(log, as_of)
    return [d for d in due_items(context, evaluate(context)) if what is None or d.what == what]


def with_rule(marker: str, **changes: object) -> Policy:
    """The shipped policy with one marker's rule changed."""
    policy = read_policy(shipped_text())
    rule = msgspec.structs.replace(policy.markers[marker], **changes)
    return msgspec.structs.replace(policy, markers={**policy.markers, marker: rule})


__all__ = ["BEFORE", "COPD", "LUNG", "START", "ctx", "due", "flags", "met", "spells", "told", "with_rule"]
