"""What to ask where an entry does not fit the course of the support: settings while the mask is off, a mask that
comes off twice, a gas of the very minute in which something changed. The time may be wrong, or an entry missing.
"""

from __future__ import annotations

from collections.abc import Collection, Sequence
from math import isnan, nan

from core.record.episode import Episode
from core.record.instant import MINUTE, Instant
from core.record.message import Message
from core.record.reading import Reading
from core.record.settings import SettingsInForce
from core.record.support import SETTLED, SupportTime, support_time

OFF = ("mask_off", "break_start")
ON = ("mask_on", "break_end")
_OF_THE_MACHINE = ("mode", "ipap", "epap", "cpap", "rate_set", "ti")
"""Settings that act only while the mask is on. Oxygen is given in a break too."""
_OXYGEN = ("fio2", "o2_flow")
_MEASURED = ("ph", "paco2", "pao2")


def order_doubts(readings: Sequence[Reading], at: Instant, record: Episode) -> tuple[Message, ...]:
    """The questions that readings of one moment raise against what is logged. `record`: the episode without them."""
    keys = frozenset(r.channel.key for r in readings)
    settings = SettingsInForce(record)
    support = support_time(record, settings)
    return (
        *_settings_unworn(readings, keys, at, support),
        *_moved_twice(keys, at, support),
        *_contrary_of_the_minute(readings, at, record),
        *_after_the_end(readings, keys, at, support),
        *_gas_at_mask_off(keys, at, record),
        *_gas_at_change(readings, keys, at, record, settings),
    )


def _is_off(readings: Sequence[Reading]) -> bool:
    return any(r.channel.key == "mode" and r.words == "off" for r in readings)


def _settings_unworn(
    readings: Sequence[Reading], keys: Collection[str], at: Instant, support: SupportTime
) -> tuple[Message, ...]:
    """Settings of the machine in a break: a plan for later, or the mask went on and nobody said so?"""
    off = support.break_at(at)
    if off is None or not any(k in keys for k in _OF_THE_MACHINE) or any(k in keys for k in ON) or _is_off(readings):
        return ()
    if any(r.channel.key == "mode" and r.words == "high-flow nasal" for r in readings):
        return ()
    return (Message("doubt.settings_off_mask", {"since": off.start}),)


def _moved_twice(keys: Collection[str], at: Instant, support: SupportTime) -> tuple[Message, ...]:
    off = support.break_at(at)
    if off is not None and any(k in keys for k in OFF):
        return (Message("doubt.mask_off_already", {"since": off.start}),)
    worn = support.on_support(at) and support.start is not None and at > support.start + SETTLED
    if worn and any(k in keys for k in ON):
        on = max((b.end for b in support.breaks if b.end is not None and b.end <= at), default=support.start)
        return (Message("doubt.mask_on_already", {"since": on}),)
    return ()


def _contrary_of_the_minute(readings: Sequence[Reading], at: Instant, record: Episode) -> tuple[Message, ...]:
    """The mask put on and taken off in one minute, where the times do not say which came last.

    At one instant what is recorded last counts; before an instant of the same minute this counts as the earlier,
    though it is recorded later. Either is said before it is recorded.
    """
    now = [r.channel.key in OFF for r in readings if r.channel.key in (*OFF, *ON)]
    if not now:
        return ()
    off = now[-1]
    contrary = [int(t) for k in (ON if off else OFF) for t in record.text(k).t
                if int(t) >= at and int(t) // MINUTE == at // MINUTE]  # fmt: skip
    if not contrary and (not off) not in now:
        return ()
    then = max(contrary, default=at)
    last = off if then == at else not off
    said = {"logged": "on" if off else "off", "at": then, "last": "off" if last else "on"}
    return (Message("doubt.mask_both_ways", said),)


def _after_the_end(
    readings: Sequence[Reading], keys: Collection[str], at: Instant, support: SupportTime
) -> tuple[Message, ...]:
    resumes = any(k in keys for k in (*_OF_THE_MACHINE, "mask_on", "break_end")) and not _is_off(readings)
    if support.end is None or at <= support.end or not resumes:
        return ()
    return (Message("doubt.after_the_end", {"ended_at": support.end}),)


def _gas_at_mask_off(keys: Collection[str], at: Instant, record: Episode) -> tuple[Message, ...]:
    """A gas and the mask coming off in one minute: the gas counts as drawn before."""
    gas_now, off_now = any(k in keys for k in _MEASURED), any(k in keys for k in OFF)
    gas_then = any(g.at // MINUTE == at // MINUTE for g in record.gases)
    off_then = any(int(t) // MINUTE == at // MINUTE for k in OFF for t in record.text(k).t)
    if (gas_now and (off_now or off_then)) or (off_now and gas_then):
        return (Message("doubt.gas_with_mask_off", {"at": at}),)
    return ()


def _gas_at_change(
    readings: Sequence[Reading], keys: Collection[str], at: Instant, record: Episode, settings: SettingsInForce
) -> tuple[Message, ...]:
    """A gas without an FiO2 of its own in the minute of a new one: it counts as drawn on the one before."""
    gas = next((g for g in record.gases if g.at // MINUTE == at // MINUTE), None)
    gas_now, gas_then = any(k in keys for k in _MEASURED), gas is not None
    if "gas_fio2" in keys or (gas is not None and not isnan(gas.gas_fio2)):
        return ()
    before, then = settings.fio2_drawn_on(at), settings.fio2.at(at - at % MINUTE + MINUTE - 1)
    new = next((r.number for r in readings if r.channel.key == "fio2"), nan)
    changed_now = any(k in keys for k in _OXYGEN) and not _same(new, before)
    changed_then = not _same(then, before)
    if isnan(before) or not ((gas_now and (changed_now or changed_then)) or (gas_then and changed_now)):
        return ()
    return (Message("doubt.gas_with_new_fio2", {"fio2": before}),)


def _same(a: float | None, b: float) -> bool:
    return a is not None and abs(a - b) < 1e-9
