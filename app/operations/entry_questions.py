"""What is asked before an entry is taken: unusual values, a second value, a gas against itself, the course."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import TYPE_CHECKING

from app.operations.bed_in_use import label_questions
from app.operations.policy import in_force
from core.judgement.entry_doubts import gas_doubts
from core.judgement.order_doubts import order_doubts
from core.judgement.second_value import second_values
from core.judgement.split_gas import rest_of_gas
from core.judgement.unlike_last_gas import unlike_last_gas
from core.record.channels import CHANNELS, Group
from core.record.entries import Entry
from core.record.episode import Episode, build_episode
from core.record.instant import Instant
from core.record.message import Message, refuse
from core.record.reading import Reading
from core.record.settings import SettingsInForce

if TYPE_CHECKING:
    from storage.store import Store

_TARGET = ("target_spo2_low", "target_spo2_high")


def questions(store: Store, record: Episode, at: Instant, readings: Sequence[Reading]) -> tuple[Message, ...]:
    """The questions that readings of one moment raise over an episode's record without them."""
    asked = [doubt for r in readings for doubt in r.doubts]
    asked += second_values(readings, at, record.standing)
    if any(r.channel.group is Group.GAS for r in readings):
        settings = SettingsInForce(record)
        drawn_on = replace(settings.at(at), fio2=settings.fio2_drawn_on(at))
        sample = next((g for g in record.gases if g.at == at), None)
        policy = in_force(store)
        asked += gas_doubts(readings, drawn_on, policy, sample)
        asked += unlike_last_gas(readings, at, record, policy)
        asked += rest_of_gas(readings, at, record)
    asked += order_doubts(readings, at, record)
    asked += label_questions(store, record.key, readings)
    return tuple(asked)


def check_target(record: Episode, at: Instant, readings: Sequence[Reading]) -> None:
    """Refuse an SpO2 target whose ends are the wrong way round, the new end against the one that stands.

    Raises:
        RecordError: `target.wrong_order`.
    """
    new = {r.channel.key: r.number for r in readings if r.channel.key in _TARGET}
    low, high = (new.get(key, _stands(record, key, at)) for key in _TARGET)
    if new and low is not None and high is not None and low >= high:
        raise refuse("target.wrong_order", low=low, high=high, accepted="the low end below the high one")


def _stands(record: Episode, key: str, at: Instant) -> float | None:
    series = record.number(key)
    i = series.last_at_or_before(at)
    return float(series.v[i]) if i >= 0 else None


def questions_of_change(
    store: Store, record: Episode, olds: Sequence[Entry], at: Instant, given: Sequence[Reading]
) -> tuple[Message, ...]:
    """The questions that readings raise which take the place of entries: as if those had never been logged.

    What the record before raised already, the entries' own values at their own time, is not asked again.
    """
    if all(at == old.at and reading.value == _value(old) for old, reading in zip(olds, given, strict=True)):
        return ()
    replaced = {old.id for old in olds}
    without = build_episode(record.key, [s for s in record.standing if s.entry.id not in replaced])
    return questions(store, without, at, given)


def reading_of(entry: Entry) -> Reading:
    """An entry's value as it was read when it was logged."""
    return Reading(CHANNELS[entry.channel], entry.number, entry.words, entry.raw, entry.raw_unit, entry.decimals)


def _value(entry: Entry) -> float | str | None:
    return entry.words if entry.number is None else entry.number
