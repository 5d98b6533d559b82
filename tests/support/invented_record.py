"""Records of an invented night typed as people type them, and parts of figures written by hand. No real people."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass
from itertools import count

import numpy as np

from core.judgement.shapes import (
    EpisodeFigures,
    GasFigure,
)
from core.record.channels import channel
from core.record.entries import Entry, from_reading, recorded
from core.record.episode import Episode, build_episode
from core.record.instant import MINUTE, Instant, parse
from core.record.knowledge import standing
from core.record.reading import read_value
from core.record.samples import DeviceSamples

ZONE = "Europe/London"
START: Instant = parse("2026-03-27T19:30:00+00:00")
END: Instant = parse("2026-03-28T07:30:00+00:00")
NOW: Instant = parse("2026-03-28T05:30:00+00:00")


def at(clock: str) -> Instant:
    """The moment of the night at which the clock shows `clock`."""
    day = "27" if int(clock[:2]) >= 12 else "28"
    return parse(f"2026-03-{day}T{clock}:00+00:00")


@dataclass(frozen=True)
class Bed:
    """One episode of the invented ward."""

    record: Episode
    figures: EpisodeFigures


_seq = count(1)


def record_of(key: str, rows: Iterable[tuple[str, dict[str, str]]], samples: Iterable[DeviceSamples] = ()) -> Episode:
    """An episode from rows of (clock, {channel: text, with an optional unit after a space})."""
    entries: list[Entry] = []
    for clock, values in rows:
        for name, text in values.items():
            ch = channel(name)
            number, _, unit = text.partition(" ") if ch.units else (text, "", "")
            new = from_reading(key, at(clock), read_value(ch, number, unit), by="AB", zone=ZONE, confirmed=True)
            seq = next(_seq)
            entries.append(recorded(new, seq, f"e{seq}", at(clock)))
    return build_episode(key, standing(entries), samples)


def device(key: str, name: str, since: str, level: float, swing: float, drift: float = 0.0) -> DeviceSamples:
    """One-minute device data from `since` to now, seeded by the names."""
    n = (NOW - at(since)) // MINUTE
    noise = np.random.default_rng(sum(map(ord, key + name))).normal(0, swing, n)
    v = level + drift * np.arange(n) / 60 + noise
    return DeviceSamples(
        key, name, "device", at(since) + np.arange(n, dtype=np.int64) * MINUTE, np.maximum(v, 0).round(0)
    )


def devices(
    key: str, since: str, rr: float, leak: float, vte: float, drift: float = 0.0
) -> tuple[DeviceSamples, ...]:
    return (
        device(key, "rr_total", since, rr, 1.6, drift),
        device(key, "leak", since, leak, 4),
        device(key, "vte", since, vte, 45),
        device(key, "spo2", since, 90, 1.0),
    )


def gas(clock: str, ph: str, co2: float, o2: float, fio2: float, state: str) -> GasFigure:
    return GasFigure(
        at(clock),
        "arterial",
        ph=float(ph),
        ph_text=ph,
        paco2_mmHg=co2,
        pao2_mmHg=o2,
        fio2=fio2,
        fio2_from="setting",
        pf_mmHg=round(o2 / fio2),
        hco3_calculated_mmol_L=29.4,
        sbe_mmol_L=2.3,
        state=state,
        hypercapnic=co2 > 45,
        consistent=None,
    )
