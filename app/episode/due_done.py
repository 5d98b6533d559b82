"""What was due and is done, folded under what is still due: when, and by which entry or whose word."""

from __future__ import annotations

from app.explain.explanation import Explanation
from app.explain.fact import Fact
from app.look.theme import Theme
from app.telling.finding_names import due_name
from app.telling.phrases import translate
from app.words import Reader, sentence
from core.judgement.shapes import DueFigure, EpisodeFigures

_ENTRY_DIGITS = 8
_UUID_LENGTH = 36


def done_fact(theme: Theme, figures: EpisodeFigures, reader: Reader) -> Fact | None:
    """One quiet line that unfolds; None where nothing was done in the last 12 h."""
    done = sorted((d for d in figures.due if d.state == "done"), key=lambda d: -(d.done_at or 0))
    if not done:
        return None
    title = translate("due done", "{count} done in the last 12 h").format(count=len(done))
    lines = tuple(line_of(d, reader) for d in done)
    return Fact(theme, title, folded=lines, fold_word=translate("due done", "Enter tells each"),
                explanation=Explanation(title, lines), quiet=True)  # fmt: skip


def line_of(due: DueFigure, reader: Reader) -> str:
    """`Blood gas: done 21:54 (entry 3fa2b1c4). After the start at 20:10.`"""
    name = due_name(due.what, reader)
    when = reader.time(due.done_at) if due.done_at is not None else ""
    by = due.done_by or ""
    if len(by) == _UUID_LENGTH and by.count("-") == 4:
        by = translate("due done", "entry {id}").format(id=by[:_ENTRY_DIGITS])
    said = translate("due done", "{what}: done {time}").format(what=name, time=when)
    return f"{said}{f' ({by})' if by else ''}. {sentence(due.because, reader)}"
