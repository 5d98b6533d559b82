"""What the withdrawal of a file took back, and what it left, in a few sentences for window and command line."""

from __future__ import annotations

from typing import TYPE_CHECKING

from app.telling.language import in_language as tr

if TYPE_CHECKING:
    from storage.intake.withdrawal import Withdrawn

_NAMED = 4


def withdrawn_words(made: Withdrawn) -> str:
    """The withdrawal in sentences: what is gone, what stays and why, what may have to be taken in again."""
    one, many = tr("1 entry"), tr("{count} entries")
    entries = one if made.entries == 1 else many.format(count=f"{made.entries:,}")
    one, many = tr("1 span"), tr("{count} spans")
    spans = one if made.sample_spans == 1 else many.format(count=f"{made.sample_spans:,}")
    if made.sample_spans:
        told = tr("{name}: {entries} and {spans} of device samples withdrawn.")
    else:
        told = tr("{name}: {entries} withdrawn.")
    parts = [told.format(name=made.name, entries=entries, spans=spans)]
    if made.kept:
        parts.append(tr("{count} that somebody has corrected since stay as corrected.").format(count=made.kept))
    if made.emptied:
        text = tr("Nothing stands any more of {episodes}: no screen shows what is empty.")
        parts.append(text.format(episodes=_named(made.emptied)))
    if made.relied_on:
        text = tr("Files taken in later held values of it, which were not taken twice: {files}. Take those in again "
                  "if these values should stand.")  # fmt: skip
        parts.append(text.format(files=_named(made.relied_on)))
    return " ".join(parts)


def _named(names: tuple[str, ...]) -> str:
    more = len(names) - _NAMED
    shown = ", ".join(names[:_NAMED])
    return shown + tr(" and {count} more").format(count=more) if more > 0 else shown
