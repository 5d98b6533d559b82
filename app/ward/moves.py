"""Bed moves and equal beds: a label or a place is a timed entry, and two patients may have used one bed."""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import TYPE_CHECKING

from PySide6.QtCore import QCoreApplication

from app.look.formats import clock, wall
from core.record.episode import Episode
from core.record.instant import DAY, Instant

if TYPE_CHECKING:
    from app.operations.figures import EpisodeAnswer
    from core.judgement.shapes import EpisodeFigures

translate = QCoreApplication.translate
CHANNELS = ("label", "location")


@dataclass(frozen=True, slots=True)
class Move:
    """A bed or a place that gave way to another at a moment."""

    at: Instant
    channel: str
    before: str
    after: str


def moves_of(record: Episode, until: Instant) -> tuple[Move, ...]:
    """The moves of an episode by time. A correction is no move: the record gives what stands."""
    found = []
    for channel in CHANNELS:
        words = record.text(channel).until(until)
        texts = list(zip(words.t.tolist(), words.v, strict=True))
        for (_, before), (at, after) in pairwise(texts):
            if before != after:
                found.append(Move(int(at), channel, before, after))
    return tuple(sorted(found, key=lambda m: m.at))


def move_sentence(move: Move, zone: str) -> str:
    """A move in words."""
    text = translate("ward", "{time} moved from {before} to {after}")
    return text.format(time=clock(move.at, zone), before=move.before, after=move.after)


def label_told_apart(answers: Mapping[str, EpisodeAnswer], key: str, now: Instant, zone: str) -> str:
    """What an episode is called where lines are logged: its label, and since when where another shares it."""
    figures = answers[key].figures
    if not any(a.figures.label == figures.label for k, a in answers.items() if k != key):
        return figures.label
    return told_apart(figures, now, zone)


def told_apart(figures: EpisodeFigures, now: Instant, zone: str) -> str:
    """The label of an episode that shares it with another, and since when it runs."""
    since = figures.support.since
    if since is None:
        return f"{figures.label} ({figures.episode})"
    told = clock(since, zone) if now - since < DAY else wall(since, zone)
    return translate("ward", "{label} (from {time})").format(label=figures.label, time=told)


def moved_word(moves: Sequence[Move], zone: str) -> str:
    """The newest bed that an episode came from, for a narrow line; "" where it never moved."""
    beds = [m for m in moves if m.channel == "label"]
    if not beds:
        return ""
    return translate("ward", "from {before} {time}").format(before=beds[-1].before, time=clock(beds[-1].at, zone))
