"""What is otherwise than was handed over, in sentences."""

from __future__ import annotations

from collections.abc import Iterable, Iterator
from typing import Final

from app.look import formats
from app.operations.last_handover import Handed
from app.sheet.writer import lowered, opened, state_head
from app.telling.finding_names import due_name, marker_name
from app.telling.language import in_language as tr
from app.telling.phrases import channel_name
from app.telling.undone import undone_word
from app.words import Reader
from app.words.figure_lines import FigureLines
from core.figures.since_handover import FactChange, SinceHandover, Verdict
from core.judgement.shapes import DueFigure, FlagFigure

_SUPPORT: Final = {
    "started": "support started", "ended": "support ended", "off the mask": "off the mask",
    "on the mask again": "on the mask again",
}  # fmt: skip
_LONG: Final = frozenset({"plan", "agreed_with", "breaks_and_night", "jobs", "home_support", "feeding", "isolation"})
"""Facts in words of the ward's own: their new text stands elsewhere on the page."""


def compared_with(handed: Handed, reader: Reader) -> str:
    """What a handover is compared with, for the ward's page."""
    at = formats.wall(handed.at, reader.zone)
    if handed.head is None:
        told = tr("No handover was closed before: what changed is told since the shift's start, {at}.")
        if handed.own_closed_at is not None:
            told = tr("No other shift was handed over before: what changed is told since the shift's start, {at}.")
    else:
        told = tr("What changed is told since the last closed handover, as of {at}: {name}.")
    told = told.format(at=at, name=handed.name)
    if handed.own_closed_at is not None:
        own = tr("A handover of this shift was closed {wall}.")
        told = f"{own.format(wall=formats.wall(handed.own_closed_at, reader.zone))} {told}"
    return told


def since_head(handed: Handed, reader: Reader) -> str:
    """The heading over what changed."""
    if handed.head is None:
        told = tr("Since the shift's start, {time} (no handover was closed before)")
        return told.format(time=reader.time(handed.at))
    return tr("Since the last handover, {wall}").format(wall=formats.wall(handed.at, reader.zone))


def since_lines(since: SinceHandover, lines: FigureLines, *, short: bool = False) -> tuple[str, ...]:
    """A sentence for each thing that is otherwise; `short` counts the flags."""
    if not since.was_there:
        told = _SinceWriter(since, lines, short).target() if since.target is not None else ""
        return (tr("Not on the ward then; all of it is new."), *((told,) if told else ()))
    if since.is_nothing:
        return (tr("Nothing is otherwise."),)
    return tuple(_SinceWriter(since, lines, short).all())


