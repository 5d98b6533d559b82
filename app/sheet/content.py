"""What the handover sheet says, every word ready and none drawn: one page for the ward, one per episode.

Print and plain text are made from the same content, so that they cannot differ. Missing data are said to be
missing; nothing is left blank.
"""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from app import formats
from app.finding_names import marker_name
from app.headline import ever_acidotic, headline
from app.operations.handover import Handover
from app.sheet.chart_data import shift_chart
from app.sheet.due_lines import due_short, skin_line, ward_due
from app.sheet.gas_table import gas_rows
from app.sheet.shapes import ChangeLine, EpisodePage, Fact, FlagLine, SheetContent, WardPage, WardRow
from app.ward.ordering import GAS
from app.words import Reader, sentence
from app.words.figure_lines import FigureLines
from core.figures.shift import ShiftFigures
from core.judgement.shapes import EpisodeFigures, FlagFigure, Step
from core.record.instant import HOUR, MINUTE

_STATES = {"severe": "Severe acidosis", "acidotic": "Acidotic", "resolved": "Not acidotic"}
"""A gas that is not acidotic may still be a bad one: in a heading "resolved" would say too much."""
SKIN_OVERDUE = "skin_check_overdue"
QUIET = 30 * MINUTE
"""A record that ends so long before the shift does is said to."""
MOST_LATER = 8
"""Values that came later are listed up to so many for each episode."""
_STRENGTH = {"escalate": 0, "concern": 1, "remark": 2}


def sheet_content(
    handover: Handover, reader: Reader, *, given_by: str = "", taken_by: str = "", title: str = ""
) -> SheetContent:
    """Everything a handover says, for one reader."""
    shift = handover.shift
    reader = replace(reader, near=(shift.start - 2 * HOUR, shift.end + 10 * HOUR))
    writer = _Writer(handover, reader)
    printed = f"Printed {formats.wall(handover.prepared_at, reader.zone)} ({reader.zone})"
    if handover.as_known_at is not None:
        printed += f"; as known at {formats.wall(handover.as_known_at, reader.zone)}"
    return SheetContent(
        writer.ward(title or ("Handover" if handover.as_known_at is None else "Handover, reviewed")),
        tuple(writer.episode(n, s) for n, s in enumerate(handover.shift.episodes, 1)),
        f"Ledger head {handover.printed_head}", printed, given_by, taken_by, gas_unit=reader.gas_unit,
    )  # fmt: skip


