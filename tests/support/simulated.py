"""A simulated episode as the application would hold it: profile, typed rows and, if wanted, device samples."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from core.judgement.policy import shipped_policy
from core.record.channels import channel
from core.record.entries import Entry, NewEntry, recorded
from core.record.episode import Episode, build_episode
from core.record.instant import MINUTE, Instant, parse
from core.record.knowledge import standing
from core.record.reading import read_value
from core.record.samples import DeviceSamples
from sample_data.cohort import SimulatedEpisode

START: Instant = parse("2026-03-27T20:00:00+00:00")
"""Minute 0 of every simulated episode: the start of support."""
POLICY = shipped_policy()


def instant(minute: float) -> Instant:
    """The instant of a minute of the simulation."""
    return START + round(minute * MINUTE)


def as_episode(simulated: SimulatedEpisode, device: bool = True) -> Episode:
    """The record of a simulated episode. Nobody types a doubt away here: soft limits count as confirmed."""
    rows = [(simulated.first, c, v, "") for c, v in _profile(simulated).items()]
    rows += [(row.minute, row.channel, row.value, row.unit) for row in simulated.typed()]
    entries = [_entry(seq, *row) for seq, row in enumerate(rows, 1)]
    return build_episode("E", standing(entries), _samples(simulated) if device else ())


def _profile(simulated: SimulatedEpisode) -> Mapping[str, str]:
    person, patient = simulated.case.person, simulated.case.patient
    return {
        "indication": person.indication, "sex": person.sex, "height": f"{person.height:g}",
        "weight": f"{patient.weight:g}", "age": f"{patient.age:g}",
        "target_spo2_low": f"{person.target[0]:g}", "target_spo2_high": f"{person.target[1]:g}",
        "leak_definition": simulated.case.script.leak_definition,
    }  # fmt: skip


def _entry(seq: int, minute: int, key: str, value: str, unit: str) -> Entry:
    reading = read_value(channel(key), value, unit)
    new = NewEntry("E", key, instant(minute), reading.number, reading.words, reading.raw, reading.raw_unit,
                   reading.decimals)  # fmt: skip
    return recorded(new, seq, f"e{seq}", instant(minute))


def _samples(simulated: SimulatedEpisode) -> list[DeviceSamples]:
    blocks = []
    for key, values in simulated.readings().items():
        known = np.flatnonzero(np.isfinite(values))
        t = START + (known + simulated.first) * np.int64(MINUTE)
        blocks.append(DeviceSamples("E", key, "device", t.astype(np.int64), values[known].astype(np.float64)))
    return blocks
