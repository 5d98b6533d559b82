"""What the ward's page of a handover says: every episode in order of concern, whom to see first, what is due."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace

from app.look import formats
from app.look.theme import verdict_of, verdict_word
from app.sheet.due_lines import due_short, gases_due, others_due, skin_line
from app.sheet.shapes import WardPage, WardRow
from app.sheet.since_lines import compared_with
from app.sheet.writer import (
    SKIN_OVERDUE,
    SheetWriter,
    is_limited,
    limits_of_care,
    opened,
    quiet_since,
    state_head,
    strength,
)
from app.telling.gas_doubt import rests_on_doubt
from app.telling.headline import headline
from app.telling.language import in_language as tr
from app.telling.presumed import silent_word
from app.ward.ordering import GAS
from app.words import sentence
from app.words.differences import changes_of
from core.figures.shift import ShiftFigures
from core.judgement.response_shapes import ResponseFigure
from core.judgement.shapes import EpisodeFigures, FlagFigure
from core.record.instant import Instant


class WardWriter(SheetWriter):
    """Writes the ward's page."""

    def ward(self, title: str) -> WardPage:
        shift = self._h.shift
        span = formats.span(shift.start, self._h.end, self._reader.zone)
        if shift.end < self._h.end:  # the shift still runs: its figures must not be taken for those of its end
            span += f", as of {self._reader.time(shift.end)}"
        if self._h.as_known_at is not None:  # on every page: a review must never be taken for the handover
            span += tr(", as known at {wall}").format(wall=formats.wall(self._h.as_known_at, self._reader.zone))
        ends, quiet = [quiet_since(s) for s in shift.episodes], ""
        if ends and all(at is not None for at in ends):
            last = self._moment(max(at for at in ends if at is not None))
            quiet = tr("nothing logged since {moment}").format(moment=last)
        return WardPage(
            title, tr("Shift {span}").format(span=span), self._see_first(),
            tuple(self._ward_row(n, s) for n, s in enumerate(shift.episodes, 1)),
            tuple(gases_due(shift.episodes, self._reader)), tuple(self._ward_missing()),
            skin_line(shift.episodes, self._reader), quiet,
            tuple(others_due(shift.episodes, self._reader)), compared_with(self._h.handed, self._reader),
        )  # fmt: skip

    def _see_first(self) -> str:
        first = self._h.shift.first
        if not self._h.shift.episodes:
            return tr("No episode: nothing is logged, so nothing is judged.")
        if first is None or first.now.concern.why is None:
            return tr("No episode stands out: no open flag, nothing overdue.")
        return f"{first.now.label}: {sentence(first.now.concern.why, self._reader)}"

    def _ward_row(self, number: int, s: ShiftFigures) -> WardRow:
        f, p = s.now, s.now.profile
        shown = sorted((x for x in s.flags_open if x.strongest), key=strength)
        strong = [x for x in shown if x.tier != "remark"]
        remarks = [x for x in shown if x.tier == "remark" and x.marker != SKIN_OVERDUE]  # summed under what is due
        return WardRow(
            number, f.label, self._who(f), shown[0].tier if shown else "", self._standing(f),
            self._change_of_state(s), self._support_short(f), self._latest_response(f),
            tuple(self._flag_line(x) for x in strong), "; ".join(self._remark(x) for x in remarks),
            "; ".join(due_short(d, self._reader) for d in s.due),
            limits_of_care(p), f.support.ended_at is not None, self._action(s), _sign(f), is_limited(p),
        )  # fmt: skip

    def _action(self, s: ShiftFigures) -> str:
        """The plan and the newest call, where a flag asks for a senior or a gas is overdue."""
        escalate = any(x.tier == "escalate" for x in s.flags_open)
        if not escalate and not any(d.what in GAS and d.state == "overdue" for d in s.due):
            return ""
        plan = str(s.now.profile.get("plan") or tr(formats.ABSENT)).rstrip(".")
        called = self._calls(s)[-1] if s.told or s.told_before else tr(formats.ABSENT)
        return tr("Plan: {plan}. Told: {told}.").format(plan=plan, told=called.rstrip("."))

    def _support_short(self, f: EpisodeFigures) -> str:
        """Support and oxygen as short as a ward's list needs them."""
        s = f.support
        if s.ended_at is not None:
            return self._support_now(f)
        if s.break_since is not None:
            return tr("OFF THE MASK since {clock}").format(clock=self._clock(s.break_since))
        pressure = ""
        if s.ipap_cmH2O is not None and s.epap_cmH2O is not None:
            pressure = f" {formats.trimmed(s.ipap_cmH2O)}/{formats.trimmed(s.epap_cmH2O)} cmH2O"
        elif s.epap_cmH2O is not None:
            pressure = f" {formats.trimmed(s.epap_cmH2O)} cmH2O"
        support = s.pressure_support_cmH2O if s.ipap_cmH2O is not None else None
        more = f" (PS {formats.trimmed(support)})" if support is not None else ""
        told = f"{s.mode or 'mode not recorded'}{pressure}{more}, {self._lines.oxygen(s)}"
        silence = silent_word(s, self._reader.zone)
        return f"{told}; {silence}" if silence else told

    def _change_of_state(self, s: ShiftFigures) -> str:
        before, after = s.state_before, s.state_after
        if s.began and after:
            return tr("support started this shift")
        if not before or not after or before == after:
            return ""
        told = tr("{before} before, now {now}")
        return told.format(before=state_head(before).lower(), now=state_head(after).lower())

    def _latest_response(self, f: EpisodeFigures) -> str:
        judged = [r for r in f.responses if r.headline not in ("not yet known", "not judged")]
        waiting = f.responses[-1] if f.responses and f.responses[-1].headline == "not yet known" else None
        text = ""
        if judged:
            r = judged[-1]
            anchor = tr("support started") if r.anchor == "start" else self._lines.anchor(r)
            text = f"{self._moment(r.anchor_at)} {anchor}. {opened(self._lines.of(f).verdict(r, brief=True))}"
            text += self._lost_later(f, r)
        if waiting is not None:
            text += tr(" Change of {moment}: response not yet known.").format(moment=self._moment(waiting.anchor_at))
        summed = self._since_start(f, judged[-1].headline_gas_at if judged else None)
        waits = text.strip() or tr("No response judged yet.")
        return f"{waits} {summed}" if summed else waits

    def _since_start(self, f: EpisodeFigures, told: Instant | None) -> str:
        """What the newest gas says against the start, where it is newer than the gas of the verdict that is told: a
        change without a baseline hides neither a drift nor that nothing has changed."""
        compared = [g for r in f.responses for g in r.gases if g.since_start.verdict is not None]
        newest = max(compared, key=lambda g: g.at, default=None)
        if newest is None or (told is not None and newest.at <= told):
            return ""
        since = newest.since_start
        against = replace(newest, delta_ph=since.delta_ph, delta_paco2_mmHg=since.delta_paco2_mmHg,
                          delta_pf_mmHg=since.delta_pf_mmHg)  # fmt: skip
        by = ", ".join(changes_of(against, self._reader))
        doubt = any(g.at == newest.at and rests_on_doubt(g) for g in f.gases)
        word = verdict_word(verdict_of(str(since.verdict))) + (tr(" (doubtful value)") if doubt else "")
        said = tr("Since the start {verdict}: {by} (gas of {moment}).")
        return said.format(verdict=word, by=by, moment=self._moment(newest.at))

    def _lost_later(self, f: EpisodeFigures, told: ResponseFigure) -> str:
        """What a newer gas than that of the verdict has lost."""
        if not f.now.since_start_gain_lost:
            return ""
        newest = max(
            (g for r in f.responses for g in r.gases if g.since_start.gain_lost), key=lambda g: g.at, default=None
        )
        if newest is None or newest.at <= (told.headline_gas_at or 0):
            return ""
        return f" {self._lines.of(f).loss(newest)}".rstrip()

    def _flag_line(self, f: FlagFigure) -> str:
        return f"{tr(f.tier).upper()} {self._remark(f)}"

    def _ward_missing(self) -> Iterator[str]:
        """What nobody recorded and the next shift will ask for."""
        for channel, word in (("handover_remark", tr("handover remark")), ("plan", "plan"),
                              ("ceiling_of_care", tr("ceiling of care")),
                              ("resuscitation", tr("resuscitation decision"))):  # fmt: skip
            without = [s.now.label for s in self._h.shift.episodes
                       if not s.now.profile.get(channel) and s.now.support.ended_at is None]  # fmt: skip
            if without and len(without) == len(self._h.shift.episodes):
                yield tr("No {word} recorded for any episode.").format(word=word)
            elif without:
                yield tr("No {word} recorded: {those}.").format(word=word, those=", ".join(without))


def _sign(f: EpisodeFigures) -> str:
    told = headline(f)
    return told.sign.value if told is not None else ""
