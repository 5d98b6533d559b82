"""A long invented episode for benchmarks: 72 h with device data every minute, 40 gases and 60 changes."""

from __future__ import annotations

from uuid import UUID

import numpy as np

from core.record.channels import channel
from core.record.entries import Entry, from_reading, recorded
from core.record.episode import Episode, build_episode
from core.record.instant import HOUR, MINUTE, Instant, iso, parse
from core.record.knowledge import standing
from core.record.reading import read_value
from core.record.samples import DeviceSamples

START = parse("2026-03-25T06:00:00+00:00")
HOURS = 72
END = START + HOURS * HOUR


def long_entries(hours: int = HOURS, gases: int = 40, changes: int = 60, key: str = "LONG") -> list[Entry]:
    """What people logged: profile, changes of settings, vitals every hour, gases. Seeded, so always the same."""
    dice = np.random.default_rng(72)
    rows: list[tuple[Instant, str, str]] = [
        (START, "label", "Bed 9"), (START, "age", "71"), (START, "indication", "copd"), (START, "sex", "male"),
        (START, "height", "172"), (START, "target_spo2_low", "88"), (START, "target_spo2_high", "92"),
        (START + 1, "rr", "30"), (START + 10 * MINUTE, "mode", "BPAP-ST"),
    ]  # fmt: skip
    span = hours * HOUR
    for i in range(changes):
        at = START + 10 * MINUTE + i * span // changes
        rows += [(at, "ipap", str(14 + i % 10)), (at, "epap", str(4 + i % 3)), (at, "fio2", str(28 + i % 8))]
    for i in range(gases):
        at = START + i * span // gases
        ph, paco2 = 7.24 + 0.15 * i / gases + dice.normal(0, 0.012), 76 - 20 * i / gases + dice.normal(0, 1.5)
        rows += [
            (at, "ph", f"{ph:.2f}"),
            (at, "paco2", f"{paco2:.0f}"),
            (at, "pao2", f"{dice.normal(64, 4):.0f}"),
        ]
        rows += [(at, "site", "arterial")]
    for i in range(hours):
        at = START + i * HOUR
        rows += [
            (at, "rr", f"{dice.normal(24, 2):.0f}"),
            (at, "gcs", "15"),
            (at, "sbp", "128"),
            (at, "temp", "37.1"),
        ]
        rows += [
            (at, "acvpu", "alert"),
            (at, "hr", f"{dice.normal(95, 5):.0f}"),
            (at, "spo2", f"{dice.normal(90, 1):.0f}"),
        ]
    rows.sort(key=lambda r: r[0])
    return [
        recorded(from_reading(key, at, read_value(channel(c), text), by="AB"), n, str(UUID(int=n)), at)
        for n, (at, c, text) in enumerate(rows, 1)
    ]


def long_samples(hours: int = HOURS, key: str = "LONG") -> list[DeviceSamples]:
    """What the machine wrote, every minute."""
    dice = np.random.default_rng(73)
    t = START + 10 * MINUTE + np.arange(hours * 60, dtype=np.int64) * MINUTE
    levels = {
        "leak": (22, 6),
        "vte": (470, 40),
        "mv": (11, 1),
        "rr_total": (23, 2),
        "spo2": (90, 1),
        "hr": (95, 4),
    }
    return [
        DeviceSamples(key, c, "device", t, np.round(np.clip(dice.normal(mean, sd, t.size), 1, None)))
        for c, (mean, sd) in levels.items()
    ]


def long_episode(hours: int = HOURS) -> Episode:
    """The episode as the store would build it."""
    return build_episode("LONG", standing(long_entries(hours)), long_samples(hours))


def long_csv(hours: int = HOURS) -> str:
    """The same episode as a log file."""
    lines = ["episode,at,channel,value,unit,by,note"]
    lines += [f"LONG,{iso(e.at)},{e.channel},{e.raw},,AB," for e in long_entries(hours)]
    for block in long_samples(hours):
        lines += [
            f"LONG,{iso(int(t))},{block.channel},{v:.0f},,device," for t, v in zip(block.t, block.v, strict=True)
        ]
    return "\n".join(lines) + "\n"
