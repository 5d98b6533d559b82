"""The acid-base map of an episode: what is drawn, each gas in words with its class, and the same as a table."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from math import ceil, floor

from app.chart.shapes import MapBand, MapGas, MapLine, MapSpec, Scale
from app.look.formats import fixed, gas_pressure, opened, trimmed, wall
from app.telling.gas_doubt import doubt_word, rests_on_doubt, state_in_doubt
from app.telling.headline import gas_state_word, in_doubt, judged_sign, since_start_words, verdict_with_loss
from app.telling.phrases import gas_name, gas_words, state_of, translate, verdict_or_none
from app.telling.table import Table
from app.ward.lane_words import anchor_name
from app.words import Reader, sentence
from app.words.differences import changes_of
from app.words.short_forms import ph_as_reported
from core.figures.gas_path import PathGas, gas_path
from core.figures.map_lines import map_lines
from core.judgement.shapes import EpisodeFigures
from core.record.units import MMHG_PER_KPA

_PACO2, _PH = (30.0, 90.0), (7.10, 7.55)
"""What is always in view, in mmHg and pH; gases outside widen it."""


def map_spec(figures: EpisodeFigures, reader: Reader) -> MapSpec:
    """The map of an episode's gases in the reader's unit."""
    path = gas_path(figures)
    factor = 1.0 / MMHG_PER_KPA if reader.gas_unit == "kPa" else 1.0
    low, high = _range([p.gas.paco2_mmHg for p in path.gases], _PACO2, 10.0)
    ph_low, ph_high = _range([p.gas.ph for p in path.gases], _PH, 0.05)
    behind = map_lines(low, high)
    bands = {"acute": translate("map", "acute"), "chronic": translate("map", "chronic")}
    a, b, c, d = behind.normal
    return MapSpec(
        Scale(reader.gas_unit, low * factor, high * factor, 0), Scale("pH", ph_low, ph_high, 2),
        f"PaCO2 ({reader.gas_unit})", "pH",
        tuple(MapLine(x.paco2_mmHg * factor, x.ph, _iso_word(x.hco3_mmol_L)) for x in behind.iso),
        tuple(MapBand(x.paco2_mmHg * factor, x.ph_low, x.ph_high, bands[x.key]) for x in behind.bands),
        tuple(_map_gas(p, reader, factor) for p in path.gases),
        (a * factor, b * factor, c, d), translate("map", "normal"),
        translate("map", "Acid-base map of {label}").format(label=figures.label),
        summary(figures, reader),
        (translate("map", "Dotted: equal bicarbonate, mmol/L. Bands: acute and chronic hypercapnia, as classified."),
         translate("map", "Numbers in order of time. Venous gases stand apart from the path.")),
    )  # fmt: skip


def titled_spec(figures: EpisodeFigures, reader: Reader) -> MapSpec:
    """The map for a picture by itself: it says whose it is, and as of when."""
    spec = map_spec(figures, reader)
    whose = translate("map", "{label}, as of {time}").format(
        label=figures.label, time=wall(figures.as_of, reader.zone))  # fmt: skip
    return replace(spec, notes=(whose, *spec.notes))


def _range(values: list[float | None], least: tuple[float, float], step: float) -> tuple[float, float]:
    known = [v for v in values if v is not None]
    low = min([least[0], *(floor((v - step / 2) / step) * step for v in known)])
    return max(low, step), max([least[1], *(ceil((v + step / 2) / step) * step for v in known)])


def _iso_word(hco3: float) -> str:
    return trimmed(hco3)


def _map_gas(p: PathGas, reader: Reader, factor: float) -> MapGas:
    gas = p.gas
    assert gas.ph is not None
    assert gas.paco2_mmHg is not None
    marks = {"venous": translate("map", "venous"), "capillary": translate("map", "capillary")}
    return MapGas(
        p.number, gas.at, gas.ph, gas.paco2_mmHg * factor, state_of(gas.state if p.on_path else None),
        judged_sign(p.judged), gas_sentence(p, reader),
        gas.doubt or gas.disputed, p, marks.get(gas.site, ""), p.on_path,
    )  # fmt: skip


def gas_sentence(p: PathGas, reader: Reader) -> str:
    """A gas in one line: number, time, values, class, response."""
    parts = [f"{p.number}. {reader.time(p.gas.at)} {gas_name(p.gas)}: {gas_words(p.gas, reader.gas_unit)}",
             doubt_word(p.gas), class_words(p, reader).rstrip("."), response_words(p, reader)]  # fmt: skip
    return ". ".join(part for part in parts if part)


def class_words(p: PathGas, reader: Reader) -> str:
    """The class of a gas, or why it has none."""
    told = p.reading.classification or p.reading.classification_reason
    return sentence(told, reader) if told is not None else ""


def doubt_sentence(p: PathGas) -> str:
    """What makes the gas doubtful, as a sentence; "" where nothing does."""
    doubt = doubt_word(p.gas)
    return f"{opened(doubt)}." if doubt else ""


def steps_of(p: PathGas, reader: Reader) -> tuple[str, ...]:
    """The reasoning, one sentence after the other."""
    return tuple(sentence(step, reader) for step in p.reading.steps)


def response_words(p: PathGas, reader: Reader) -> str:
    """The verdict of a gas on the change it judges, or "" where it judges none."""
    if p.judged is None or p.response is None:
        return ""
    verdict = verdict_or_none(p.judged.verdict)
    lost = p.judged.since_start.gain_lost
    word = verdict_with_loss(verdict, lost=lost) if verdict is not None else translate("map", "not judged")
    word = in_doubt(word) if rests_on_doubt(p.gas) else word
    deltas = changes_of(p.judged, reader, of_pf=False)
    told = translate("map", "{verdict} after {anchor}").format(verdict=word, anchor=anchor_name(p.response))
    return (f"{told} ({', '.join(deltas)})" if deltas else told) + since_start_words(p.judged)


def summary(figures: EpisodeFigures, reader: Reader) -> str:
    """The whole map in words."""
    return "\n".join(_lines(figures, reader))


def _lines(figures: EpisodeFigures, reader: Reader) -> Iterator[str]:
    path = gas_path(figures)
    yield translate("map", "{label}: {count} gases on the map.").format(label=figures.label, count=len(path.gases))
    for p in path.gases:
        yield gas_sentence(p, reader) + "."
    for p in path.not_placed:
        yield translate("map", "Not on the map, for pH or PCO2 is missing: {gas}.").format(
            gas=f"{p.number}. {reader.time(p.gas.at)} {gas_name(p.gas)}")  # fmt: skip


def map_table(figures: EpisodeFigures, reader: Reader) -> Table:
    """The gases of the map as a table."""
    heads = (
        translate("map", "No"), translate("map", "Time"), translate("map", "Site"), "pH", "PaCO2",
        translate("map", "HCO3, calculated"), translate("map", "State"), translate("map", "Class"),
        translate("map", "Response"),
    )  # fmt: skip
    path = gas_path(figures)
    found = sorted((*path.gases, *path.not_placed), key=lambda p: p.number)
    title = translate("map", "Acid-base map of {label}").format(label=figures.label)
    return Table(title, heads, tuple(_row(p, figures, reader) for p in found), summary(figures, reader))


def _row(p: PathGas, figures: EpisodeFigures, reader: Reader) -> tuple[str, ...]:
    g = p.gas
    return (
        str(p.number), wall(g.at, reader.zone), gas_name(g), ph_as_reported(g) or "-",
        "-" if g.paco2_mmHg is None else gas_pressure(g.paco2_mmHg, reader.gas_unit),
        "-" if g.hco3_calculated_mmol_L is None else f"{fixed(g.hco3_calculated_mmol_L, 1)} mmol/L",
        state_in_doubt(g, gas_state_word(figures, g)),
        state_in_doubt(g, class_words(p, reader)), response_words(p, reader),
    )  # fmt: skip
