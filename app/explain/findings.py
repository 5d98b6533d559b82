"""Where a figure, marker or verdict comes from: formula, inputs with times, source, how sure. One key opens it.

The texts name the policy's own limits with their sources, so that a changed policy explains itself.
"""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

from PySide6.QtCore import QCoreApplication

from app.explain.explanation import Explanation, whole
from app.explain.figures import explain_score
from app.figures.rows import doubts_of
from app.look.formats import clock, fixed, fraction, gas_pressure, minutes, trimmed, wall
from app.look.theme import Tier, tier_word, verdict_of
from app.policy.words import limits_words, population_words
from app.telling.finding_names import due_name, lever_name, marker_name
from app.telling.flag_spans import with_gaps
from app.telling.headline import lost_gain, verdict_with_loss
from app.telling.lever_words import lever_sentence, lever_standing, lever_why, without_decides
from app.telling.phrases import gas_name, gas_words
from app.words import Reader, sentence
from app.words.differences import changes_of
from core.judgement.gas_reading import read
from core.judgement.policy import Policy
from core.judgement.policy_sections import Limit
from core.judgement.response_shapes import JudgedGas, ResponseFigure
from core.judgement.shapes import DueFigure, FlagFigure, GasFigure, LeverFigure, ScoreFigure
from core.record.instant import Instant

translate = QCoreApplication.translate


