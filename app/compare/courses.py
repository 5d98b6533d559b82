"""Episodes by hours since the start of support: what is laid over each other. Draws what figures say."""

from __future__ import annotations

from collections import Counter
from collections.abc import Collection, Iterator, Mapping, Sequence
from dataclasses import dataclass

import numpy as np

from app.episode.traces import Shown, shown_as
from app.look.formats import fixed
from app.operations.figures import EpisodeAnswer
from app.telling.phrases import computed_name, translate
from app.ward.lane_words import OnWard, indication_word
from core.figures.sf_course import sf_course
from core.judgement.policy import Policy, shipped_policy
from core.judgement.shapes import EpisodeFigures
from core.record.instant import HOUR, Instant
from core.record.labels import alike

ROWS = ("ph", "paco2", "pf", "sf", "rr", "pressure_support")
LEAST, MOST = 2, 8


@dataclass(frozen=True, slots=True, eq=False)
class Line:
    """One episode in one row: hours since start and values, shape (n,); `steps`: holds until the next."""

    number: int
    hours: np.ndarray
    values: np.ndarray
    steps: bool = False


@dataclass(frozen=True, slots=True)
class Row:
    """One quantity for all episodes, with the range that holds every value."""

    key: str
    title: str
    unit: str
    decimals: int
    """Of a value that is read off."""
    low: float
    high: float
    lines: tuple[Line, ...]

    @property
    def least_decimals(self) -> int:
        """Of its axis: a pH has two, as a laboratory writes it."""
        return 2 if self.key == "ph" else 0


@dataclass(frozen=True, slots=True)
class Comparison:
    """Rows over one axis of hours. `names` by number, counted from 1."""

    rows: tuple[Row, ...]
    names: Mapping[int, str]
    last_hour: float
    left_out: tuple[str, ...] = ()
    """Labels of episodes without a known start: they cannot be laid on this axis."""


def compare(
    chosen: Sequence[OnWard], answers: Mapping[str, EpisodeAnswer], gas_unit: str, policy: Policy | None = None
) -> Comparison:
    """Lay episodes over each other. `policy` says up to which SpO2 an S/F means something (None: the shipped one)."""
    known = [e for e in chosen if e.figures.support.since is not None][:MOST]
    shared = Counter(alike(e.figures.label) for e in chosen)
    apart = {e.figures.episode for e in chosen if shared[alike(e.figures.label)] > 1}
    left_out = tuple(_with_key(e.figures.label, e.figures, apart) for e in chosen if e.figures.support.since is None)
    names = {n: _with_key(episode_name(e.figures), e.figures, apart) for n, e in enumerate(known, 1)}
    rules = policy or shipped_policy()
    rows = tuple(_row(key, known, answers, gas_unit, rules) for key in ROWS)
    last = max((float(line.hours[-1]) for row in rows for line in row.lines if line.hours.size), default=1.0)
    return Comparison(rows, names, max(last, 1.0), left_out)


def episode_name(f: EpisodeFigures) -> str:
    """Label and indication."""
    indication = f.profile.get("indication")
    return f"{f.label}, {indication_word(str(indication))}" if indication else f.label


def _with_key(name: str, f: EpisodeFigures, apart: Collection[str]) -> str:
    """A name, with the key of an episode whose label another of those compared bears too."""
    return f"{name} ({f.episode})" if f.episode in apart else name


def _row(
    key: str, chosen: Sequence[OnWard], answers: Mapping[str, EpisodeAnswer], gas_unit: str, policy: Policy
) -> Row:
    shown = Shown("", 0, 1.0) if key == "sf" else shown_as(key, gas_unit)
    lines = []
    for number, one in enumerate(chosen, 1):
        t, v = _values(key, one, answers[one.figures.episode], policy)
        start = one.figures.support.since or 0
        if t.size:
            lines.append(Line(number, (t - start) / HOUR, v * shown.factor, key == "pressure_support"))
    values = np.concatenate([line.values for line in lines]) if lines else np.empty(0)
    values = values[np.isfinite(values)]
    low, high = (float(values.min()), float(values.max())) if values.size else (0.0, 1.0)
    air = max((high - low) * 0.1, 10**-shown.decimals)
    title = {"ph": "pH", "paco2": "PaCO2", "sf": "S/F", "rr": translate("compare", "Respiratory rate")}.get(
        key
    ) or computed_name(key)
    return Row(key, title, shown.unit, shown.decimals, low - air, high + air, tuple(lines))


def _values(key: str, one: OnWard, answer: EpisodeAnswer, policy: Policy) -> tuple[np.ndarray, np.ndarray]:
    if key == "sf":
        return sf_course(answer.record, one.course.until, policy)
    if key == "pressure_support":
        stretches = one.course.stretches
        t = [s.start for s in stretches] + ([stretches[-1].end] if stretches else [])
        v = [s.settings.pressure_support for s in stretches] + (
            [stretches[-1].settings.pressure_support] if stretches else []
        )
        return np.array(t, np.int64), np.array(v, np.float64)
    if key == "rr":
        return _rate(answer, one.course.until)
    field = {"ph": "ph", "paco2": "paco2_mmHg", "pf": "pf_mmHg"}[key]
    gases = [g for g in one.figures.gases if g.site != "venous" and getattr(g, field) is not None]
    return np.array([g.at for g in gases], np.int64), np.array([getattr(g, field) for g in gases], np.float64)


def _rate(answer: EpisodeAnswer, until: Instant) -> tuple[np.ndarray, np.ndarray]:
    """The counted rate; where nobody counted, the device's."""
    for channel in ("rr", "rr_total"):
        series = answer.record.number(channel).until(until)
        series = series.spots if channel == "rr" else series
        if len(series):
            return series.t, series.v
    return np.empty(0, np.int64), np.empty(0)


def words_of(comparison: Comparison) -> Iterator[str]:
    """The comparison in words, for screen readers and for copying."""
    for row in comparison.rows:
        for line in row.lines:
            finite = np.flatnonzero(np.isfinite(line.values))
            if finite.size:
                first, last = int(finite[0]), int(finite[-1])
                yield translate("compare", "{row}, {name}: {first} at {h1} h, {last} at {h2} h").format(
                    row=row.title,
                    name=comparison.names[line.number],
                    first=fixed(line.values[first], row.decimals),
                    h1=fixed(line.hours[first], 1),
                    last=fixed(line.values[last], row.decimals),
                    h2=fixed(line.hours[last], 1),
                )
