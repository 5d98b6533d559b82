"""The sample night as episodes, and what the judgement says of each beside what the simulation knows.

Run it: `python -m tests.support.night_check [HH:MM]` prints the flags and due items of every episode as of a time.
"""

from __future__ import annotations

import csv
import json
import sys
from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache
from pathlib import Path
from typing import Any

import numpy as np

from core.figures.episode_figures import judged
from core.judgement.concern import concern
from core.judgement.context import Context
from core.judgement.due import due_items
from core.judgement.flags import evaluate
from core.judgement.policy import Policy, shipped_policy
from core.judgement.shapes import DueFigure, FlagFigure
from core.record.channels import CHANNELS, Group, channel
from core.record.entries import Entry, from_reading, recorded
from core.record.episode import Episode, build_episode
from core.record.instant import Instant, iso, parse
from core.record.knowledge import standing
from core.record.reading import read_value
from core.record.samples import DeviceSamples

NIGHT = Path(__file__).parents[2] / "sample_data" / "night"
END = parse("2026-03-28T05:30:00+00:00")


def rows(name: str) -> Iterator[dict[str, str]]:
    """The rows of one of the night's files."""
    with (NIGHT / name).open(encoding="utf-8", newline="") as file:
        yield from csv.DictReader(file)


@lru_cache(maxsize=1)
def truth() -> dict[str, dict[str, Any]]:
    """What the simulation knows of each episode."""
    told = json.loads((NIGHT / "truth.json").read_text("utf-8"))
    return {e["episode"]: e for e in told["episodes"]}


@lru_cache(maxsize=1)
def night_entries() -> dict[str, tuple[Entry, ...]]:
    """What people wrote in the night, by episode, in order, recorded when it happened."""
    found: dict[str, list[Entry]] = {}
    for seq, row in enumerate(rows("notes.csv"), 1):
        at, c = parse(row["at"]), channel(row["channel"])
        reading = read_value(c, row["value"], row["unit"])
        new = from_reading(row["episode"], at, reading, by=row["by"], note=row["note"], confirmed=True)
        found.setdefault(row["episode"], []).append(recorded(new, seq, f"n{seq}", at))
    return {k: tuple(v) for k, v in found.items()}


def device_samples(key: str) -> list[DeviceSamples]:
    """What the machine of an episode wrote."""
    columns: dict[str, list[tuple[int, float]]] = {}
    path = NIGHT / f"device-{key}.csv"
    if not path.exists():
        return []
    for row in rows(path.name):
        if CHANNELS[row["channel"]].group in (Group.DEVICE, Group.VITAL):
            number = read_value(channel(row["channel"]), row["value"], row["unit"]).number
            if number is not None:
                columns.setdefault(row["channel"], []).append((parse(row["at"]), number))
    return [
        DeviceSamples(key, c, "device", np.array([t for t, _ in v], np.int64), np.array([x for _, x in v]))
        for c, v in columns.items()
    ]


@lru_cache(maxsize=1)
def night() -> dict[str, Episode]:
    """Every episode of the night."""
    settings: dict[str, list[Entry]] = {k: list(v) for k, v in night_entries().items()}
    for key, entries in settings.items():
        path, last = NIGHT / f"device-{key}.csv", ""
        for row in rows(path.name) if path.exists() else ():
            c = channel(row["channel"])
            if c.group not in (Group.DEVICE, Group.VITAL):
                _logged(entries, key, parse(row["at"]), c.key, row["value"], row["unit"])
            told = row.get("leak_definition") or ""
            if told and told != last:
                _logged(entries, key, parse(row["at"]), "leak_definition", told, "")
                last = told
    return {k: build_episode(k, standing(v), device_samples(k)) for k, v in settings.items()}


def _logged(entries: list[Entry], key: str, at: Instant, name: str, text: str, unit: str) -> None:
    new = from_reading(key, at, read_value(channel(name), text, unit))
    entries.append(recorded(new, 100_000 + len(entries), f"{key}-{len(entries)}", at))


@dataclass(frozen=True)
class Said:
    """What the judgement says of an episode as of a moment."""

    ctx: Context
    flags: tuple[FlagFigure, ...]
    due: tuple[DueFigure, ...]


def said(episode: Episode, as_of: Instant, policy: Policy | None = None) -> Said:
    """Flags and due items of an episode as of a moment."""
    ctx = judged(episode, as_of, policy or shipped_policy())
    flags = evaluate(ctx)
    return Said(ctx, flags, due_items(ctx, flags))


def main(clock: str | None = None) -> None:
    """Print the night."""
    as_of = END if clock is None else parse(f"2026-03-2{7 if clock > '12' else 8}T{clock}:00+00:00")
    for key, episode in sorted(night().items()):
        told, known = said(episode, as_of), truth()[key]
        rank = concern(told.ctx, told.flags, told.due)
        print(f"\n{key} {known['kind']} failed={known['failed_at']} responded={known['responded_at']}"
              f" rank={rank.rank} {rank.order:.1f} {dict(rank.why.values) if rank.why else ''}")  # fmt: skip
        for f in told.flags:
            mark = {"escalate": "!!!", "concern": " ! ", "remark": " . "}[f.tier]
            ended = "" if f.ended_at is None else iso(f.ended_at)[11:16]
            print(f"  {mark} {f.group:12} {f.marker:28} {iso(f.since)[11:16]}-{ended:5} {'*' if f.strongest else ''}")
        for d in told.due:
            if d.state != "done":
                span = f"{iso(d.due_from)[11:16]}-{iso(d.due_until)[11:16]}"
                print(f"      due {d.what:16} {span} {d.state} {d.because.key}")


if __name__ == "__main__":
    main(*sys.argv[1:2])