class _Writer:
    """Turns one handover into words."""

    def __init__(self, handover: Handover, reader: Reader) -> None:
        self._h = handover
        self._reader = reader
        self._lines = FigureLines(reader)

    # -- the ward -----------------------------------------------------------------------------------

    def ward(self, title: str) -> WardPage:
        shift = self._h.shift
        span = formats.span(shift.start, shift.end, self._reader.zone)
        if self._h.as_known_at is not None:  # on every page: a review must never be taken for the handover
            span += f", as known at {formats.wall(self._h.as_known_at, self._reader.zone)}"
        ends, quiet = [quiet_since(s) for s in shift.episodes], ""
        if ends and all(at is not None for at in ends):
            quiet = f"nothing logged since {self._moment(max(at for at in ends if at is not None))}"
        return WardPage(
            title, f"Shift {span}", self._see_first(),
            tuple(self._ward_row(n, s) for n, s in enumerate(shift.episodes, 1)),
            tuple(ward_due(shift.episodes, self._reader)), tuple(self._ward_missing()),
            skin_line(shift.episodes, self._reader), quiet,
        )  # fmt: skip

    def _see_first(self) -> str:
        first = self._h.shift.first
        if first is None or first.now.concern.why is None:
            return "No episode stands out: no open flag, nothing overdue."
        return f"{first.now.label}: {sentence(first.now.concern.why, self._reader)}"

    def _ward_row(self, number: int, s: ShiftFigures) -> WardRow:
        f, p = s.now, s.now.profile
        opened = sorted((x for x in s.flags_open if x.strongest), key=_strength)
        strong = [x for x in opened if x.tier != "remark"]
        remarks = [x for x in opened if x.tier == "remark" and x.marker != SKIN_OVERDUE]  # summed under what is due
        return WardRow(
            number, f.label, self._who(f), opened[0].tier if opened else "", self._standing(f),
            self._change_of_state(s), self._support_short(f), self._latest_response(f),
            tuple(self._flag_line(x) for x in strong), "; ".join(self._remark(x) for x in remarks),
            "; ".join(due_short(d, self._reader) for d in s.due),
            f"Ceiling: {p.get('ceiling_of_care') or formats.ABSENT}. "
            f"Resuscitation: {p.get('resuscitation') or formats.ABSENT}.",
            f.support.ended_at is not None, self._action(s), _sign(f),
        )  # fmt: skip

    def _action(self, s: ShiftFigures) -> str:
        """The plan and the newest call, where a flag asks for a senior or a gas is overdue."""
        escalate = any(x.tier == "escalate" for x in s.flags_open)
        if not escalate and not any(d.what in GAS and d.state == "overdue" for d in s.due):
            return ""
        plan = str(s.now.profile.get("plan") or "none").rstrip(".")
        called = f"{self._clock(s.told[-1].at)} {s.told[-1].words or 'somebody'}" if s.told else "nobody"
        return f"Plan: {plan}. Told: {called.rstrip('.')}."

    def _support_short(self, f: EpisodeFigures) -> str:
        """Support and oxygen as short as a ward's list needs them."""
        s = f.support
        if s.ended_at is not None:
            return self._support_now(f)
        if s.break_since is not None:
            return f"OFF THE MASK since {self._clock(s.break_since)}"
        pressure = ""
        if s.ipap_cmH2O is not None and s.epap_cmH2O is not None:
            pressure = f" {formats.trimmed(s.ipap_cmH2O)}/{formats.trimmed(s.epap_cmH2O)} cmH2O"
        elif s.epap_cmH2O is not None:
            pressure = f" {formats.trimmed(s.epap_cmH2O)} cmH2O"
        support = s.pressure_support_cmH2O if s.ipap_cmH2O is not None else None
        more = f" (PS {formats.trimmed(support)})" if support is not None else ""
        return f"{s.mode or 'mode not recorded'}{pressure}{more}, {self._lines.oxygen(s)}"

    def _support_now(self, f: EpisodeFigures) -> str:
        s = f.support
        if s.ended_at is not None:
            return f"Support ended {formats.wall(s.ended_at, self._reader.zone)}" + (
                f", {s.end_reason}" if s.end_reason else ""
            )
        text = self._lines.settings(s)
        return f"{text}; OFF THE MASK since {self._clock(s.break_since)}" if s.break_since is not None else text

    def _who(self, f: EpisodeFigures) -> str:
        p = f.profile
        age = p.get("age")
        parts = (formats.quantity("age", age) if age is not None else "age not recorded", _word(p.get("sex"), "sex"),
                 formats.quantity("indication", p.get("indication")) if p.get("indication") else
                 "indication not recorded")  # fmt: skip
        return ", ".join(parts)

    def _standing(self, f: EpisodeFigures) -> str:
        """The last gas that tells the state, and the state."""
        gases = [g for g in f.gases if g.site != "venous"]
        if not gases:
            return "No arterial or capillary gas recorded."
        last = gases[-1]
        state = _STATES.get(last.state or "", "State not known")
        pf = f", P/F {self._lines.pressure(last.pf_mmHg)}" if last.pf_mmHg is not None else ""
        if f.now.oxygen_failure and f.now.pf_mmHg is not None:
            first = "P/F" if ever_acidotic(f) else "Hypoxaemic: P/F"
            state, pf = f"{first} {self._lines.pressure(f.now.pf_mmHg)}, {_lowered(state)}", ""
        off = ", last gas drawn off support" if last.off_support else ""
        return (
            f"{state}{off}: pH {self._lines.ph(last)}, PaCO2 {self._lines.paco2(last)}{pf} at {self._moment(last.at)}"
        )

    def _change_of_state(self, s: ShiftFigures) -> str:
        before, after = s.state_before, s.state_after
        if s.began and after:
            return "support started this shift"
        if not before or not after or before == after:
            return ""
        return f"{_STATES[before].lower()} before, now {_STATES[after].lower()}"

    def _latest_response(self, f: EpisodeFigures) -> str:
        judged = [r for r in f.responses if r.headline not in ("not yet known", "not judged")]
        waiting = f.responses[-1] if f.responses and f.responses[-1].headline == "not yet known" else None
        text = ""
        if judged:
            r = judged[-1]
            anchor = "support started" if r.anchor == "start" else self._lines.anchor(r)
            text = f"{self._moment(r.anchor_at)} {anchor}. {_opened(self._lines.of(f).verdict(r, brief=True))}"
        if waiting is not None:
            text += f" Change of {self._moment(waiting.anchor_at)}: response not yet known."
        return text.strip() or "No response judged yet."

    def _flag_line(self, f: FlagFigure) -> str:
        return f"{f.tier.upper()} {self._remark(f)}"

    def _remark(self, f: FlagFigure) -> str:
        return f"{marker_name(f.marker, self._reader)}, since {self._moment(f.since)}"

    def _ward_missing(self) -> Iterator[str]:
        """What nobody recorded and the next shift will ask for."""
        for channel, word in (("handover_remark", "handover remark"), ("plan", "plan"),
                              ("ceiling_of_care", "ceiling of care"),
                              ("resuscitation", "resuscitation decision")):  # fmt: skip
            without = [s.now.label for s in self._h.shift.episodes
                       if not s.now.profile.get(channel) and s.now.support.ended_at is None]  # fmt: skip
            if without and len(without) == len(self._h.shift.episodes):
                yield f"No {word} recorded for any episode."
            elif without:
                yield f"No {word} recorded: {', '.join(without)}."

    # -- one episode ----------------------------------------------------------------------------------

    def episode(self, number: int, s: ShiftFigures) -> EpisodePage:
        f = s.now
        record = self._h.records[s.episode]
        opened = sorted(s.flags_open, key=_strength)
        other = [x for x in (*s.flags_raised, *s.flags_ended) if x not in opened]
        return EpisodePage(
            f.label, self._subtitle(s), number, opened[0].tier if opened else "", self._standing(f),
            tuple(self._facts(s)), self._support_now(f), tuple(self._changes(s)),
            shift_chart(record, f, s.start, self._chart_end(s), self._reader), gas_rows(s, self._lines.of(f)),
            self._lines.leak(f.leak) + self._interface(f),
            tuple(self._flag(x) for x in (*opened, *dict.fromkeys(other))),
            tuple(self._lines.due(d) for d in s.due), tuple(self._care(s)),
            tuple(f"{self._clock(t.at)} {t.words or 'somebody'}" for t in s.told),
            str(f.profile.get("plan") or formats.ABSENT), str(f.profile.get("jobs") or formats.ABSENT),
            str(f.profile.get("handover_remark") or ""), tuple(self._to_check(s)),
        )  # fmt: skip

    @staticmethod
    def _chart_end(s: ShiftFigures) -> int:
        """Where the record ends before the shift does, so does the chart: nothing is known after it."""
        at = quiet_since(s)
        return at if at is not None and at > s.start else s.end

    def _subtitle(self, s: ShiftFigures) -> str:
        f = s.now
        place = f.profile.get("location") or "place not recorded"
        identifier = f.profile.get("identifier")
        key = f"Episode {f.episode}" + (f", {identifier}" if identifier else "")
        return f"{self._who(f)}. {place}. {key}"

    def _facts(self, s: ShiftFigures) -> Iterator[Fact]:
        f, p = s.now, s.now.profile
        yield "Why on support", formats.quantity("indication", p.get("indication"))
        yield "Support", self._lines.on_mask(f.support)
        yield "Mask this shift", self._mask_this_shift(s)
        yield "SpO2 target", self._target(f)
        yield "Ceiling of care", str(p.get("ceiling_of_care") or formats.ABSENT)
        yield "Resuscitation", str(p.get("resuscitation") or formats.ABSENT)
        yield "Responsible", str(p.get("contact") or formats.ABSENT)
        usual = p.get("usual_paco2")
        yield "Usual PaCO2", self._lines.pressure(usual if isinstance(usual, float) else None)
        yield "Home support", str(p.get("home_support") or formats.ABSENT)
        if (at := quiet_since(s)) is not None:
            yield "Record", f"nothing logged since {self._moment(at)}"

    def _mask_this_shift(self, s: ShiftFigures) -> str:
        text = formats.hours(s.hours_on_mask)
        if not s.breaks:
            return f"{text}, no break recorded"
        spans = ", ".join(
            f"{self._moment(b.start)} to {self._moment(b.end) if b.end is not None else 'now'}" for b in s.breaks
        )
        return f"{text}; off {spans}"

    def _target(self, f: EpisodeFigures) -> str:
        low, high = f.profile.get("target_spo2_low"), f.profile.get("target_spo2_high")
        if isinstance(low, float) and isinstance(high, float):
            return f"{formats.trimmed(low)} to {formats.trimmed(high)} %"
        return "not recorded; the range its risk calls for is used"

    def _changes(self, s: ShiftFigures) -> Iterator[ChangeLine]:
        """Every change of the shift in order of time; what was set with an anchor stands in its line."""
        beside: dict[int, list[Step]] = {}
        for step in s.other_changes:
            beside.setdefault(step.at, []).append(step)
        rows = []
        for r in s.responses:
            what = self._lines.anchor(r)
            if with_it := beside.pop(r.anchor_at, None):
                what += f"; with it {self._lines.steps(with_it)}"
            told = _opened(self._lines.of(s.now).verdict(r))
            line = ChangeLine(self._when(r.first_at, r.anchor_at), what, told, r.headline)
            rows.append((r.first_at, line))
        for at, steps in beside.items():
            rows.append((at, ChangeLine(self._moment(at), self._lines.steps(steps), "Not judged by itself.")))
        yield from (line for _, line in sorted(rows, key=lambda x: x[0]))

    def _when(self, first: int, last: int) -> str:
        return self._moment(last) if first == last else f"{self._moment(first)} to {self._moment(last)}"

    def _interface(self, f: EpisodeFigures) -> str:
        return f". Interface: {f.support.interface or formats.ABSENT}"

    def _flag(self, x: FlagFigure) -> FlagLine:
        return FlagLine(x.tier, self._lines.flag_head(x), self._lines.evidence(x), self._lines.certainty(x),
                        x.state in ("raised", "seen"), x.strongest)  # fmt: skip

    def _care(self, s: ShiftFigures) -> Iterator[Fact]:
        record = self._h.records[s.episode].until(s.end)
        p = s.now.profile
        yield "Tolerance", record.latest_text("comfort") or formats.ABSENT
        yield "Secretions", self._newest_event(s, "secretions")
        yield "Skin", self._newest_event(s, "skin_check")
        yield "Feeding", str(p.get("feeding") or formats.ABSENT)
        yield "Isolation", str(p.get("isolation") or formats.ABSENT)

    def _newest_event(self, s: ShiftFigures, channel: str) -> str:
        found = [e for e in s.events if e.channel == channel]
        if not found:
            return "nothing recorded this shift"
        return f"{self._clock(found[-1].at)} {found[-1].words or 'recorded'}"

    def _to_check(self, s: ShiftFigures) -> Iterator[str]:
        if s.recorded_late and not self._h.imported:
            yield f"{s.recorded_late} typed entries of this shift were recorded more than 1 h late."
        yield from self._came_later(s)
        warnings = [*s.now.warnings, *(w for g in s.gases for w in g.warnings)]
        yield from dict.fromkeys(sentence(w, self._reader) for w in warnings)

    def _came_later(self, s: ShiftFigures) -> Iterator[str]:
        """In a review as known at a moment: what was recorded or changed only after it."""
        told = self._h.later.get(s.episode, ())
        if not told:
            return
        from app.later_words import later_sentence

        for h in told[:MOST_LATER]:
            yield f"Not known then: {later_sentence(h, self._reader)}."
        if len(told) > MOST_LATER:
            yield f"Not known then: {len(told) - MOST_LATER} more values."

    def _clock(self, at: int) -> str:
        return formats.clock(at, self._reader.zone)

    def _moment(self, at: int) -> str:
        return self._reader.time(at)


def quiet_since(s: ShiftFigures) -> int | None:
    """When the record of a running episode ended, where that is well before the shift's end."""
    at = s.now.now.last_logged_at
    if at is None or s.now.support.ended_at is not None or s.end - at <= QUIET:
        return None
    return at


def _sign(f: EpisodeFigures) -> str:
    told = headline(f)
    return told.sign.value if told is not None else ""


def _strength(f: FlagFigure) -> tuple[int, int]:
    return (_STRENGTH.get(f.tier, 3), f.since)


def _lowered(text: str) -> str:
    return text[:1].lower() + text[1:]


def _opened(text: str) -> str:
    return text[:1].upper() + text[1:]


def _word(value: float | str | None, name: str) -> str:
    return str(value) if value else f"{name} not recorded"
