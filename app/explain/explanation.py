"""What an explanation holds: formula, inputs with times, source, how sure, for whom, doubts; and its plain text."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtCore import QCoreApplication

from app.telling.certainty import certainty_words

translate = QCoreApplication.translate


@dataclass(frozen=True, slots=True)
class Explanation:
    """`inputs` are (name, value, when); `rules` and `notes` whole sentences.

    `when` says of which moment the figure is and how old; `doubt` why this value is not to be relied on; `reason`
    why there is none; `population` for whom it was made and whether this patient belongs there.
    """

    title: str
    rules: tuple[str, ...] = ()
    inputs: tuple[tuple[str, str, str], ...] = ()
    notes: tuple[str, ...] = ()
    source: str = ""
    sure: str = ""
    when: str = ""
    doubt: str = ""
    reason: str = ""
    formula: str = ""
    population: str = ""
    detail_sure: str = ""
    """How sure durations and the like are, where the source does not give them."""
    may_be_copied: bool = True
    """False for what is expected and never measured: no text to paste is made of it."""

    def as_text(self) -> str:
        """All of it in plain words, to be copied."""
        parts = [self.title, self.when, self.reason, self.doubt]
        if self.formula:
            parts.append(translate("explain", "Formula: {formula}").format(formula=self.formula))
        parts += self.rules
        parts += ["  ".join(p for p in row if p) for row in self.inputs]
        if self.population:
            parts.append(self.population)
        parts += self.notes
        if self.source:
            parts.append(translate("explain", "Source: {source}").format(source=self.source))
        if self.sure:
            parts.append(translate("explain", "How sure: {sure}").format(sure=certainty_words(self)))
        return "\n".join(p for p in parts if p)


def whole(text: str) -> str:
    """A whole sentence: large first letter, full stop; a name like pH keeps its letters."""
    if not text:
        return ""
    large = text if text.startswith("pH") else text[:1].upper() + text[1:]
    return large if large[-1] in ".!?" else f"{large}."
