"""One episode as a lane: what is drawn along the clock, and its words. Draws what the figures say."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass, replace

from PySide6.QtCore import QCoreApplication

from app.chart.shapes import Lane, LaneItem, LaneKind, SupportPiece
from app.look.formats import minutes, opened
from app.look.theme import Tier, Verdict, tier_word
from app.telling.certainty import starred
from app.telling.finding_names import due_name, marker_name
from app.telling.gas_doubt import doubt_word
from app.telling.headline import (
    gas_state_word,
    headline,
    judged_sign,
    off_mask_word,
    since_start_words,
    state_now,
    verdict_sentences,
    verdict_with_loss,
)
from app.telling.phrases import (
    change_sentence,
    change_word,
    gas_name,
    gas_words,
    settings_line,
    settings_word,
    state_of,
    step_words,
    support_now,
    verdict_or_none,
)
from app.telling.presumed import silent_word
from app.telling.support_course import Course
from app.ward.flag_column import short_flags
from app.ward.moves import Move, move_sentence, moved_word
from app.ward.ordering import is_ended, next_due
from app.ward.state_words import state_shorter, state_word
from app.words import Reader, sentence
from core.judgement.response_shapes import JudgedGas, ResponseFigure
from core.judgement.shapes import DueFigure, EpisodeFigures, FlagFigure, GasFigure
from core.record.instant import MINUTE, Instant

translate = QCoreApplication.translate
OPEN_FLAGS = ("raised", "seen")
CLOSE = 30 * MINUTE
_STEP_ORDER = {c: n for n, c in enumerate(("mode", "ipap", "epap", "cpap", "fio2", "o2_flow"))}
_TIERS = ("escalate", "concern", "remark")


@dataclass(frozen=True, slots=True)
class OnWard:
    """What the ward view knows of an episode."""

    figures: EpisodeFigures
    course: Course
    moves: tuple[Move, ...] = ()


@dataclass(frozen=True, slots=True)
class LaneWords:
    """Makes lanes in one zone, one pressure unit, at one moment."""

    reader: Reader
    as_of: Instant

    @property
    def zone(self) -> str:
        """The zone of wall-clock times."""
        return self.reader.zone

    @property
    def gas_unit(self) -> str:
        """The unit of gas pressures."""
        return self.reader.gas_unit

    def lane(self, on_ward: OnWard, *, first: bool, apart: str = "") -> Lane:
        """The lane of an episode. `apart`: what tells it from others that carry the same label."""
        f, course = on_ward.figures, on_ward.course
        ended = is_ended(f)
        told = headline(f)
        gas = _latest_gas(f)
        strongest = strongest_flag(f)
        due = None if ended else next_due(f)
        return Lane(
            key=f.episode,
            title=f.label,
            subtitle=self._subtitle(f, apart, moved_word(on_ward.moves, self.zone)),
            support=tuple(self._pieces(course)),
            items=tuple(sorted((*self._items(f, course), *self._moves(on_ward.moves)), key=lambda i: i.at)),
            state=state_of(gas.state) if gas is not None else None,
            state_word=state_word(f, gas, self.reader),
            state_shorter=state_shorter(f, gas, self.reader),
            doubtful=gas is not None and (gas.doubt or gas.disputed),
            verdict=told.sign if told is not None else None,
            verdict_word=told.short if told is not None else "",
            tier=Tier(strongest.tier) if strongest is not None else None,
            flag_word=short_flags(flag_words(f)),
            due_word=self._due_word(due) if not ended else self._end_word(f),
            due_late=due is not None and due.state == "overdue",
            first_word=translate("ward", "See first") if first else "",
            closed=ended and (strongest is None or strongest.tier == _TIERS[-1]),
            off_mask=bool(off_mask_word(f, self.zone)),
            sentence=self.lane_sentence(f),
            payload=f.episode,
        )

    # words of the whole lane

    def _subtitle(self, f: EpisodeFigures, apart: str, moved: str) -> str:
        s = f.support
        told = self._indication(f)
        if apart:  # first: a narrow place cuts the end
            told = f"{apart}, {told}"
        if off_mask_word(f, self.zone):
            return translate("ward", "{indication}, mask off").format(indication=told)
        if s.silent_since is not None:  # first, so that a narrow place does not cut it off
            silence = minutes((self.as_of - s.silent_since) / MINUTE)
            return translate("ward", "nothing logged for {length}; {about}").format(length=silence, about=told)
        if moved:
            return f"{told}, {moved}"
        return f"{told}, {s.mode}" if s.mode and not is_ended(f) else told

    def _indication(self, f: EpisodeFigures) -> str:
        indication = f.profile.get("indication")
        return indication_word(str(indication)) if indication else translate("ward", "Indication not recorded")

    def _due_word(self, due: DueFigure | None) -> str:
        if due is None:
            return translate("ward", "nothing due")
        name = due_name(due.what) if due.what != "probable_break" else translate("ward", "Probable break?")
        if due.state == "awaiting result":
            return translate("ward", "{what}: awaiting result").format(what=name)
        if due.state == "overdue":
            late = minutes((self.as_of - due.due_until) / MINUTE)
            return translate("ward", "{what} overdue {late}").format(what=name, late=late)
        return translate("ward", "{what} by {time}").format(what=name, time=self.reader.time(due.due_until))

    def _end_word(self, f: EpisodeFigures) -> str:
        assert f.support.ended_at is not None
        at = self.reader.time(f.support.ended_at)
        reason = f.support.end_reason
        if reason:
            return translate("ward", "ended {time}, {reason}").format(time=at, reason=reason)
        return translate("ward", "ended {time}").format(time=at)

    def lane_sentence(self, f: EpisodeFigures) -> str:
        """The whole episode in words, for the status line and for screen readers."""
        s = f.support
        setting = support_now(s.mode, s.ipap_cmH2O, s.epap_cmH2O, s.fio2, s.o2_flow_L_per_min)
        off = off_mask_word(f, self.zone)
        if off:
            before = translate("ward", "{off} (before: {setting})").format(off=off, setting=setting)
            setting = before if setting else off
        parts = [f.label, self._indication(f), "" if is_ended(f) else setting]
        gas = _latest_gas(f)
        if gas is not None:
            parts.append(
                f"{self.reader.time(gas.at)} {gas_words(gas, self.gas_unit)} "
                f"({state_now(f, gas, self.gas_unit, self.zone)})"
            )
        parts.append(silent_word(s, self.zone))
        parts += verdict_sentences(f)
        parts += flag_words(f)
        parts.append(self._end_word(f) if is_ended(f) else self._due_word(next_due(f)))
        return ". ".join(opened(p) for p in parts if p)

    # along the clock

    def _pieces(self, course: Course) -> Iterator[SupportPiece]:
        start = course.support.start
        for s in course.stretches:
            begin = s.start if start is None else max(s.start, start)
            if s.settings.is_off or s.end <= begin or not settings_word(s.settings):
                continue
            pressure = s.settings.pressure_support if s.settings.is_bilevel else None
            if pressure is not None and pressure != pressure:
                pressure = None
            for a, b in _outside(begin, s.end, course):
                yield SupportPiece(a, b, pressure)  # its words stand at the change that began it

    def _items(self, f: EpisodeFigures, course: Course) -> Iterator[LaneItem]:
        judged = dict(_judged(f))
        for gas in f.gases:
            yield self._gas_item(f, gas, judged.get(gas.at))
        words = _tick_words(course)
        for n, s in enumerate(course.stretches):
            yield LaneItem(
                LaneKind.SETTING,
                s.start,
                self._change_sentence(n, course),
                word=words[n],
                doubtful=s.doubtful,
            )
        for b in course.breaks:
            end = b.end if b.end is not None else self.as_of
            yield LaneItem(
                LaneKind.BREAK,
                b.start,
                self._break_sentence(b.start, b.end),
                end=end,
                word=translate("ward", "off"),
            )
        if not is_ended(f):
            yield from self._window_items(f)
        for flag in f.flags:
            if flag.strongest and flag.state != "no longer met":
                yield self._flag_item(flag)

    def _moves(self, moves: tuple[Move, ...]) -> Iterator[LaneItem]:
        """Each move as a tick of its own, with where the patient came from; the newest bed stands under the title."""
        newest = next((m for m in reversed(moves) if m.channel == "label"), None)
        for move in moves:
            word = "" if move is newest else translate("ward", "from {before}").format(before=move.before)
            yield LaneItem(LaneKind.SETTING, move.at, move_sentence(move, self.zone), word=word, payload=move)

    def _gas_item(
        self, f: EpisodeFigures, gas: GasFigure, found: tuple[ResponseFigure, JudgedGas] | None
    ) -> LaneItem:
        verdict = verdict_or_none(found[1].verdict) if found is not None else None
        parts = [
            f"{self.reader.time(gas.at)} {gas_name(gas)}: {gas_words(gas, self.gas_unit)}",
            gas_state_word(f, gas),
        ]
        if found is not None and verdict is not None:
            parts.append(self._verdict_sentence(verdict, found[0], found[1]))
        if doubt := doubt_word(gas):
            parts.append(doubt)
        if gas.corrected:
            parts.append(translate("ward", "corrected"))
        return LaneItem(
            LaneKind.GAS,
            gas.at,
            ". ".join(opened(p) for p in parts),
            word=f"pH {gas.ph_text or gas.ph or ''}",
            verdict=judged_sign(found[1]) if found is not None else None,
            state=state_of(gas.state),
            doubtful=gas.doubt or gas.disputed,
            payload=gas,
        )

    def _verdict_sentence(self, verdict: Verdict, response: ResponseFigure, judged: JudgedGas) -> str:
        text = translate("ward", "{verdict}, {minutes} after {anchor} at {time}")
        return text.format(
            verdict=verdict_with_loss(verdict, lost=judged.since_start.gain_lost),
            minutes=minutes(judged.minutes),
            anchor=anchor_name(response),
            time=self.reader.time(response.anchor_at),
        ) + since_start_words(judged)

    def _change_sentence(self, n: int, course: Course) -> str:
        s = course.stretches[n]
        at = self.reader.time(s.start)
        if n == 0:
            return f"{at} {settings_line(s.settings)}"
        return f"{at} {change_sentence(s.changed, s.settings)}"

    def _break_sentence(self, start: Instant, end: Instant | None) -> str:
        at = self.reader.time(start)
        if end is None:
            length = minutes((self.as_of - start) / MINUTE)
            return translate("ward", "Off the mask since {time}, {length}").format(time=at, length=length)
        length = minutes((end - start) / MINUTE)
        return translate("ward", "Off the mask {time} to {end}, {length}").format(
            time=at, end=self.reader.time(end), length=length
        )

    def _window_items(self, f: EpisodeFigures) -> Iterator[LaneItem]:
        for r in f.responses:
            if r.headline == "not yet known" and r.superseded_at is None and r.window_to > self.as_of:
                text = translate("ward", "Response window {start} to {end} after {anchor}: no gas logged yet").format(
                    start=self.reader.time(r.window_from),
                    end=self.reader.time(r.window_to),
                    anchor=anchor_name(r),
                )
                yield LaneItem(
                    LaneKind.WINDOW,
                    r.window_from,
                    text,
                    end=r.window_to,
                    word=translate("ward", "gas due"),
                    payload=r,
                )

    def _flag_item(self, flag: FlagFigure) -> LaneItem:
        evidence = "; ".join(sentence(e, self.reader) for e in flag.evidence)
        name = starred(marker_name(flag.marker), flag.sure)
        text = f"{self.reader.time(flag.since)} {tier_word(Tier(flag.tier))}: {name}. {evidence}"
        return LaneItem(
            LaneKind.FLAG,
            flag.since,
            text,
            word=name,
            tier=Tier(flag.tier),
            settled=flag.state != "raised",
            payload=flag,
        )


def _tick_words(course: Course) -> list[str]:
    """The word under each change. Of changes so close that their words would collide, the last says all."""
    words: list[str] = []
    changed: set[str] = set()
    for n, s in enumerate(course.stretches):
        changed |= s.changed.keys()
        follows = course.stretches[n + 1].start if n + 1 < len(course.stretches) else None
        if follows is not None and follows - s.start < CLOSE:
            words.append("")
        else:
            words.append(change_word(replace(s, changed=dict.fromkeys(changed))))
            changed = set()
    return words


def anchor_name(response: ResponseFigure) -> str:
    """What the anchor was: the start, or the change, each setting from what to what, as it stands in a sentence."""
    if response.anchor == "start":
        return translate("ward", "the start of support")
    if response.anchor == "break_end":
        return translate("ward", "the end of a break")
    latest, before = {s.channel: s for s in response.steps}, dict[str, float | str | None]()
    for s in response.steps:
        before.setdefault(s.channel, s.before)
    order = sorted(latest.values(), key=lambda s: _STEP_ORDER.get(s.channel, len(_STEP_ORDER)))
    parts = [step_words(s.channel, before[s.channel], s.after) for s in order[:3]]
    return ", ".join(parts) or translate("ward", "a change of settings")


def indication_word(indication: str) -> str:
    """The indication in the reader's language; abbreviations in capitals."""
    capitals = {"copd": "COPD", "ards": "ARDS"}
    text = capitals.get(indication) or translate("indication", indication)
    return text[:1].upper() + text[1:]


