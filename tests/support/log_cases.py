"""A few lines of log text make an episode. For tests only; the application's own reader is richer.

    02:10 ph 7.25 paco2 68          a moment and its values (day 0)
    d1 02:10 rr 24                  the next day
    02:10+02:00 rr 24               with an offset from UTC, as a wall clock in another zone shows it
    03:00 correct 02:10 ph 7.29     a correction of what was logged for 02:10
    device leak 02:00 04:00 25 60   one sample a minute, from 25 to 60 along a straight line

Values take a unit without a space (`paco2 8.3kPa`, `fio2 35%`), choices with a space take quotes.
"""

from __future__ import annotations

import re
import shlex
from collections.abc import Iterable, Sequence
from dataclasses import replace
from datetime import UTC, datetime, timedelta, timezone

import numpy as np

from core.figures.episode_figures import gas_stage, record_stage
from core.judgement.context import Context
from core.judgement.policy import Policy, shipped_policy
from core.record.channels import Kind, channel
from core.record.entries import Action, Entry, from_reading, recorded
from core.record.episode import Episode, build_episode
from core.record.instant import MINUTE, Instant, from_datetime
from core.record.knowledge import standing
from core.record.reading import read_value
from core.record.samples import DeviceSamples

DAY_ZERO = datetime(2026, 3, 27, tzinfo=UTC)
_MOMENT = re.compile(r"(\d\d):(\d\d)(?:([+-])(\d\d):(\d\d))?")
_VALUE = re.compile(r"([+-]?[\d.,]+)(.*)")


def at(text: str) -> Instant:
    """The instant of `02:10`, `d1 02:10` or `02:10+02:00`, on the cases' day."""
    words = text.split()
    day = int(words.pop(0)[1:]) if words[0].startswith("d") else 0
    return _instant(words[0], day)


def _instant(clock: str, day: int) -> Instant:
    match = _MOMENT.fullmatch(clock)
    assert match, clock
    hour, minute, sign, oh, om = match.groups()
    offset = timedelta(hours=int(oh or 0), minutes=int(om or 0)) * (-1 if sign == "-" else 1)
    wall = datetime(DAY_ZERO.year, DAY_ZERO.month, DAY_ZERO.day, tzinfo=timezone(offset))
    return from_datetime(wall + timedelta(days=day, hours=int(hour), minutes=int(minute)))


def entries(log: str, key: str = "E") -> list[Entry]:
    """The entries of a case, in order of its lines."""
    made: list[Entry] = []
    for line in _lines(log):
        words = shlex.split(line)
        if words[0] == "device":
            continue
        day = int(words.pop(0)[1:]) if re.fullmatch(r"d\d+", words[0]) else 0
        moment = _instant(words.pop(0), day)
        if words[0] == "correct":
            made.append(_correction(made, words[1:], key))
            continue
        made.extend(_values(words, moment, key, len(made)))
    return made


def _values(words: list[str], moment: Instant, key: str, seq: int) -> Iterable[Entry]:
    while words:
        found = channel(words.pop(0))
        text = "" if found.kind is Kind.MARK else words.pop(0)
        reading = read_value(found, *_with_unit(text)) if found.kind is Kind.NUMBER else read_value(found, text)
        seq += 1
        new = from_reading(key, moment, reading, by="AB", confirmed=True)
        yield recorded(new, seq, f"e{seq}", moment)


def _with_unit(text: str) -> tuple[str, str]:
    match = _VALUE.fullmatch(text)
    assert match, text
    return match.group(1), match.group(2)


def _correction(made: list[Entry], words: list[str], key: str) -> Entry:
    moment = _instant(words[0], 0)
    (new,) = _values(words[1:], moment, key, len(made))
    wrong = next(e for e in made if e.at == moment and e.channel == new.channel)
    return replace(new, action=Action.CORRECT, replaces=wrong.id)


def device(log: str, key: str = "E") -> list[DeviceSamples]:
    """The device samples of a case, one a minute."""
    blocks: list[DeviceSamples] = []
    for line in _lines(log):
        words = shlex.split(line)
        if words[0] != "device":
            continue
        name, start, end, first, last = words[1], at(words[2]), at(words[3]), float(words[4]), float(words[5])
        t = np.arange(start, end, MINUTE, dtype=np.int64)
        blocks.append(DeviceSamples(key, name, "device", t, np.linspace(first, last, t.size)))
    return _joined(blocks)


def _joined(blocks: list[DeviceSamples]) -> list[DeviceSamples]:
    by_channel: dict[str, list[DeviceSamples]] = {}
    for block in blocks:
        by_channel.setdefault(block.channel, []).append(block)
    return [
        replace(parts[0], t=np.concatenate([p.t for p in parts]), v=np.concatenate([p.v for p in parts]))
        for parts in by_channel.values()
    ]


def _lines(log: str) -> list[str]:
    return [line.strip() for line in log.splitlines() if line.strip() and not line.strip().startswith("#")]


def build(made: Sequence[Entry], samples: Sequence[DeviceSamples] = (), key: str = "E") -> Episode:
    """The episode that entries and samples make."""
    return build_episode(key, standing(made), samples)


def episode(log: str) -> Episode:
    """The episode of a case."""
    return build(entries(log), device(log))


def context(log: str, as_of: str | Instant = "d5 00:00", policy: Policy | None = None) -> Context:
    """The context of a case as of a moment, its gases found."""
    moment = at(as_of) if isinstance(as_of, str) else as_of
    return gas_stage(record_stage(episode(log), moment, policy or shipped_policy()))
