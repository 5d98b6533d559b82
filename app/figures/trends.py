"""Slopes per hour with their intervals, as rows."""

from __future__ import annotations

from collections.abc import Iterator

from app.figures.leak import leak_trend
from app.figures.rows import FigureRow, RowInput, RowMaker
from app.figures.values import input_name, slope_band, slope_text, value_text
from app.look import formats
from core.judgement.shapes import EpisodeFigures, RatioFigure


def trend_rows(f: EpisodeFigures, make: RowMaker) -> Iterator[FigureRow]:
    """P/F, S/F, ROX, leak, and each channel that is trended."""
    for key, ratio in (("pf", f.pf), ("sf", f.sf), ("rox", f.rox)):
        yield _row(key, make.name(key), ratio, make)
    yield leak_trend(f.leak, make)
    for key, ratio in f.trends.items():
        name = make.name("vt_per_kg") if key == "vte_per_kg" else input_name(key, make.reader)
        yield _row(key, name, ratio, make)


def _row(key: str, name: str, ratio: RatioFigure, make: RowMaker) -> FigureRow:
    slope, low, high = ratio.slope_per_h, ratio.slope_low, ratio.slope_high
    value = "" if slope is None else slope_text(key, slope, make.reader)
    why = ""
    if not value:
        newest = ratio.reasons.get("latest") if ratio.latest is None else None
        why = make.say(newest or ratio.reasons.get("slope_per_h")) or make.tr("Too few values")
    notes = []
    if value:
        notes.append(slope_band(key, low, high, make.reader) if low is not None and high is not None else "")
        notes.append(make.say(ratio.reasons.get("slope_low")))
    notes.append(make.say(ratio.caveat))
    at = ratio.at if value else None
    return FigureRow("slope", name, value, at, "", tuple(n for n in notes if n), why, _inputs(key, ratio, make))


def _inputs(key: str, ratio: RatioFigure, make: RowMaker) -> tuple[RowInput, ...]:
    made = []
    if ratio.latest is not None:
        made.append(RowInput(make.tr("Newest value"), _value(key, ratio.latest, make), ratio.at, ratio.median_of))
    if ratio.span_from is not None:
        points = make.tr("{count} points").format(count=ratio.n)
        made.append(RowInput(make.tr("Points since"), points, ratio.span_from))
    return tuple(made)


def _value(key: str, value: float, make: RowMaker) -> str:
    if key in ("pf", "sf", "rox"):
        return value_text(key, value, make.reader)
    if key == "vte_per_kg":
        return value_text("vt_per_kg", value, make.reader)
    return formats.quantity(key, value, make.reader.gas_unit)
