"""Flags that no longer ask for anything, folded under the open ones: settled, ended, taken back. None vanishes."""

from __future__ import annotations

from collections.abc import Iterator

from app.explain.explanation import Explanation
from app.explain.fact import Fact
from app.look.theme import Theme, Tier, tier_word
from app.telling.certainty import certainty_words
from app.telling.finding_names import marker_name
from app.telling.phrases import translate
from app.words import Reader, sentence
from core.judgement.shapes import EpisodeFigures, FlagFigure


def closed_flags(figures: EpisodeFigures) -> list[FlagFigure]:
    """Settled, ended and undone flags, the newest first."""
    found = [f for f in figures.flags if f.state in ("settled", "no longer met")]
    return sorted(found, key=lambda f: (f.state != "settled", -(f.ended_at or f.since), f.marker))


def history_fact(theme: Theme, figures: EpisodeFigures, reader: Reader) -> Fact | None:
    """One quiet line that unfolds; None where no flag was ever closed."""
    closed = closed_flags(figures)
    if not closed:
        return None
    title = translate("flag history", "{count} earlier flags").format(count=len(closed))
    if len(closed) == 1:
        title = translate("flag history", "1 earlier flag")
    lines = tuple(f"{line_of(f, reader)} {_evidence(f, reader)}".rstrip() for f in closed)
    kinds = ", ".join(f"{n} {word}" for word, n in _kinds(closed))
    sources = (f"{marker_name(f.marker, reader)}: {f.source} ({certainty_words(f)})" for f in closed)
    told = (*lines, *dict.fromkeys(sources))
    return Fact(theme, title, (kinds,), folded=lines, fold_word=translate("flag history", "Enter tells each"),
                explanation=Explanation(title, told), quiet=True)  # fmt: skip


def _kinds(closed: list[FlagFigure]) -> Iterator[tuple[str, int]]:
    settled = sum(f.state == "settled" for f in closed)
    undone = sum(f.state != "settled" and f.undone_by_correction for f in closed)
    for word, count in (
        (translate("flag history", "settled"), settled),
        (translate("flag history", "no longer met"), len(closed) - settled - undone),
        (translate("flag history", "taken back"), undone),
    ):
        if count:
            yield word, count


def line_of(flag: FlagFigure, reader: Reader) -> str:
    """What became of a flag, in order of time.

    `pH below 7.25 (concern), from 02:28. Seen by CD 02:40. Settled by EF 03:10: registrar came.`
    """
    name = f"{marker_name(flag.marker, reader)} ({tier_word(Tier(flag.tier))})"
    told = [translate("flag history", "{name}, from {time}.").format(name=name, time=reader.time(flag.since))]
    told += word_lines(flag, reader)
    if flag.undone_by_correction and flag.ended_at is not None:
        text = translate(
            "flag history", "Taken back {time}: what was logged later or corrected no longer bears it out."
        )
        told.append(text.format(time=reader.time(flag.ended_at)))
    elif flag.ended_at is not None:
        told.append(translate("flag history", "No longer met {time}.").format(time=reader.time(flag.ended_at)))
    elif flag.state == "settled":
        told.append(translate("flag history", "Still met."))
    return " ".join(told)


def word_lines(flag: FlagFigure, reader: Reader) -> list[str]:
    """What people said of a flag: who has seen it, who has settled it and why, each with its time."""
    told = []
    if flag.seen_by and flag.seen_at is not None:
        text = translate("flag history", "Seen by {who} {time}.")
        told.append(text.format(who=flag.seen_by, time=reader.time(flag.seen_at)))
    if flag.settled_by and flag.settled_at is not None:
        text = translate("flag history", "Settled by {who} {time}: {why}.")
        why = (flag.settled_why or "").rstrip(". ")
        told.append(text.format(who=flag.settled_by, time=reader.time(flag.settled_at), why=why))
    return told


def _evidence(flag: FlagFigure, reader: Reader) -> str:
    return " ".join(sentence(m, reader) for m in flag.evidence)
