"""Beside the panels: the state now, flags with evidence and source, due items, scores, levers."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import replace

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import QFrame, QScrollArea, QVBoxLayout, QWidget

from app.episode.due_done import done_fact
from app.episode.figure_list import FigureList
from app.episode.flag_history import history_fact, word_lines
from app.explain.explanation import Explanation
from app.explain.fact import Fact, heading
from app.explain.figures import CLASSES, explain_row, score_in, score_value
from app.explain.findings import Explainer
from app.figures.groups import figure_groups
from app.figures.leak import mask_rows
from app.figures.rows import RowMaker
from app.figures.values import input_name
from app.look.formats import hours, minutes, opened, since, trimmed
from app.look.signs import Sign
from app.look.theme import Theme, Tier, Verdict, tier_word, verdict_word
from app.telling.certainty import certainty_words
from app.telling.drawn import drawn_word
from app.telling.finding_names import due_name, lever_name, marker_name
from app.telling.flag_spans import with_gaps
from app.telling.gas_doubt import doubt_reason, doubt_word, rests_on_doubt, state_in_doubt
from app.telling.headline import (
    Headline,
    beside_pf,
    deciding,
    ever_acidotic,
    gas_state_word,
    headline,
    off_mask_word,
    pf_word,
    sign_of,
)
from app.telling.lever_words import asks, lever_reasons, lever_sentence, lever_standing
from app.telling.phrases import gas_words, state_of, support_now, translate
from app.telling.presumed import presumed_word, silent_word
from app.ward.lane_words import anchor_name, open_flags
from app.ward.ordering import OPEN_DUE
from app.words import Reader, sentence
from app.words.missing_inputs import why_missing
from core.judgement.now import headline_response
from core.judgement.policy import Policy
from core.judgement.response_shapes import ResponseFigure
from core.judgement.shapes import EpisodeFigures, FlagFigure, GasFigure, ScoreFigure
from core.record.instant import MINUTE

SCORE_NAMES = {
    "hacor": "HACOR", "hacor_updated": "HACOR 2022", "news2": "NEWS2", "rox": "ROX",
    "copd_failure": "COPD failure chart",
}  # fmt: skip
LONG_VALUE = 20
"""Letters: a longer value stands under its name."""


SHARE = 0.21
"""Of the page's width, where that is more than the column needs."""
MOST_WIDTH = 430
"""Pixels: with large text the panels keep their room, and the column scrolls."""