@dataclass(frozen=True, slots=True)
class Explainer:
    """Explains figures by one policy, for one reader."""

    policy: Policy
    reader: Reader

    def flag(self, flag: FlagFigure) -> Explanation:
        """A flag: its evidence, the marker's limits, since when, who has seen it."""
        told = (*(sentence(e, self.reader) for e in flag.evidence), with_gaps(flag, self.reader))
        evidence = tuple(part for part in told if part)
        notes = (
            translate("explain", "Strength: {tier}.").format(tier=tier_word(Tier(flag.tier))),
            translate("explain", "Met since {time}.").format(time=wall(flag.since, self.reader.zone)),
            *self._words_on(flag),
            self._policy_of(flag),
        )
        name = marker_name(flag.marker, self.reader)
        return Explanation(name, (*evidence, *self._marker(flag)), (), notes, flag.source, flag.sure,
                           detail_sure=flag.detail_sure)  # fmt: skip

    def _policy_of(self, flag: FlagFigure) -> str:
        """The policy that raised a flag, by its name where it is the one in force."""
        short = flag.policy[:8]
        if flag.policy != self.policy.hash:
            return translate("explain", "By another policy than the one in force ({hash}).").format(hash=short)
        text = translate("explain", "By the policy {name}, version {version} ({hash}).")
        return text.format(name=self.policy.name, version=self.policy.version, hash=short)

    def _marker(self, flag: FlagFigure) -> Iterator[str]:
        """The marker's own numbers, and whom it applies to."""
        rule = self.policy.markers.get(flag.marker)
        if rule is None:
            return
        if told := limits_words(flag.marker, rule):
            yield translate("explain", "The marker's limits in this policy: {limits}.").format(limits=told)
        yield translate("explain", "It applies to: {who}.").format(who=population_words(rule.population))

    def _words_on(self, flag: FlagFigure) -> Iterator[str]:
        """What was said of the flag, and what weakens it."""
        zone = self.reader.zone
        if flag.outside_population:
            yield translate("explain", "This patient is outside the population it was validated in.")
        if flag.seen_by and flag.seen_at is not None:
            text = translate("explain", "Seen by {who}, {time}.")
            yield text.format(who=flag.seen_by, time=wall(flag.seen_at, zone))
        if flag.settled_by and flag.settled_at is not None:
            text = translate("explain", "Settled by {who}, {time}: {why}")
            yield text.format(who=flag.settled_by, time=wall(flag.settled_at, zone), why=flag.settled_why or "")

    def response(self, response: ResponseFigure) -> Explanation:
        """A verdict: the baseline, the gas, what was compared against which noise."""
        zone, noise = self.reader.zone, self.policy.noise
        inputs = []
        if response.baseline_at is not None:
            values = self._values(response.baseline_ph, response.baseline_paco2_mmHg)
            inputs.append((translate("explain", "Baseline gas"), values, clock(response.baseline_at, zone)))
        for g in response.gases:
            inputs.append((translate("explain", "Gas judged"), self._judged(g), clock(g.at, zone)))
        messages = (*(m for g in response.gases for m in g.why), *response.why)
        why = tuple(dict.fromkeys(sentence(m, self.reader) for m in messages))
        verdict = verdict_with_loss(verdict_of(response.headline), lost=lost_gain(response))
        title = translate("explain", "Verdict: {verdict}").format(verdict=verdict)
        return Explanation(title, self._response_rules(), tuple(inputs), why, noise.ph.source, noise.ph.sure)

    def _judged(self, gas: JudgedGas) -> str:
        told = [minutes(gas.minutes), *changes_of(gas, self.reader, of_pf=False)]
        if gas.verdict is not None:
            told.append(verdict_with_loss(verdict_of(gas.verdict), lost=gas.since_start.gain_lost))
        return ", ".join(told)

    def _response_rules(self) -> tuple[str, str]:
        """How a verdict is come by, with the policy's own numbers."""
        window, noise = self.policy.response, self.policy.noise
        rule = translate(
            "explain",
            "A gas {start} to {end} minutes after the change judges it against the last gas before it.",
        )
        paco2 = gas_pressure(noise.paco2_mmHg.value, self.reader.gas_unit)
        limits = (
            self._limit("pH", noise.ph, fixed(noise.ph.value, 3)),
            self._limit("PaCO2", noise.paco2_mmHg, paco2),
            self._limit("PaCO2", noise.paco2_fraction, fraction(noise.paco2_fraction.value)),
            self._limit("P/F", noise.pao2_fraction, fraction(noise.pao2_fraction.value)),
        )
        told = translate("explain", "Beyond measurement error is: {limits}.").format(limits="; ".join(limits))
        span = {"start": trimmed(window.window_from_min.value), "end": trimmed(window.window_to_min.value)}
        return rule.format(**span), told

    def gas(self, gas: GasFigure) -> Explanation:
        """A gas: what it says, what was reported, what was computed from it and how, why something is absent."""
        state, reading = self.policy.state, read(gas)
        plain = reading.classification or reading.classification_reason or gas.rule_out
        rules = (
            translate("explain", "Severe: pH below {severe}. Acidotic: pH below {acidotic}.").format(
                severe=fixed(state.severe_below_ph.value, 2), acidotic=fixed(state.acidotic_below_ph.value, 2)
            ),
            "P/F = PaO2 / FiO2",
            "HCO3 = 0.0307 x PCO2 x 10^(pH - 6.1)",
            "SBE = HCO3 - 24.8 + 16.2 x (pH - 7.40)",
        )
        told = (*((plain,) if plain is not None else ()), *reading.steps)
        when = clock(gas.at, self.reader.zone)
        notes = [f"{_field_name(key)}: {sentence(m, self.reader)}" for key, m in gas.reasons.items()]
        notes += [sentence(m, self.reader) for m in (*gas.warnings, *gas.explanations)]
        return Explanation(
            f"{when} {gas_name(gas)}: {gas_words(gas, self.reader.gas_unit)}",
            (*(whole(sentence(m, self.reader)) for m in told), *rules),
            tuple(self._gas_inputs(gas, when)),
            tuple(notes),
            "Henderson-Hasselbalch; CLSI C46",
            "confirmed",
            doubt=doubts_of((gas,), self.reader).get(gas.at, ""),
        )

    def score(self, key: str, score: ScoreFigure, now: Instant | None = None) -> Explanation:
        """A score: each input with its value, its time and the points it gave; what is missing; for whom."""
        return explain_score(key, score, self.reader, now)

    def due(self, due: DueFigure) -> Explanation:
        """A due item: why, from when, until when."""
        zone = self.reader.zone
        rule = self.policy.due.get(due.what)
        span = translate("explain", "From {start} to {end}.").format(
            start=wall(due.due_from, zone), end=wall(due.due_until, zone)
        )
        return Explanation(
            due_name(due.what, self.reader),
            (sentence(due.because, self.reader), span),
            (),
            (),
            rule.source if rule else "",
            rule.sure if rule else "",
        )

    def lever(self, lever: LeverFigure) -> Explanation:
        """A lever: why it could act or not, and what limits it."""
        present = (lever.present,) if lever.present is not None else ()
        texts = (*lever_why(lever), *present, *without_decides(lever.limits))
        note = translate("explain", "A qualified person decides.")
        return Explanation(
            lever_name(lever.key, self.reader), tuple(lever_sentence(m, self.reader) for m in texts), (), (note,)
        )

    def idle_levers(self, levers: Sequence[LeverFigure]) -> Explanation:
        """Levers that could not act now, each with its reason: no need seen, not known, or no effect."""
        told = []
        for lever in levers:
            why = " ".join(lever_sentence(m, self.reader) for m in lever_why(lever))
            told.append(f"{lever_name(lever.key, self.reader)}: {lever_standing(lever, self.reader)}. {why}")
        note = translate("explain", "A qualified person decides.")
        title = translate("explain", "Levers with no need seen, not known or without effect")
        return Explanation(title, tuple(told), (), (note,))

    def _values(self, ph: float | None, paco2: float | None) -> str:
        parts = [f"pH {fixed(ph, 2)}"] if ph is not None else []
        if paco2 is not None:
            parts.append(f"PaCO2 {gas_pressure(paco2, self.reader.gas_unit)}")
        return ", ".join(parts)

    def _limit(self, name: str, limit: Limit, text: str) -> str:
        return f"{name} {text} ({limit.source}; {limit.sure})"

    def _gas_inputs(self, gas: GasFigure, when: str) -> Iterator[tuple[str, str, str]]:
        unit = self.reader.gas_unit
        rows = (
            ("pH", gas.ph_text or (fixed(gas.ph, 2) if gas.ph is not None else None)),
            (
                "PaCO2",
                gas.paco2_text or (gas_pressure(gas.paco2_mmHg, unit) if gas.paco2_mmHg is not None else None),
            ),
            ("PaO2", gas_pressure(gas.pao2_mmHg, unit) if gas.pao2_mmHg is not None else None),
            ("FiO2", f"{fraction(gas.fio2)} ({gas.fio2_from})" if gas.fio2 is not None else None),
            ("P/F", gas_pressure(gas.pf_mmHg, unit) if gas.pf_mmHg is not None else None),
            (translate("explain", "HCO3, reported"), _mmol(gas.hco3_mmol_L)),
            (translate("explain", "HCO3, calculated"), _mmol(gas.hco3_calculated_mmol_L)),
            ("SBE", _mmol(gas.sbe_mmol_L)),
            ("A-a", gas_pressure(gas.aa_gradient_mmHg, unit) if gas.aa_gradient_mmHg is not None else None),
            (translate("explain", "Lactate"), _mmol(gas.lactate_mmol_L)),
        )
        yield from ((name, value, when) for name, value in rows if value is not None)


def _field_name(field: str) -> str:
    """What a figure of a gas that has no value is called."""
    names = {
        "pf_mmHg": "P/F",
        "aa_gradient_mmHg": "A-a",
        "hco3_calculated_mmol_L": translate("explain", "HCO3, calculated"),
        "sbe_mmol_L": "SBE",
        "consistent": translate("explain", "Reported against calculated bicarbonate"),
        "state": translate("explain", "State"),
    }
    return names.get(field, field.replace("_", " "))


def _mmol(value: float | None) -> str | None:
    return None if value is None else f"{fixed(value, 1)} mmol/L"
