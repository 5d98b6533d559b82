"""What an episode's page of a handover says: what the next shift must know of one patient."""

from __future__ import annotations

from collections.abc import Iterator

from app.look import formats
from app.sheet.chart_data import shift_chart
from app.sheet.gas_table import gas_rows
from app.sheet.shapes import ChangeLine, EpisodePage, Fact, FlagLine
from app.sheet.since_lines import since_head, since_lines
from app.sheet.writer import SheetWriter, opened, quiet_since, strength
from app.telling.certainty import starred
from app.telling.finding_names import lever_name, marker_name
from app.telling.language import in_language as tr
from app.telling.later_words import later_sentence
from app.telling.lever_words import asks, lever_reasons
from app.telling.undone import undone_word
from app.words import sentence
from app.words.verdict_loss import with_loss
from core.figures.shift import ShiftFigures
from core.judgement.response_shapes import Step
from core.judgement.shapes import EpisodeFigures, FlagFigure

MOST_LATER = 8
"""Values that came later are listed up to so many for each episode."""


class EpisodeWriter(SheetWriter):
    """Writes the page of an episode."""

    def episode(self, number: int, s: ShiftFigures) -> EpisodePage:
        """The page of one episode, `number` in the order of concern."""
        f, lines = s.now, self._lines.of(s.now)
        record = self._h.records[s.episode]
        shown = sorted(s.flags_open, key=strength)
        other = [x for x in (*s.flags_raised, *s.flags_ended) if x not in shown]
        return EpisodePage(
            f.label, self._subtitle(s), number, shown[0].tier if shown else "", self._standing(f),
            tuple(self._facts(s)), tuple(self._support(s)), tuple(self._changes(s)),
            shift_chart(record, f, (s.start, self._chart_end(s)), s.target, self._reader), gas_rows(s, lines),
            tuple(self._flag(x) for x in (*shown, *dict.fromkeys(other))),
            tuple(self._lines.due(d) for d in s.due), tuple(self._care(s)),
            self._calls(s),
            tuple(self._plan(f)),
            str(f.profile.get("handover_remark") or ""), tuple(self._to_check(s)), tuple(self._levers(f)),
            since_head(self._h.handed, self._reader), since_lines(self._h.since[s.episode], lines),
            since_lines(self._h.since[s.episode], lines, short=True),
        )  # fmt: skip

    def _plan(self, f: EpisodeFigures) -> Iterator[Fact]:
        """If this by then, do that, agreed with whom; breaks and night; what was not done."""
        rows = (
            (tr("Plan"), "plan"),
            (tr("Agreed with"), "agreed_with"),
            (tr("Breaks and night"), "breaks_and_night"),
            (tr("Jobs not done"), "jobs"),
        )
        for name, channel in rows:
            yield name, str(f.profile.get(channel) or tr(formats.ABSENT))

    def _levers(self, f: EpisodeFigures) -> Iterator[str]:
        """What could act: the reason, then what limits it; then those that an open flag is about, by name."""
        for lever in (x for x in f.levers if x.can_act):
            why = " ".join(lever_reasons(lever, self._reader))
            yield f"{opened(lever_name(lever.key, self._reader))}: {why}"
        if asked := [lever_name(x.key, self._reader) for x in f.levers if asks(x) and not x.can_act]:
            yield tr("To be judged, a flag is open about them: {levers}.").format(levers="; ".join(asked))

    @staticmethod
    def _chart_end(s: ShiftFigures) -> int:
        """Where the record ends before the shift does, so does the chart: nothing is known after it."""
        at = quiet_since(s)
        return at if at is not None and at > s.start else s.end

    def _subtitle(self, s: ShiftFigures) -> str:
        f = s.now
        place = f.profile.get("location") or tr("place not recorded")
        identifier = f.profile.get("identifier")
        key = tr("Episode {episode}").format(episode=f.episode) + (f", {identifier}" if identifier else "")
        return f"{self._who(f)}. {place}. {key}"

    def _facts(self, s: ShiftFigures) -> Iterator[Fact]:
        p = s.now.profile
        yield tr("Why on support"), formats.quantity("indication", p.get("indication"))
        yield tr("SpO2 target"), self._target(s)
        ceiling = p.get("ceiling_of_care") or tr(formats.ABSENT)
        yield tr("Ceiling of care"), formats.quantity("ceiling_of_care", ceiling)
        yield tr("Resuscitation"), str(p.get("resuscitation") or tr(formats.ABSENT))
        yield tr("Responsible"), str(p.get("contact") or tr(formats.ABSENT))
        usual = p.get("usual_paco2")
        yield tr("Usual PaCO2"), self._lines.pressure(usual if isinstance(usual, float) else None)
        yield tr("Home support"), str(p.get("home_support") or tr(formats.ABSENT))
        yield tr("Mask this shift"), self._mask_this_shift(s)

    def _support(self, s: ShiftFigures) -> Iterator[Fact]:
        """Since when, hours on the mask, settings now, leak and interface."""
        f = s.now
        yield tr("Support"), self._lines.on_mask(f.support)
        yield tr("Settings now"), self._support_now(f)
        yield tr("Leak, interface"), self._lines.leak(s.leak) + self._interface(f)
        if (at := quiet_since(s)) is not None:
            yield tr("Record"), tr("nothing logged since {moment}").format(moment=self._moment(at))

    def _mask_this_shift(self, s: ShiftFigures) -> str:
        text = formats.hours(s.hours_on_mask)
        if not s.breaks:
            return tr("{text}, no break recorded").format(text=text)
        spans = ", ".join(
            f"{self._moment(b.start)} to {self._moment(b.end) if b.end is not None else 'now'}" for b in s.breaks
        )
        return tr("{text}; off {spans}").format(text=text, spans=spans)

    def _target(self, s: ShiftFigures) -> str:
        low, high = (s.now.profile.get(f"target_spo2_{end}") for end in ("low", "high"))
        text = f"{formats.trimmed(s.target[0])} to {formats.trimmed(s.target[1])} %"
        if low is not None and high is not None:
            return text
        now = s.now.now
        if now.spo2_target_since is None or not now.spo2_target_by_gas:
            return tr("not recorded; {text} by risk").format(text=text)
        told = tr("not recorded; {text} by risk, which the gas of {at} showed")
        return told.format(text=text, at=self._moment(now.spo2_target_since))

    def _changes(self, s: ShiftFigures) -> Iterator[ChangeLine]:
        """Every change of the shift in order of time; what was set with an anchor stands in its line."""
        beside: dict[int, list[Step]] = {}
        for step in s.other_changes:
            beside.setdefault(step.at, []).append(step)
        rows = []
        for r in s.responses:
            what = self._lines.anchor(r)
            if with_it := beside.pop(r.anchor_at, None):
                what += tr("; with it {steps}").format(steps=self._lines.steps(with_it))
            told = opened(self._lines.of(s.now).verdict(r))
            short = tr("support started") if r.anchor == "start" else what
            brief = f"{self._moment(r.anchor_at)} {short}: {tr(with_loss(r.headline, lost=r.gain_lost))}"
            line = ChangeLine(self._when(r.first_at, r.anchor_at), what, told, r.headline, brief)
            rows.append((r.first_at, line))
        for at, steps in beside.items():
            told = tr("Not judged by itself.")
            what = self._lines.steps(steps)
            brief = tr("{moment} {what}: not judged by itself").format(moment=self._moment(at), what=what)
            rows.append((at, ChangeLine(self._moment(at), what, told, "", brief)))
        yield from (line for _, line in sorted(rows, key=lambda x: x[0]))

    def _when(self, first: int, last: int) -> str:
        return self._moment(last) if first == last else f"{self._moment(first)} to {self._moment(last)}"

    def _interface(self, f: EpisodeFigures) -> str:
        return tr(". Interface: {interface}").format(interface=f.support.interface or tr(formats.ABSENT))

    def _flag(self, x: FlagFigure) -> FlagLine:
        return FlagLine(x.tier, self._lines.flag_head(x), self._lines.evidence(x), self._lines.certainty(x),
                        x.state in ("raised", "seen"), x.strongest,
                        f"{starred(marker_name(x.marker, self._reader), x.sure)} ({x.tier})", self._spell(x),
                        x.settled_at is not None)  # fmt: skip

    def _spell(self, x: FlagFigure) -> str:
        since = self._moment(x.since)
        if x.settled_at is not None:
            by = f" by {x.settled_by}" if x.settled_by else ""
            why = f": {x.settled_why}" if x.settled_why else ""
            told = tr("since {since}, settled {moment}{by}{why}")
            return told.format(since=since, moment=self._moment(x.settled_at), by=by, why=why)
        undone = f", {undone_word()}" if x.undone_by_correction else ""
        if x.ended_at is None:
            return tr("since {since}{undone}").format(since=since, undone=undone)
        told = tr("{since} to {ended}{undone}")
        return told.format(since=since, ended=self._moment(x.ended_at), undone=undone)

    def _care(self, s: ShiftFigures) -> Iterator[Fact]:
        record = self._h.records[s.episode].until(s.end)
        p = s.now.profile
        yield tr("Tolerance"), record.latest_text("comfort") or tr(formats.ABSENT)
        yield tr("Secretions"), self._newest_event(s, "secretions")
        yield tr("Skin"), self._newest_event(s, "skin_check")
        yield tr("Feeding"), str(p.get("feeding") or tr(formats.ABSENT))
        yield tr("Isolation"), str(p.get("isolation") or tr(formats.ABSENT))

    def _newest_event(self, s: ShiftFigures, channel: str) -> str:
        found = [e for e in s.events if e.channel == channel]
        if not found:
            return tr("nothing recorded this shift")
        return f"{self._clock(found[-1].at)} {found[-1].words or tr('recorded')}"

    def _to_check(self, s: ShiftFigures) -> Iterator[str]:
        if s.recorded_late and not self._h.imported:
            one = tr("1 typed entry of this shift was recorded more than 1 h late.")
            many = tr("{count} typed entries of this shift were recorded more than 1 h late.")
            yield one if s.recorded_late == 1 else many.format(count=s.recorded_late)
        yield from self._came_later(s)
        warnings = [*s.now.warnings, *(w for g in s.gases for w in g.warnings)]
        yield from dict.fromkeys(sentence(w, self._reader) for w in warnings)

    def _came_later(self, s: ShiftFigures) -> Iterator[str]:
        """In a review as known at a moment: what was recorded or changed only after it."""
        told = self._h.later.get(s.episode, ())
        if not told:
            return
        for h in told[:MOST_LATER]:
            yield tr("Not known then: {later_sentence}.").format(later_sentence=later_sentence(h, self._reader))
        if len(told) > MOST_LATER:
            yield tr("Not known then: {count} more values.").format(count=len(told) - MOST_LATER)
