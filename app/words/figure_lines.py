"""Figures as lines of text: settings, gases, responses, flags, due items, scores. Shared by print and console."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, field, replace

from app.look import formats
from app.telling.drawn import drawn_word, fio2_source
from app.telling.gas_doubt import rivals_word
from app.telling.presumed import presumed_word
from app.telling.taken import taken_words
from app.telling.undone import undone_word
from app.words import Reader, sentence
from app.words.arm_words import arm_words, arms_agree
from app.words.differences import changes_of
from app.words.missing_inputs import missing_names, why_missing
from app.words.short_forms import paco2_as_reported, ph_as_reported, two_levels
from app.words.template import quantity_name
from app.words.verdict_loss import with_loss
from core.judgement.response_shapes import JudgedGas, ResponseFigure, Step
from core.judgement.shapes import (
    DueFigure,
    EpisodeFigures,
    FlagFigure,
    GasFigure,
    LeakFigure,
    RatioFigure,
    Reasons,
    ScoreFigure,
    SupportFigure,
)
from core.record.instant import Instant
from core.record.message import Message

_ANCHORS = {"start": "Support started", "interface": "Interface changed", "break_end": "Break ended"}
_SHARED_UNITS = (" cmH2O", " %", " L/min", "/min", " s")
SCORE_NAMES = {
    "hacor": "HACOR", "hacor_updated": "HACOR, updated", "news2": "NEWS2", "rox": "ROX",
    "copd_failure": "COPD failure chart",
}  # fmt: skip


@dataclass(frozen=True, slots=True)
class FigureLines:
    """Writes figures for one reader."""

    reader: Reader
    acidotic_from: Instant | None = -(2**62)
    """Since when there was an acidosis that could have resolved; None where there never was."""
    above: Mapping[Instant, float] = field(default_factory=dict)
    """Gases whose pH is above its upper limit, and that limit."""
    gases: Mapping[Instant, GasFigure] = field(default_factory=dict)
    """Arterial and capillary gases by their moment."""

    def of(self, f: EpisodeFigures) -> FigureLines:
        """The same for one episode, whose states depend on what was before."""
        always = -(2**62) if f.now.ever_acidotic else None
        first = min((g.at for g in f.gases if g.state in ("severe", "acidotic")), default=always)
        above = {g.at: g.ph_above for g in f.gases if g.ph_above is not None and g.state is not None}
        gases = {g.at: g for g in f.gases if g.site != "venous"}
        return replace(self, acidotic_from=first, above=above, gases=gases)

    def state(self, state: str, at: Instant | None = None) -> str:
        """The state of a gas of a moment: what was not acidotic before has not resolved, nor is the rest normal."""
        if state == "resolved" and at is not None and at in self.above:
            return f"{self.tr('not acidotic, pH above')} {formats.fixed(self.above[at], 2)}"
        first = self.acidotic_from
        resolved = first is not None and (at is None or first < at)
        return self.tr("not acidotic" if state == "resolved" and not resolved else state)

    def tr(self, text: str) -> str:
        """A phrase in the reader's language."""
        return self.reader.translate(text)

    def settings(self, s: SupportFigure) -> str:
        """The settings in force on one line; what is not known says so."""
        parts = [s.mode or self.tr("mode not recorded"), *self._pressures(s), self.oxygen(s)]
        if s.rate_set_per_min is not None:
            parts.append(f"{self.tr('backup rate')} {formats.trimmed(s.rate_set_per_min)}/min")
        if s.ti_s is not None:
            parts.append(f"Ti {formats.trimmed(s.ti_s)} s")
        if s.interface:
            parts.append(f"{s.interface} {self.tr('mask')}" if s.interface != "helmet" else s.interface)
        return ", ".join(p for p in parts if p)

    def _pressures(self, s: SupportFigure) -> list[str]:
        if s.ipap_cmH2O is not None:
            epap = formats.trimmed(s.epap_cmH2O) if s.epap_cmH2O is not None else self.tr("not recorded")
            return [two_levels(s.ipap_cmH2O, epap, s.pressure_support_cmH2O)]
        return [f"{formats.trimmed(s.epap_cmH2O)} cmH2O"] if s.epap_cmH2O is not None else []

    def oxygen(self, s: SupportFigure) -> str:
        """The oxygen given: FiO2, or a flow whose FiO2 is not known."""
        if s.fio2 is not None:
            return f"FiO2 {formats.fraction(s.fio2)}"
        flow = f"{formats.trimmed(s.o2_flow_L_per_min)} L/min, " if s.o2_flow_L_per_min is not None else ""
        return f"{self.tr('oxygen')} {flow}{self.tr('FiO2 not known')}" if flow else self.tr("FiO2 not known")

    def on_mask(self, s: SupportFigure) -> str:
        """Since when support runs, and hours on the mask."""
        if s.since is None:
            return self.tr("start of support not recorded")
        text = f"{self.tr('support since')} {formats.wall(s.since, self.reader.zone)}"
        if s.last_change_at is not None and s.last_change_at > s.since and s.ended_at is None:
            text += f"; {self.tr('these settings since')} {self.reader.time(s.last_change_at)}"
        if s.hours_on_mask is not None:
            text += f"; {formats.hours(s.hours_on_mask)} {self.tr('on the mask')}"
        if s.hours_on_mask_last_24h is not None:
            text += f" ({formats.hours(s.hours_on_mask_last_24h)} {self.tr('in the last 24 h')})"
        if presumed := presumed_word(s, self.reader.zone):
            text += f", {presumed}"
        if s.ended_at is not None:
            why = f", {s.end_reason}" if s.end_reason else ""
            text += f"; {self.tr('ended')} {self.reader.time(s.ended_at)}{why}"
        elif s.break_since is not None:
            text += f"; {self.tr('off the mask since')} {self.reader.time(s.break_since)}"
        return text

    def ph(self, gas: GasFigure) -> str:
        """pH with the precision it was reported in."""
        return ph_as_reported(gas) or self.absent()

    def paco2(self, gas: GasFigure) -> str:
        """PCO2 in the reader's unit; as typed where it was typed in that unit."""
        return paco2_as_reported(gas, self.reader.gas_unit) or self.absent()

    def pressure(self, mmhg: float | None, *, sign: bool = False) -> str:
        """A gas pressure in the reader's unit."""
        return self.absent() if mmhg is None else formats.gas_pressure(mmhg, self.reader.gas_unit, sign=sign)

    def absent(self) -> str:
        """What stands where a value was not recorded."""
        return self.tr(formats.ABSENT)

    def gas(self, g: GasFigure) -> str:
        """A gas with what is computed from it, on one line."""
        site = g.site + (f" ({self.tr('assumed')})" if g.site_assumed else "")
        parts = [f"{self.reader.time(g.at)} {site}: pH {self.ph(g)}", f"PCO2 {self.paco2(g)}"]
        if g.pao2_mmHg is not None:
            parts.append(f"PO2 {self.pressure(g.pao2_mmHg)}")
        if g.hco3_mmol_L is not None:
            parts.append(f"HCO3 {formats.fixed(g.hco3_mmol_L, 1)} mmol/L")
        elif g.hco3_calculated_mmol_L is not None:
            parts.append(f"HCO3 {formats.fixed(g.hco3_calculated_mmol_L, 1)} mmol/L ({self.tr('calculated')})")
        if g.sbe_mmol_L is not None:
            parts.append(f"SBE {formats.signed(g.sbe_mmol_L, 1)} mmol/L")
        if g.lactate_mmol_L is not None:
            parts.append(f"lactate {formats.fixed(g.lactate_mmol_L, 1)} mmol/L")
        if g.fio2 is not None:
            source = fio2_source(g)
            parts.append(f"FiO2 {formats.fraction(g.fio2)}" + (f" ({source})" if source else ""))
        no_pf = self.why("P/F", g.reasons, "pf_mmHg")
        parts.append(no_pf if g.pf_mmHg is None else f"P/F {self.pressure(g.pf_mmHg)}")
        if g.aa_gradient_mmHg is not None:
            parts.append(f"A-a {self.pressure(g.aa_gradient_mmHg)}")
        parts += self.gas_marks(g)
        return ", ".join(p for p in parts if p)

    def gas_marks(self, g: GasFigure) -> list[str]:
        """State and doubts of a gas, as words."""
        marks = ((g.consistent is False, "pH, PCO2 and bicarbonate do not agree"), (g.doubt, "doubtful"),
                 (g.corrected, "corrected"), (g.disputed, "disputed"))  # fmt: skip
        state = [self.state(g.state, g.at)] if g.state else []
        rivals, drawn = rivals_word(g), drawn_word(g)
        state += [drawn] if drawn else []
        return [*state, *(self.tr(word) for holds, word in marks if holds), *([rivals] if rivals else [])]

    def why(self, name: str, reasons: Reasons, field: str) -> str:
        """An absent figure with its reason; empty where there is none."""
        return f"{name} {self.tr('not known')} ({sentence(reasons[field], self.reader)})" if field in reasons else ""

    def step(self, step: Step) -> str:
        """One change: what, from, to."""
        if step.channel == "break_end":
            length = f"{formats.minutes(step.before)} " if isinstance(step.before, float) else ""
            return self.tr("Break of {length}ended").format(length=length) if length else self.tr("Break ended")
        name = quantity_name(step.channel)
        name = name if name[:2] == "pH" else name[0].upper() + name[1:]
        if step.before is None and step.after is None:
            return self.tr(_ANCHORS.get(step.channel, name))
        after = self._amount(step.channel, step.after)
        if step.before is None:
            return f"{self.tr(name)} {after}"
        before = self._amount(step.channel, step.before)
        unit = next((u for u in _SHARED_UNITS if before.endswith(u) and after.endswith(u)), "")
        before = before.removesuffix(unit)
        return f"{self.tr(name)} {before} {self.tr('to')} {after}"

    def _amount(self, channel: str, value: float | str | None) -> str:
        if value is None:
            return self.tr("not known") if channel == "fio2" else self.absent()
        if channel == "pressure_support" and not isinstance(value, str):
            return f"{formats.trimmed(value)} cmH2O"
        return formats.quantity(channel, value, self.reader.gas_unit)

    def anchor(self, r: ResponseFigure) -> str:
        """What an anchor was: its steps, those of one moment together."""
        steps = self.steps(s for s in r.steps if not (s.before is None and s.after is None))
        if r.anchor == "change":
            return steps or self.tr("Settings changed")
        if r.anchor == "break_end" and steps:
            return steps
        running = any(m.key == "response.support_was_running" for m in r.why)
        head = self.tr("Support was running") if running else self.tr(_ANCHORS[r.anchor])
        return f"{head}: {steps}" if steps else head

    def steps(self, steps: Iterable[Step]) -> str:
        """Several changes in one sentence."""
        words = [self.step(s) for s in steps]
        return ", ".join([*words[:1], *(_lowered(w) for w in words[1:])])

    def verdict(self, r: ResponseFigure, *, brief: bool = False) -> str:
        """The headline with the gas it rests on, by how much, after how long; `brief` leaves out its state.

        A gain that was lost and the sum since the start stand beside it: alone it could hide a relapse.
        """
        judged = next((g for g in reversed(r.gases) if g.at == r.headline_gas_at), None)
        if judged is None or judged.verdict is None:
            why = " ".join(sentence(m, self.reader) for m in r.why)
            return f"{self.tr(r.headline)}. {why}".rstrip(". ") + "."
        text = f"{self.headline(r, judged)}: {self.deltas(judged, with_state=not brief)}"
        arms = "" if brief and arms_agree(judged) else arm_words(judged, self.reader)
        text = f"{text} ({arms})." if arms else f"{text}."
        return f"{text} {self.loss(judged)}".rstrip()

    def loss(self, judged: JudgedGas) -> str:
        """What was lost since the best gas, and when that was: the sum since the baseline may still look good."""
        told = []
        for key in ("gain_lost", "oxygen_gain_lost"):
            if (why := judged.since_start.reasons.get(key)) is not None:
                best, now = self.gases.get(int(str(why.values["best_at"]))), self.gases.get(judged.at)
                fell = self._fell(best, now, of_pf=key != "gain_lost") if best and now else ""
                told.append(f"{self.tr('Lost since')} {self.reader.time(best.at)}: {fell}." if best and fell
                            else sentence(why, self.reader))  # fmt: skip
        return " ".join(told)

    def _fell(self, best: GasFigure, now: GasFigure, *, of_pf: bool) -> str:
        """From the best gas to this one, in the values that tell of the loss."""
        to = self.tr("to")
        if of_pf:
            before = self.pressure(best.pf_mmHg).removesuffix(f" {self.reader.gas_unit}")
            return f"P/F {before} {to} {self.pressure(now.pf_mmHg)}"
        parts = [f"pH {self.ph(best)} {to} {self.ph(now)}"]
        if best.paco2_mmHg is not None and now.paco2_mmHg is not None:
            before, after = self.paco2(best), self.paco2(now)
            parts.append(f"PaCO2 {before.removesuffix(f' {self.reader.gas_unit}')} {to} {after}")
        return ", ".join(parts)

    def headline(self, r: ResponseFigure, judged: JudgedGas) -> str:
        """The verdict with a gain that was lost, and the verdict since the start where it is another."""
        since = judged.since_start
        text = self.tr(with_loss(r.headline, lost=r.gain_lost or since.gain_lost))
        if r.in_doubt:
            text += f" ({self.tr('doubtful value')})"
        if since.verdict is not None and since.verdict != r.headline:
            text += f" ({self.tr('since the start')}: {self.tr(since.verdict)})"
        return text

    def deltas(self, g: JudgedGas, *, with_state: bool = True) -> str:
        """By how much a gas differs from the baseline, and when it was taken."""
        parts = changes_of(g, self.reader)
        timing = {"early": self.tr("early"), "late": self.tr("late")}.get(g.timing, "")
        when = f"{self.tr('after')} {formats.minutes(g.minutes)}{', ' + timing if timing else ''}"
        state = f", {self.tr('gas')} {self.state(g.state, g.at)}" if g.state and with_state else ""
        return f"{', '.join(parts) or self.tr('no difference known')} {when}{state}"

    def flag_head(self, f: FlagFigure) -> str:
        """A flag's name with its tier, since when, and what became of it."""
        from app.telling.certainty import starred
        from app.telling.finding_names import marker_name

        name = starred(marker_name(f.marker, self.reader), f.sure)
        text = f"{self.tr(f.tier).upper()} {name}, {self.tr('since')} {self.reader.time(f.since)}"
        return text + self._fate(f)

    def _fate(self, f: FlagFigure) -> str:
        parts = []
        if f.seen_at is not None:
            by = f" {self.tr('by')} {f.seen_by}" if f.seen_by else ""
            parts.append(f"{self.tr('seen')} {self.reader.time(f.seen_at)}{by}")
        if f.settled_at is not None:
            by = f" {self.tr('by')} {f.settled_by}" if f.settled_by else ""
            why = f" ({f.settled_why})" if f.settled_why else ""
            parts.append(f"{self.tr('settled')} {self.reader.time(f.settled_at)}{by}{why}")
        elif f.ended_at is not None:
            parts.append(f"{self.tr('no longer met since')} {self.reader.time(f.ended_at)}")
        if f.undone_by_correction:
            parts.append(undone_word())
        if f.outside_population:
            parts.append(self.tr("outside its population"))
        return "; " + ", ".join(parts) if parts else ""

    def evidence(self, f: FlagFigure) -> str:
        """Why the flag is met."""
        from app.telling.flag_spans import with_gaps

        told = (*(sentence(m, self.reader) for m in f.evidence), with_gaps(f, self.reader))
        return " ".join(part for part in told if part)

    def certainty(self, f: FlagFigure) -> str:
        """Where a marker comes from and how sure that is."""
        detail = f"; {self.tr('for how long and the like')}: {self.tr(f.detail_sure)}"
        return f"{f.source} [{self.tr(f.sure)}{detail if f.detail_sure and f.detail_sure != f.sure else ''}]"

    def due(self, d: DueFigure) -> str:
        """A due item: what, by when, its state and why."""
        from app.telling.finding_names import due_name

        state = {"overdue": self.tr("OVERDUE"), "awaiting result": self.tr("awaiting result")}.get(d.state, "")
        head = f"{due_name(d.what, self.reader)} {self.tr('by')} {self.reader.time(d.due_until)}"
        return f"{head}{', ' + state if state else ''}: {sentence(d.because, self.reader)}"

    def score(self, name: str, s: ScoreFigure) -> str:
        """A score with its bounds, when it was taken, and its caveats."""
        shown = SCORE_NAMES.get(name, name)
        if s.points is None and s.lowest is None:
            if s.caveat is not None and name == "copd_failure":
                return self._risk_class(shown, s)
            return self.why(shown, s.reasons, "points") or f"{shown} {self.tr('not known')}"
        if s.points is not None:
            text = f"{shown} {formats.trimmed(s.points)}"
        else:
            low, high = formats.trimmed(s.lowest or 0.0), formats.trimmed(s.highest or 0.0)
            names = "; ".join((missing_names(s), *why_missing(s, self.reader)))
            text = f"{shown} {self.tr('between')} {low} {self.tr('and')} {high} ({self.tr('missing')}: {names})"
        if s.at is not None:
            text += f" {self.tr('at')} {self.reader.time(s.at)}"
        if s.population == "outside" and not (s.caveat is not None and s.caveat.key.startswith("population.")):
            text += f", {self.tr('outside its population')}"  # elsewhere the caveat says so, and why
        return text + (f". {formats.opened(sentence(s.caveat, self.reader))}" if s.caveat else "")

    def _risk_class(self, name: str, s: ScoreFigure) -> str:
        """A score that has no points: its class, what is missing, when it was taken."""
        text = f"{self.tr(name)}: {sentence(s.caveat, self.reader)}" if s.caveat else self.tr(name)
        if s.missing:
            text += f" ({self.tr('missing')}: {missing_names(s)})"
        if s.at is not None:
            text += f" {self.tr('at')} {self.reader.time(s.at)}"
        return text + (f", {self.tr('outside its population')}" if s.population == "outside" else "")

    def ratio(self, name: str, r: RatioFigure, *, is_pressure: bool = False, decimals: int = 0) -> str:
        """P/F, S/F or ROX: the newest value, its slope with interval, and why not."""
        if r.latest is None or r.at is None:
            return self.why(name, r.reasons, "latest") or f"{name} {self.tr('not known')}"

        def amount(value: float, *, sign: bool = False) -> str:
            if is_pressure:
                return self.pressure(value, sign=sign)
            return (formats.signed if sign else formats.fixed)(value, decimals)

        text = f"{name} {amount(r.latest)} {self.tr('at')} {self.reader.time(r.at)}"
        if r.slope_per_h is not None:
            text += f", {self.tr('slope')} {amount(r.slope_per_h, sign=True)} {self.tr('per h')}"
            if r.slope_low is not None and r.slope_high is not None:
                text += f" ({amount(r.slope_low, sign=True)} {self.tr('to')} {amount(r.slope_high, sign=True)})"
        return text + (f". {formats.opened(sentence(r.caveat, self.reader))}" if r.caveat else "")

    def leak(self, leak: LeakFigure) -> str:
        """Leak: its median, what is meant by it, and time over the limit."""
        if leak.median_L_per_min is None:
            return self.why(self.tr("Leak"), leak.reasons, "median_L_per_min") or self.tr("Leak not recorded")
        taken = taken_words(leak.median_of, leak.latest_at, self.reader)
        names = {"unintentional": self.tr("Unintentional leak"), "total": self.tr("Total leak, port included,")}
        name = names.get(leak.definition or "", self.tr("Leak"))
        meant = "" if leak.definition else f"; {self.tr('what the device calls leak is not known')}"
        text = f"{name} {formats.fixed(leak.median_L_per_min, 0)} L/min ({taken}{meant})"
        return text + "".join(f"; {part}" for part in self._over_limit(leak))

    def _over_limit(self, leak: LeakFigure) -> Iterable[str]:
        """How long the device's samples were over the limit; of typed readings how many, since none has a length."""
        if leak.limit_L_per_min is None:
            return
        # a total leak's limit goes with the pressure: the one of now is not that of then
        follows = leak.definition == "total"
        limit = self.tr("its limit, now {limit} L/min" if follows else "{limit} L/min")
        limit = limit.format(limit=formats.fixed(leak.limit_L_per_min, 0))
        if leak.minutes_over_limit is not None:
            over = self.tr("in that time {length} over {limit}")
            yield over.format(length=formats.minutes(leak.minutes_over_limit), limit=limit)
            if leak.sampled_in_part and leak.minutes_sampled is not None:
                part = self.tr("the device's samples cover {length} of it")
                yield part.format(length=formats.minutes(leak.minutes_sampled))
        if leak.readings_typed:
            typed = self.tr("{over} of {of} readings over {limit}, typed now and then")
            yield typed.format(over=leak.readings_typed_over, of=leak.readings_typed, limit=limit)

    def sentences(self, messages: Iterable[Message]) -> str:
        """Messages in words, one after the other."""
        return " ".join(sentence(m, self.reader) for m in messages)

    def clock(self, at: Instant) -> str:
        """The hour and minute."""
        return formats.clock(at, self.reader.zone)


def _lowered(words: str) -> str:
    """A name inside a sentence; abbreviations keep their letters."""
    first = words.partition(" ")[0]
    return words if any(c.isupper() or c.isdigit() for c in first[1:]) else words[0].lower() + words[1:]
