"""Care that is due while support runs: a reassessment, the skin under the mask."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from dataclasses import replace

import numpy as np

from core.judgement.due_item import Item, words_on
from core.judgement.markers.observed import Observed
from core.judgement.policy_sections import DueRule
from core.judgement.shapes import FlagFigure
from core.record.instant import MINUTE, Instant
from core.record.message import Message

NO_SKIN_UNDER = frozenset({"helmet", "mouthpiece"})


def _begun(seen: Observed) -> Instant | None:
    """From when care is counted: the start, or the first entry where support ran already."""
    start, first = seen.support.start, seen.first_at
    if start is None or start > seen.as_of:
        return None
    return start if first is None else max(start, first)


def skin_items(seen: Observed) -> Iterator[Item]:
    """A look at the skin under the mask at intervals of wear; breaks do not count as a look."""
    rule = seen.policy.due.get("skin_check")
    begun = _begun(seen)
    if rule is None or not rule.on or begun is None:
        return
    looks = [int(t) for t in seen.episode.text("skin_check").t if int(t) > begun]
    words = {e.at: e for e in words_on(seen.episode.transitions, "skin_check") if e.at > begun}
    looks = sorted({*looks, *words})
    ends = [*looks, None]
    for last, done in zip([begun, *looks], ends, strict=True):
        if (seen.settings.at(done or seen.as_of).interface or "") in NO_SKIN_UNDER:
            continue
        because = Message("due.skin_check", {"last_at": last}) if last in looks else _none_yet(seen, begun)
        item = Item("skin_check", because, last + int(rule.from_min * MINUTE), last + int(rule.until_min * MINUTE),
                    rule.soon_min)  # fmt: skip
        if done is not None:
            by = words[done].by or words[done].id if done in words else seen.entry_id("skin_check", done)
            item = replace(item, done_at=done, done_by=by)
        yield item


def _none_yet(seen: Observed, begun: Instant) -> Message:
    """That nobody looked at the skin since support began, or since logging did where support ran already."""
    of = "support" if begun == seen.support.start else "logging"
    return Message("due.first_skin_check", {"of": of, "since_at": begun})


def assessed(seen: Observed) -> list[Instant]:
    """The moments at which a person looked at the patient: a review, a check, or a counted rate."""
    words = (seen.episode.text(c).t for c in ("review", "checked_no_change"))
    counted = seen.spots("rr").t
    return sorted({int(t) for t in np.concatenate((*words, counted))})


def reassessment_item(seen: Observed, flags: Iterable[FlagFigure] = ()) -> Item | None:
    """The next look at the patient: an hour after the newest start or change, then every few hours.

    Every hour while a flag stands that is to be escalated and that nobody settled; comfort as the ceiling keeps to
    the longer interval.
    """
    rule = seen.policy.due.get("reassessment")
    begun = _begun(seen)
    if rule is None or not rule.on or begun is None:
        return None
    plain = _after_anchor(seen, rule, begun)
    urgent = [f for f in flags if f.tier == "escalate" and f.ended_at is None and f.state in ("raised", "seen")]
    if not urgent or seen.ctx.comfort_care:
        return plain
    hourly = min((_after_flag(seen, rule, f) for f in urgent), key=lambda i: i.due_until)
    return min((hourly, plain), key=lambda i: i.due_until)


def _after_flag(seen: Observed, rule: DueRule, flag: FlagFigure) -> Item:
    """An hour after the flag was met, then an hour after each look. A look at that minute is what raised it."""
    said = (e.at for e in words_on(seen.episode.transitions, "reassessment"))
    last = max((t for t in (*assessed(seen), *said) if t > flag.since), default=None)
    base = flag.since if last is None else last
    because = Message("due.reassessment_flag", {"marker": flag.marker, "since": flag.since, "last_at": last})
    return Item("reassessment", because, base + int(rule.from_min * MINUTE),
                base + int(rule.limits["escalate_min"] * MINUTE), rule.soon_min)  # fmt: skip


def _after_anchor(seen: Observed, rule: DueRule, begun: Instant) -> Item:
    anchor = max((r.anchor_at for r in seen.ctx.responses if r.effects), default=begun)
    anchor = max(anchor, begun)
    looks = assessed(seen)
    after = [t for t in looks if t >= anchor + int(rule.from_min * MINUTE)]
    after = sorted([*after, *(e.at for e in words_on(seen.episode.transitions, "reassessment") if e.at >= anchor)])
    if not after:
        because = Message("due.reassessment", {"anchor_at": anchor, "last_at": looks[-1] if looks else None})
        return Item("reassessment", because, anchor + int(rule.from_min * MINUTE),
                    anchor + int(rule.until_min * MINUTE), rule.soon_min, anchor_at=anchor)  # fmt: skip
    last, every = after[-1], int(rule.limits["every_min"] * MINUTE)
    because = Message("due.reassessment", {"anchor_at": anchor, "last_at": last})
    return Item("reassessment", because, last + every - int(rule.until_min * MINUTE), last + every, rule.soon_min)