class SideColumn(QScrollArea):
    """Draws the figures of one episode as facts in groups."""

    explain_wanted = Signal(object)

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self._theme = theme
        self.figures: FigureList | None = None
        self.setWidgetResizable(True)
        self.setFrameShape(QFrame.Shape.NoFrame)
        self.setHorizontalScrollBarPolicy(Qt.ScrollBarPolicy.ScrollBarAlwaysOff)
        self.setFocusPolicy(Qt.FocusPolicy.NoFocus)
        self.setAccessibleName(self.tr("State, flags, due items and levers"))
        self.set_theme(theme)

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size; the next figures are drawn in it."""
        self._theme = theme
        self.fit_page(0)

    def fit_page(self, width: int) -> None:
        """Take a share of a page so wide, so that sentences break less often on a large screen."""
        self.setFixedWidth(min(max(self._theme.px(332), round(width * SHARE)), MOST_WIDTH))

    def facts(self) -> list[Fact]:
        """All facts from top to bottom."""
        inside = self.widget()
        return inside.findChildren(Fact) if inside is not None else []

    def toggle_figures(self) -> None:
        """Unfold every group of figures and go to the first; fold them all where one is unfolded."""
        if self.figures is None or not self.figures.folds:
            return
        self.figures.set_unfolded(not self.figures.is_unfolded)
        self.figures.folds[0].head.setFocus()
        if self.figures.is_unfolded:
            self.ensureWidgetVisible(self.figures.folds[-1].head)
            self.ensureWidgetVisible(self.figures.folds[0].head, 0, self.viewport().height() // 2)

    def show_figures(self, figures: EpisodeFigures, policy: Policy, reader: Reader) -> None:
        """Draw the figures anew, keeping the place that was scrolled to."""
        place, old = self.verticalScrollBar().value(), self.facts()
        focused = next((n for n, fact in enumerate(old) if fact.hasFocus()), None)
        unfolded = {fact.key for fact in old if fact.is_unfolded}
        maker = _Facts(self._theme, figures, Explainer(policy, reader), reader)
        inside = QWidget()
        column = QVBoxLayout(inside)
        px = self._theme.px
        column.setContentsMargins(0, 0, px(8), px(8))
        column.setSpacing(px(4))
        for title, facts in maker.groups():
            card = QFrame()
            card.setProperty("card", True)
            rows = QVBoxLayout(card)
            rows.setContentsMargins(px(6), px(8), px(6), px(6))
            rows.setSpacing(0)
            label = heading(title)
            label.setContentsMargins(px(8), 0, px(8), 0)
            rows.addWidget(label)
            for fact in facts:
                fact.explain_wanted.connect(self.explain_wanted)
                rows.addWidget(fact)
            column.addWidget(card)
        self.figures = FigureList(self._theme, figure_groups(figures, reader), reader, figures.as_of)
        self.figures.explain_wanted.connect(self.explain_wanted)
        column.addWidget(self.figures)
        column.addStretch(1)
        self.setWidget(inside)
        self._as_before(focused, unfolded)
        self.verticalScrollBar().setValue(place)

    def _as_before(self, focused: int | None, unfolded: set[str]) -> None:
        """News must not take the focus away, nor fold what was opened."""
        left = set(unfolded)
        while news := [fact for fact in self.facts() if fact.key in left and not fact.is_unfolded]:
            for fact in news:  # what was unfolded may hold folds of its own
                fact.unfold()
                left.discard(fact.key)
        facts = self.facts()
        if focused is not None and facts:
            facts[min(focused, len(facts) - 1)].setFocus()


class _Facts:
    """Makes the facts of an episode, group by group."""

    def __init__(self, theme: Theme, figures: EpisodeFigures, explainer: Explainer, reader: Reader) -> None:
        self.theme, self.f, self.explainer, self.reader = theme, figures, explainer, reader

    def groups(self) -> Iterator[tuple[str, Sequence[Fact]]]:
        """(heading, facts) from top to bottom; a group without facts is left out, flags and due never are."""
        yield translate("side", "Now"), tuple(self._now())
        yield (
            translate("side", "Flags"),
            (*(tuple(self._flags()) or (self._quiet(translate("side", "No open flag")),)), *self._earlier()),
        )
        due = tuple(self._due()) or (self._quiet(translate("side", "Nothing due")),)
        done = done_fact(self.theme, self.f, self.reader)
        yield translate("side", "Due"), due if done is None else (*due, done)
        levers = tuple(self._levers())
        if levers:
            yield translate("side", "What could act: a qualified person decides"), levers
        scores = tuple(self._scores())
        if scores:
            yield translate("side", "Scores"), scores

    def _quiet(self, text: str) -> Fact:
        return Fact(self.theme, text, quiet=True)

    # now

    def _now(self) -> Iterator[Fact]:
        f = self.f
        gas = next((g for g in reversed(f.gases) if g.site != "venous"), None)
        if gas is None:
            yield self._quiet(translate("side", "No gas yet"))
        else:
            age = since(gas.at, f.as_of)
            yield Fact(
                self.theme,
                self._state(gas),
                (gas_words(gas, self.reader.gas_unit), f"{self.reader.time(gas.at)}, {age}"),
                sign=Sign(self.theme, state_of(gas.state), doubtful=gas.doubt or gas.disputed),
                marks=self._doubt(gas),
                large=True,
                explanation=self.explainer.gas(gas),
            )
        response, told = headline_response(f.responses), headline(f)
        if response is not None and told is not None:
            yield self._verdict(response, told)
            if told.since_start is not None and not self._says_the_same(response, told):
                yield self._since_start(response, told.since_start)
        yield Fact(self.theme, self._support(), tuple(self._mask_time()), explanation=self._hours())

    @staticmethod
    def _doubt(gas: GasFigure) -> tuple[str, ...]:
        """Why the gas is doubtful; that it is stands before its state already where the state rests on it."""
        told = doubt_reason(gas) if rests_on_doubt(gas) else doubt_word(gas)
        return (f"{opened(told)}.",) if told else ()

    def _state(self, gas: GasFigure) -> str:
        pf = pf_word(self.f, gas, self.reader.gas_unit, self.reader.zone)
        state = beside_pf(pf, gas_state_word(self.f, gas))
        state = ", ".join(part for part in (state, drawn_word(gas)) if part)
        if pf and not ever_acidotic(self.f):  # oxygen alone is what failed
            state = translate("side", "Hypoxaemic: {state}").format(state=state)
        return state_in_doubt(gas, state)

    @staticmethod
    def _says_the_same(response: ResponseFigure, told: Headline) -> bool:
        """The start's own verdict is its sum already."""
        return response.anchor == "start" and told.since_start is told.verdict

    def _since_start(self, response: ResponseFigure, against: Verdict) -> Fact:
        """As strong as the headline: steps too small to tell may add up."""
        title = translate("side", "since the start: {verdict}").format(verdict=verdict_word(against))
        sign = Sign(self.theme, against)
        return Fact(self.theme, title, sign=sign, large=True, explanation=self.explainer.response(response))

    def _hours(self) -> Explanation:
        """How the hours on the mask were counted."""
        row = next(mask_rows(self.f, RowMaker(self.reader, {})))
        return explain_row(row, self.reader, self.f.as_of)

    def _verdict(self, response: ResponseFigure, told: Headline) -> Fact:
        lines = [
            translate("side", "after {anchor} at {time}").format(
                anchor=anchor_name(response), time=self.reader.time(response.anchor_at)
            )
        ]
        lines += [sentence(m, self.reader) for m in deciding(response.why)]
        return Fact(
            self.theme,
            told.word,
            lines,
            sign=Sign(self.theme, sign_of(told.verdict, lost=told.gain_lost)),
            large=True,
            explanation=self.explainer.response(response),
        )

    def _support(self) -> str:
        s = self.f.support
        if s.ended_at is not None:
            return translate("side", "Support ended {time}").format(time=self.reader.time(s.ended_at))
        if off := off_mask_word(self.f, self.reader.zone):
            return off[:1].upper() + off[1:]
        return self._settings()

    def _settings(self) -> str:
        s = self.f.support
        text = support_now(s.mode, s.ipap_cmH2O, s.epap_cmH2O, s.fio2, s.o2_flow_L_per_min)
        if s.fio2 is None and s.o2_flow_L_per_min is not None:
            text += translate("side", ", FiO2 not known")
        return text or translate("side", "No support recorded")

    def _mask_time(self) -> Iterator[str]:
        s = self.f.support
        if off_mask_word(self.f, self.reader.zone):
            yield translate("side", "before it came off: {settings}").format(settings=self._settings())
        elif s.pressure_support_cmH2O is not None and s.ipap_cmH2O is not None:
            yield translate("side", "pressure support {ps} cmH2O").format(ps=trimmed(s.pressure_support_cmH2O))
        if s.hours_on_mask is not None:
            text = translate("side", "{hours} on the mask").format(hours=hours(s.hours_on_mask))
            if s.hours_on_mask_last_24h is not None and s.hours_on_mask > s.hours_on_mask_last_24h + 0.05:
                text += translate("side", ", {hours} in the last 24 h").format(hours=hours(s.hours_on_mask_last_24h))
            yield text
        if silence := presumed_word(s, self.reader.zone) or silent_word(s, self.reader.zone):
            yield silence

    # flags

    def _flags(self) -> Iterator[Fact]:
        for flag in open_flags(self.f):
            under = [
                g for g in self.f.flags if g.group == flag.group and g is not flag and g.state in ("raised", "seen")
            ]
            folded = [
                f"{marker_name(g.marker, self.reader)} ({tier_word(Tier(g.tier))}). {self._evidence(g)} [{g.sure}]"
                for g in under
            ]
            word = translate("side", "{count} more of this kind").format(count=len(under))
            lines = [self._evidence(flag), self._source(flag)]
            lines += word_lines(flag, self.reader)
            yield Fact(
                self.theme,
                f"{marker_name(flag.marker, self.reader)}",
                [x for x in lines if x],
                sign=Sign(self.theme, Tier(flag.tier), quiet=flag.state == "seen"),
                payload=flag,
                explanation=self._with_others(self.explainer.flag(flag), under),
                folded=folded,
                fold_word=word,
            )

    def _earlier(self) -> Iterator[Fact]:
        fact = history_fact(self.theme, self.f, self.reader)
        if fact is not None:
            yield fact

    def _with_others(self, explanation: Explanation, under: Sequence[FlagFigure]) -> Explanation:
        """The strongest flag of a kind explains those that stand under it too."""
        others = (f"{marker_name(g.marker, self.reader)}. {self._evidence(g)} {self._source(g)}" for g in under)
        return replace(explanation, notes=(*explanation.notes, *others))

    def _evidence(self, flag: FlagFigure) -> str:
        told = [sentence(e, self.reader) for e in flag.evidence]
        return " ".join(part for part in (*told, with_gaps(flag, self.reader)) if part)

    def _source(self, flag: FlagFigure) -> str:
        return f"{opened(tier_word(Tier(flag.tier)))}. {flag.source} ({certainty_words(flag)})"

    # due, levers

    def _due(self) -> Iterator[Fact]:
        items = [d for d in self.f.due if d.state in OPEN_DUE]
        for d in sorted(items, key=lambda d: d.due_until):
            name = due_name(d.what, self.reader)
            if d.state == "overdue":
                late = minutes((self.f.as_of - d.due_until) / MINUTE)
                title = translate("side", "{what}: overdue {late}").format(what=name, late=late)
            elif d.state == "awaiting result":
                title = translate("side", "{what}: awaiting result").format(what=name)
            else:
                title = translate("side", "{what} by {time}").format(what=name, time=self.reader.time(d.due_until))
            yield Fact(
                self.theme,
                title,
                (sentence(d.because, self.reader),),
                payload=d,
                explanation=self.explainer.due(d),
                quiet=d.state == "open",
            )

    def _levers(self) -> Iterator[Fact]:
        for lever in (x for x in self.f.levers if asks(x)):
            lines, name = lever_reasons(lever, self.reader), lever_name(lever.key, self.reader)
            title = name if lever.can_act else f"{name}: {lever_standing(lever, self.reader)}"
            yield Fact(self.theme, title, lines, explanation=self.explainer.lever(lever), quiet=not lever.can_act)
        idle = [x for x in self.f.levers if not asks(x)]
        if idle:
            folded = [
                f"{lever_name(x.key, self.reader)}: {lever_standing(x, self.reader)}. "
                f"{' '.join(lever_sentence(m, self.reader) for m in x.why)}"
                for x in idle
            ]
            word = translate("side", "Enter tells why")
            yield Fact(
                self.theme,
                translate("side", "{count} others: no need seen, not known or no effect").format(count=len(idle)),
                folded=folded,
                fold_word=word,
                quiet=True,
                explanation=self.explainer.idle_levers(idle),
            )

    # scores

    def _scores(self) -> Iterator[Fact]:
        for key, score in self.f.scores.items():
            if score.enabled:
                full = score_in(self.f, key)
                value = score_value(key, full, self.reader)
                is_class = key in CLASSES
                yield Fact(
                    self.theme,
                    translate("side", SCORE_NAMES.get(key, key)),
                    tuple(self._score_lines(score, is_class=is_class)),
                    explanation=self.explainer.score(key, full, self.f.as_of),
                    quiet=True,
                    value=value,
                    value_below=is_class or len(value) > LONG_VALUE,
                )

    def _score_lines(self, score: ScoreFigure, *, is_class: bool) -> Iterator[str]:
        if score.missing:
            names = ", ".join(input_name(m, self.reader) for m in score.missing)
            yield translate("side", "missing: {names}").format(names=names)
            yield from why_missing(score, self.reader)
        caveat = score.caveat
        if score.population == "outside" and not (caveat is not None and caveat.key.startswith("population.")):
            yield translate("side", "outside its population")
        if score.at is not None:
            yield f"{self.reader.time(score.at)}, {since(score.at, self.f.as_of)}"
        said = [m for m in score.reasons.values() if not (score.missing and m.key == "score.inputs_missing")]
        if caveat is not None and not is_class and caveat not in said:  # of a class the caveat is the value
            said.append(caveat)
        yield from (opened(sentence(m, self.reader)) for m in said)
