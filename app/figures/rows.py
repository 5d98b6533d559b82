"""One computed figure in words: name, value with unit, how old, its doubt, and why where it has no value.

The window's list of figures, its explanations and the plain text are all made from these rows.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass, replace

from app.figures.values import input_name, input_text, value_text
from app.telling.taken import Span
from app.words import Reader, sentence
from core.figures.catalogue import CATALOGUE
from core.judgement.derived import DerivedFigure, FigureInput
from core.judgement.shapes import GasFigure
from core.record.instant import Instant
from core.record.message import Message

OF_A_GAS = frozenset({"ph", "paco2", "pao2", "pf", "hco3"})
"""Inputs that come from a blood gas, and share its doubt."""


@dataclass(frozen=True, slots=True)
class RowInput:
    """What a figure was made from, in words."""

    name: str
    value: str
    at: Instant | None = None
    median_of: Span | None = None


@dataclass(frozen=True, slots=True)
class FigureRow:
    """One figure. `value` is empty where there is none; `why` says why then.

    `key` is its line in the catalogue. `doubt` is of this value; `notes` go with the figure always. A `wide` value
    is a sentence. `lines` are reasoning that only the explanation shows. `median_of`: the span of the device's
    samples whose median it is, or is made from.
    """

    key: str
    name: str
    value: str = ""
    at: Instant | None = None
    doubt: str = ""
    notes: tuple[str, ...] = ()
    why: str = ""
    inputs: tuple[RowInput, ...] = ()
    lines: tuple[str, ...] = ()
    wide: bool = False
    median_of: Span | None = None

    @property
    def is_known(self) -> bool:
        """Whether it has a value."""
        return bool(self.value)


@dataclass(frozen=True, slots=True)
class FigureGroup:
    """Rows that belong together. `summary` is the most telling one in a few words; it may be empty.

    `note` is true of all of them: a list says it once.
    """

    key: str
    title: str
    rows: tuple[FigureRow, ...]
    summary: str = ""
    note: str = ""

    @property
    def known(self) -> tuple[FigureRow, ...]:
        """Rows with a value."""
        return tuple(r for r in self.rows if r.is_known)

    @property
    def without_value(self) -> tuple[FigureRow, ...]:
        """Rows that say why they have none."""
        return tuple(r for r in self.rows if not r.is_known)


@dataclass(frozen=True, slots=True)
class RowMaker:
    """Makes rows for one reader; `doubted` are the gases that carry a doubt, with its words.

    `assumed` are gases of which nobody said what was sampled: too common to shout, so only the reading says it.
    """

    reader: Reader
    doubted: Mapping[Instant, str]
    assumed: frozenset[Instant] = frozenset()

    def tr(self, text: str) -> str:
        """A phrase in the reader's language."""
        return self.reader.translate(text)

    def name(self, key: str) -> str:
        """The catalogue's name of a figure."""
        return self.tr(CATALOGUE[key].name)

    def say(self, message: Message | None) -> str:
        """A message as a sentence of its own: large first letter."""
        return "" if message is None else _large(sentence(message, self.reader))

    def of(self, figure: DerivedFigure, name: str = "", *, notes: Iterable[str] = ()) -> FigureRow:
        """The row of a derived figure."""
        known = figure.value is not None
        why = "" if known else self.say(figure.reason) or self.tr("Not known")
        return FigureRow(
            figure.key,
            name or self.name(figure.key),
            "" if figure.value is None else value_text(figure.key, figure.value, self.reader),
            figure.at,
            self._doubt(figure) if known else "",
            (*notes, *(self.say(m) for m in figure.caveats)),
            why,
            self.inputs(figure.inputs),
            self._assumption(figure),
            median_of=_span(figure),
        )

    def inputs(self, inputs: Mapping[str, FigureInput]) -> tuple[RowInput, ...]:
        """Inputs in words."""
        return tuple(
            RowInput(
                input_name(key, self.reader), input_text(key, given.value, self.reader), given.at, given.median_of
            )
            for key, given in inputs.items()
        )

    def _doubt(self, figure: DerivedFigure) -> str:
        found = [self.say(figure.doubt)] if figure.doubt is not None else []
        found += [self.doubted[at] for at in _gases(figure) if at in self.doubted]
        return ". ".join(found)

    def _assumption(self, figure: DerivedFigure) -> tuple[str, ...]:
        assumed = any(at in self.assumed for at in _gases(figure))
        return (self.say(Message("gas.site_assumed")),) if assumed else ()


def doubts_of(gases: Iterable[GasFigure], reader: Reader) -> dict[Instant, str]:
    """The gases that carry a doubt: it travels with every figure made from them."""
    words = {
        "inconsistent": reader.translate("Doubtful: pH, PCO2 and bicarbonate of this gas do not agree"),
        "doubt": reader.translate("Doubtful: this gas was marked doubtful"),
        "disputed": reader.translate("Disputed: two corrections of this gas differ"),
    }
    told: dict[Instant, str] = {}
    for gas in gases:
        marks = {
            "inconsistent": gas.consistent is False,
            "doubt": gas.doubt,
            "disputed": gas.disputed,
        }
        found = [words[key] for key, holds in marks.items() if holds]
        if found:
            told[gas.at] = ". ".join(found)
    return told


def _gases(figure: DerivedFigure) -> tuple[Instant, ...]:
    """The moments of the gases that a figure was made from."""
    return tuple(dict.fromkeys(i.at for key, i in figure.inputs.items() if key in OF_A_GAS and i.at is not None))


def _span(figure: DerivedFigure) -> Span | None:
    """The samples whose median a figure of their last moment is, or is made from."""
    spans = (i.median_of for i in figure.inputs.values() if i.median_of is not None)
    return next((s for s in spans if s[1] == figure.at), None)


def with_lines(row: FigureRow, lines: Iterable[str]) -> FigureRow:
    """The row with its reasoning, which the explanation shows."""
    return replace(row, lines=tuple(line for line in lines if line))


def _large(text: str) -> str:
    first = text.partition(" ")[0]
    return text if first.startswith("pH") else text[:1].upper() + text[1:]
