"""Explanations of computed figures and scores: formula, inputs with times, source, how sure, for whom, doubts."""

from __future__ import annotations

from dataclasses import replace

from app.explain.explanation import Explanation, whole
from app.figures.groups import figure_groups
from app.figures.rows import FigureRow
from app.figures.values import input_name, input_text
from app.look.formats import opened, trimmed
from app.telling.taken import when_words
from app.words import Reader, sentence
from app.words.missing_inputs import why_missing
from core.figures.catalogue import figure
from core.figures.catalogue_entry import FigureEntry
from core.judgement.shapes import EpisodeFigures, ScoreFigure, ScoreInput
from core.record.instant import Instant

CLASSES = frozenset({"copd_failure"})
"""Scores whose inputs stand on axes: they give steps, not points."""
SCREEN_ONLY = frozenset({"course", "expected_co2"})
"""Interpolated and expected values stand on the screen, never in text that somebody pastes."""
_IN_MMHG = "Pressures enter the formula in mmHg; 1 kPa is 7.5 mmHg."


def explain_row(row: FigureRow, reader: Reader, now: Instant) -> Explanation:
    """How the figure of a row came about, or why it has no value."""
    entry = figure(row.key)
    notes = (*row.notes, *_of_entry(entry, reader), *_units(row, entry, reader))
    value = row.value or reader.translate("no value")
    return Explanation(
        title=f"{row.name}: {value}",
        rules=row.lines,
        inputs=tuple((i.name, i.value, when_words(i.at, i.median_of, None, reader)) for i in row.inputs),
        notes=tuple(dict.fromkeys(whole(n) for n in notes)),
        source=reader.translate(entry.source),
        sure=entry.certainty,
        when=opened(when_words(row.at, row.median_of, now, reader)),
        doubt=whole(row.doubt),
        reason=whole(row.why),
        formula=reader.translate(entry.formula),
        may_be_copied=row.key not in SCREEN_ONLY,
    )


def explanations_of(f: EpisodeFigures, reader: Reader) -> dict[tuple[str, str], Explanation]:
    """Every figure's explanation, by (group, name of the row)."""
    return {
        (group.key, row.name): explain_row(row, reader, f.as_of)
        for group in figure_groups(f, reader)
        for row in group.rows
    }


def score_in(f: EpisodeFigures, key: str) -> ScoreFigure:
    """A score of an episode with all its inputs; ROX keeps them beside its trend."""
    score = f.scores[key]
    if key != "rox" or score.inputs:
        return score
    return replace(score, inputs={k: ScoreInput(i.value, i.at, None, i.median_of) for k, i in f.rox.inputs.items()})


def explain_score(key: str, score: ScoreFigure, reader: Reader, now: Instant | None = None) -> Explanation:
    """A score with each input's value, time and points; bounds where inputs are missing; its population."""
    entry = figure(key)
    notes = [sentence(m, reader) for m in dict.fromkeys(score.reasons.values())]
    notes += why_missing(score, reader)
    if score.missing:
        notes.append(reader.translate("Missing inputs are taken at their best and at their worst, never as normal."))
    notes += _of_entry(entry, reader)
    return Explanation(
        title=f"{reader.translate(entry.name)}: {score_value(key, score, reader)}",
        inputs=tuple(_score_input(key, name, part, reader) for name, part in score.inputs.items()),
        notes=tuple(dict.fromkeys(whole(n) for n in notes)),
        source=reader.translate(entry.source),
        sure=entry.certainty,
        when=when_words(score.at, None, score.at if now is None else now, reader),
        formula=reader.translate(entry.formula),
        population=_population(score, reader),
    )


def score_value(key: str, score: ScoreFigure, reader: Reader) -> str:
    """A score's points, its bounds, or its class."""
    tr = reader.translate
    if key in CLASSES and score.caveat is not None:
        return sentence(score.caveat, reader)
    unit = "" if key == "rox" else " " + tr("points")
    if score.points is not None:
        return f"{trimmed(score.points)}{unit}"
    if score.lowest is not None and score.highest is not None:
        text = tr("between {low} and {high}")
        return text.format(low=trimmed(score.lowest), high=trimmed(score.highest)) + unit
    return tr("not known")


def _score_input(key: str, name: str, part: ScoreInput, reader: Reader) -> tuple[str, str, str]:
    tr = reader.translate
    value = tr("missing") if part.value is None else input_text(name, part.value, reader)
    if part.points is not None:
        word = "step {count} on its axis (0 is best)" if key in CLASSES else "{count} points"
        if key not in CLASSES and part.points == 1:
            word = "{count} point"
        value = f"{value}, {tr(word).format(count=trimmed(part.points))}"
    return input_name(name, reader), value, when_words(part.at, part.median_of, None, reader)


def _population(score: ScoreFigure, reader: Reader) -> str:
    if score.population is None:
        return ""
    tr = reader.translate
    if score.population != "outside":
        told = tr("This patient is inside the population it was made for.")
    else:
        told = tr("This patient is outside the population it was made for: shown, never a flag.")
    caveat = sentence(score.caveat, reader) if score.caveat is not None else ""
    return f"{told} {whole(caveat)}".strip()


def _of_entry(entry: FigureEntry, reader: Reader) -> list[str]:
    return [reader.translate(entry.doubt)] if entry.doubt else []


def _units(row: FigureRow, entry: FigureEntry, reader: Reader) -> list[str]:
    """Formulas are printed in mmHg: who reads kPa has to know."""
    has_pressure = entry.unit == "mmHg" or any("(" in i.value and "mmHg)" in i.value for i in row.inputs)
    return [reader.translate(_IN_MMHG)] if reader.gas_unit == "kPa" and has_pressure else []
