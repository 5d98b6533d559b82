"""Which lanes stand on the ward view, and in what order. Ranks come with the figures; nothing is judged here."""

from __future__ import annotations

import re
from collections.abc import Mapping, Sequence
from enum import StrEnum
from types import MappingProxyType

from app.look.theme import Verdict
from app.telling.headline import ever_acidotic, headline
from core.judgement.now import headline_response
from core.judgement.shapes import DueFigure, EpisodeFigures
from core.record.instant import Instant

OPEN_DUE = ("overdue", "soon", "open", "awaiting result")
_URGENT = ("overdue", "soon")
GAS = ("gas", "repeat_gas")
CARE = ("skin_check", "mask_check", "complete_score", "ceiling")
_OPEN_FLAG = ("raised", "seen")
_NOWHERE: Mapping[str, Sequence[str]] = MappingProxyType({})


class Order(StrEnum):
    """How lanes are sorted."""

    CONCERN = "concern"
    BED = "bed"
    DUE = "due"


class Shown(StrEnum):
    """Which lanes are shown."""

    ALL = "all"
    NOT_RESPONDING = "not responding or flagged"
    """By its gases, or by an open flag of concern or more: a flagged bed that stands as better is not hidden."""
    DUE = "due soon"


_CONCERN = 1
"""The rank up to which an episode is one of concern."""


def is_ended(figures: EpisodeFigures) -> bool:
    """Whether support has ended."""
    return figures.support.ended_at is not None


def next_due(figures: EpisodeFigures) -> DueFigure | None:
    """The open due item to be told first: a gas or a look before care, what is urgent, a gas, what ends first.

    A check of the skin that is overdue must not stand before a gas: its flag says it anyway.
    """
    items = [d for d in figures.due if d.state in OPEN_DUE]
    return min(items, key=_due_order, default=None)


def _due_order(d: DueFigure) -> tuple[bool, bool, bool, Instant]:
    return d.what in CARE, d.state not in _URGENT, d.what not in GAS, d.due_until


def natural(text: str) -> tuple[tuple[int, int | str], ...]:
    """A key that puts Bed 9 before Bed 10.

    >>> sorted(["Bed 10", "Bed 9"], key=natural)
    ['Bed 9', 'Bed 10']
    """
    parts = re.split(r"(\d+)", text.casefold())
    return tuple((0, int(p)) if p.isdigit() else (1, p) for p in parts if p)


def ordered(ward: Sequence[EpisodeFigures], order: Order) -> tuple[EpisodeFigures, ...]:
    """The episodes in the wanted order; ended ones last in any."""

    def key(f: EpisodeFigures) -> tuple[object, ...]:
        bed = natural(f.label)
        if order is Order.BED:
            return (is_ended(f), bed)
        if order is Order.DUE:
            due = next_due(f)
            until: Instant | float = due.due_until if due is not None else float("inf")
            return (is_ended(f), until, f.concern.rank, f.concern.order, bed)
        return (f.concern.rank, f.concern.order, bed)

    return tuple(sorted(ward, key=key))


def shown(
    ward: Sequence[EpisodeFigures], which: Shown, text: str = "", former: Mapping[str, Sequence[str]] = _NOWHERE
) -> tuple[EpisodeFigures, ...]:
    """The episodes that pass the filter and hold `text` in label, location, indication, or a bed or place they were
    in before (`former`, by episode): as it is typed where any does, else word by word."""
    passed = tuple(f for f in ward if _passes(f, which))
    wanted = " ".join(text.casefold().split())
    held = {f.episode: _searched(f, former.get(f.episode, ())) for f in passed}
    whole = tuple(f for f in passed if wanted in held[f.episode])
    return whole or tuple(f for f in passed if all(w in held[f.episode] for w in wanted.split()))


def _passes(f: EpisodeFigures, which: Shown) -> bool:
    if which is Shown.NOT_RESPONDING:
        strong = any(g.state in _OPEN_FLAG and g.tier in ("escalate", "concern") for g in f.flags)
        if is_ended(f):  # a relapse after support was stopped
            return strong and f.concern.rank <= _CONCERN
        return strong or _responds_poorly(f)
    if which is Shown.DUE:
        return any(d.state in _URGENT for d in f.due)
    return True


def _responds_poorly(f: EpisodeFigures) -> bool:
    """Worse, or a gain lost; or no clear change where no acidosis resolved."""
    told, latest = headline(f), headline_response(f.responses)
    if told is None or latest is None or latest.headline_gas_at is None:
        return False
    if told.sign in (Verdict.WORSE, Verdict.MIXED):
        return True
    settled = latest.state == "resolved" and ever_acidotic(f)
    return told.verdict is Verdict.NO_CLEAR_CHANGE and not settled


def _searched(f: EpisodeFigures, former: Sequence[str]) -> str:
    parts = (f.label, f.episode, f.profile.get("location"), f.profile.get("indication"), *former)
    return " ".join(str(x) for x in parts if x).casefold()


def first_to_see(ward: Sequence[EpisodeFigures]) -> EpisodeFigures | None:
    """Whom to see first: the top of the order by concern, if there is a concern at all."""
    top = next(iter(ordered(ward, Order.CONCERN)), None)
    return top if top is not None and top.concern.rank <= 4 else None