class _SinceWriter:
    def __init__(self, since: SinceHandover, lines: FigureLines, short: bool) -> None:
        self._s, self._lines, self._short = since, lines, short
        self._reader = lines.reader

    def all(self) -> Iterator[str]:
        s = self._s
        support = [tr(_SUPPORT[w]) for w in s.support]
        whole = s.settings and "started" not in s.support  # of a support that is new, all of it is
        changed = [lowered_name(self._lines.steps(s.settings))] if whole else []
        if support or changed:
            yield tr("Settings: {those}.").format(those=", ".join([*support, *changed]))
        if s.gas_after is not None:
            yield tr("State: {state}.").format(state=self._state())
        if s.target is not None:
            yield self.target()
        if s.verdicts:
            yield tr("Verdicts: {those}.").format(those="; ".join(self._verdict(v) for v in s.verdicts))
        if self._short and (s.raised or s.gone):
            told = tr("Flags: {raised} raised, {gone} settled or no longer met, below with their times.")
            yield told.format(raised=len(s.raised), gone=len(s.gone))
        if s.raised and not self._short:
            yield tr("Flags raised: {those}.").format(those="; ".join(self._flag(f) for f in s.raised))
        if s.gone and not self._short:
            yield tr("Flags settled or no longer met: {those}.").format(
                those="; ".join(self._flag(f) for f in s.gone)
            )
        if s.done:
            yield tr("Done: {those}.").format(those="; ".join(self._done(s.done)))
        for fact in s.facts:
            yield f"{self._fact(fact)}."

    def _state(self) -> str:
        before, after = self._s.gas_before, self._s.gas_after
        assert after is not None
        new, at = lowered(state_head(after.state)), self._reader.time(after.at)
        if before is None:
            told = tr("first gas {state}, pH {ph}, PaCO2 {paco2} at {at}")
            return told.format(state=new, ph=self._lines.ph(after), paco2=self._lines.paco2(after), at=at)
        old = lowered(state_head(before.state))
        told = tr("still {new}") if old == new else tr("{old} before, now {new}")
        state = told.format(old=old, new=new)
        unit = f" {self._reader.gas_unit}"
        paco2 = f"{self._lines.paco2(before).removesuffix(unit)} to {self._lines.paco2(after)}"
        told = tr("{before} to {at}") if before.at != after.at else tr("gas of {at} reads otherwise")
        span = told.format(before=self._reader.time(before.at), at=at)
        return f"{state}, pH {self._lines.ph(before)} to {self._lines.ph(after)}, PaCO2 {paco2} ({span})"

    def _verdict(self, v: Verdict) -> str:
        r = v.response
        judged = next((g for g in reversed(r.gases) if g.at == r.headline_gas_at), None)
        word = r.headline if judged is None else lowered(self._lines.headline(r, judged))
        judged_then = v.before is not None and v.before not in ("not yet known", "not judged", r.headline)
        was = tr(" (was {before})").format(before=v.before) if judged_then else ""
        what = "start" if r.anchor == "start" else "change"
        return f"{what} of {self._reader.time(r.anchor_at)} {word}{was}"

    def _flag(self, f: FlagFigure) -> str:
        text = f"{marker_name(f.marker, self._reader)} {self._reader.time(f.since)}"
        if f.settled_at is not None:
            by = f" by {f.settled_by}" if f.settled_by else ""
            return tr("{text}, settled {time}{by}").format(text=text, time=self._reader.time(f.settled_at), by=by)
        if f.ended_at is not None:
            return tr("{text}, no longer met {time}").format(text=text, time=self._reader.time(f.ended_at))
        return f"{text}, {undone_word()}" if f.undone_by_correction else text

    def _done(self, done: Iterable[DueFigure]) -> Iterator[str]:
        """Each kind once, with the times at which it was done."""
        times: dict[str, list[int]] = {}
        for d in done:
            times.setdefault(due_name(d.what, self._reader), []).append(d.done_at or 0)
        for name, found in times.items():
            yield f"{name} {', '.join(self._reader.time(at) for at in sorted(set(found)))}"

    def target(self) -> str:
        """A range that nobody prescribed: the next shift must not take it for somebody's decision."""
        change = self._s.target
        assert change is not None
        told = tr("SpO2 range {old} to {new} since {at}: a gas showed hypercapnia, none is prescribed.")
        old, new = (tr("{low}-{high} %").format(low=formats.trimmed(low), high=formats.trimmed(high))
                    for low, high in (change.before, change.after))  # fmt: skip
        return told.format(old=old, new=new, at=self._reader.time(change.at))

    def _fact(self, fact: FactChange) -> str:
        name = channel_name(fact.channel)
        if fact.channel in _LONG:
            told = tr("{name}: new") if fact.before is None else tr("{name}: changed (was: {before})")
            return told.format(name=name, before=str(fact.before).rstrip("."))
        unit = self._reader.gas_unit
        old, new = (formats.quantity(fact.channel, v, unit) for v in (fact.before, fact.after))
        return opened(f"{name} {old} to {new}")


def lowered_name(text: str) -> str:
    """A sentence's first word inside another sentence; abbreviations keep their letters."""
    first = text.partition(" ")[0]
    return text if any(c.isupper() or c.isdigit() for c in first[1:]) else lowered(text)
