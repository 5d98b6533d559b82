"""Bed moves and equal beds: a label or a place is a timed entry, and two patients may have used one bed."""

from __future__ import annotations

from collections import Counter
from collections.abc import Mapping, Sequence
from dataclasses import dataclass
from itertools import pairwise
from typing import TYPE_CHECKING

from PySide6.QtCore import QCoreApplication

from app.look.formats import clock, wall
from core.record.episode import Episode
from core.record.instant import DAY, Instant
from core.record.labels import alike

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
    """What an episode is called where lines are logged: its label, and what tells it from another that shares it."""
    return told_apart(answers[key].figures, [a.figures for a in answers.values()], now, zone)


def labels_told_apart(answers: Mapping[str, EpisodeAnswer], now: Instant, zone: str) -> dict[str, str]:
    """What every episode is called, by its key: as `label_told_apart`."""
    ward = [a.figures for a in answers.values()]
    apart = what_tells_apart(ward, now, zone)
    return {f.episode: _with(f.label, apart.get(f.episode)) for f in ward}


def told_apart(figures: EpisodeFigures, ward: Sequence[EpisodeFigures], now: Instant, zone: str) -> str:
    """The label of an episode, and where others of the ward share it, what tells it from them."""
    return _with(figures.label, what_tells_apart(ward, now, zone).get(figures.episode))


def _with(label: str, apart: str | None) -> str:
    return label if apart is None else f"{label} ({apart})"


def what_tells_apart(ward: Sequence[EpisodeFigures], now: Instant, zone: str) -> dict[str, str]:
    """By episode that shares its label: since when it runs, its key where that is not recorded, and both where others
    of the label run since then as well."""
    labels = Counter(alike(f.label) for f in ward)
    shared = [f for f in ward if labels[alike(f.label)] > 1]
    since = {f.episode: _since_word(f, now, zone) for f in shared}
    times = Counter((alike(f.label), since[f.episode]) for f in shared)
    found = {}
    for f in shared:
        told = since[f.episode]
        alone = told and times[alike(f.label), told] == 1
        found[f.episode] = told if alone else f"{told}, {f.episode}" if told else f.episode
    return found


def _since_word(figures: EpisodeFigures, now: Instant, zone: str) -> str:
    since = figures.support.since
    if since is None:
        return ""
    told = clock(since, zone) if now - since < DAY else wall(since, zone)
    return translate("ward", "from {time}").format(time=told)


def moved_word(moves: Sequence[Move], zone: str) -> str:
    """The newest bed that an episode came from, for a narrow line; "" where it never moved."""
    beds = [m for m in moves if m.channel == "label"]
    if not beds:
        return ""
    return translate("ward", "from {before} {time}").format(before=beds[-1].before, time=clock(beds[-1].at, zone))