def strongest_flag(f: EpisodeFigures) -> FlagFigure | None:
    """The strongest open flag."""
    flags = open_flags(f)
    return flags[0] if flags else None


def open_flags(f: EpisodeFigures) -> list[FlagFigure]:
    """The strongest open flag of each group, strongest first."""
    found = [g for g in f.flags if g.strongest and g.state in OPEN_FLAGS]
    return sorted(found, key=lambda g: (_TIERS.index(g.tier), g.since))


def flag_words(f: EpisodeFigures) -> list[str]:
    """The strongest open flag of each group in short words."""
    return [starred(marker_name(g.marker), g.sure) for g in open_flags(f)]


def _latest_gas(f: EpisodeFigures) -> GasFigure | None:
    usable = [g for g in f.gases if g.site != "venous"]
    return usable[-1] if usable else None


def _judged(f: EpisodeFigures) -> Iterator[tuple[Instant, tuple[ResponseFigure, JudgedGas]]]:
    """Each gas with the latest anchor it is attributed to; later anchors overwrite earlier ones."""
    for r in f.responses:
        for g in r.gases:
            if g.attributable and g.verdict is not None:
                yield g.at, (r, g)


def _outside(start: Instant, end: Instant, course: Course) -> Iterator[tuple[Instant, Instant]]:
    at = start
    for b in course.breaks:
        stop = b.end if b.end is not None else course.until
        if b.start < end and stop > at:
            if b.start > at:
                yield at, b.start
            at = max(at, stop)
    if at < end:
        yield at, end
