"""What a change of settings can act on, step by step: ventilation (CO2), oxygen, both or nothing.

Pressure support and a rate that takes effect act on CO2; FiO2, oxygen flow and the expiratory pressure on
oxygen. A backup rate below the patient's own rate does nothing to ventilation. An EPAP raised without IPAP
lowers pressure support.
"""

from __future__ import annotations

from math import isnan

from core.judgement.response_shapes import Step
from core.record.instant import Instant
from core.record.message import Message, Value
from core.record.settings import Settings

CO2, OXYGEN = "co2", "oxygen"
OXYGEN_CHANNELS = frozenset({"fio2", "o2_flow"})
_RATE_MODES = frozenset({"BPAP-ST", "BPAP-T", "pressure control", "volume-assured"})
HIGH_FLOW = "high-flow nasal"


def number(value: float) -> float | None:
    """A float as it leaves core: None for NaN."""
    return None if isnan(value) else value


def _moved(before: float, after: float) -> bool:
    """A first recording is no change: both sides must be known."""
    return not isnan(before) and not isnan(after) and before != after


def support_word(settings: Settings) -> str | None:
    """The kind of support in force: its mode, or what its pressures say."""
    if settings.mode is not None:
        return settings.mode
    if settings.is_bilevel:
        return "BPAP"
    return "CPAP" if settings.is_cpap else None


def changed(at: Instant, before: Settings, after: Settings) -> tuple[Step, ...]:
    """The steps between two settings. A value recorded for the first time is no step.

    A change of the kind of support (CPAP to BPAP) gives a step of `pressure_support`, from 0.
    """
    return (*_pressure_steps(at, before, after), *_oxygen_steps(at, before, after), *_timing_steps(at, before, after))


def _pressure_steps(at: Instant, before: Settings, after: Settings) -> list[Step]:
    steps: list[Step] = []
    was, now = support_word(before), support_word(after)
    other_kind = _other_kind(before, after)
    if other_kind or (before.mode is not None and after.mode is not None and before.mode != after.mode):
        steps.append(Step(at, "mode", was, now))
    if other_kind:
        if _moved(before.pressure_support, after.pressure_support):
            steps.append(Step(at, "pressure_support", before.pressure_support, after.pressure_support))
    elif after.is_bilevel and _moved(before.ipap, after.ipap):
        steps.append(Step(at, "ipap", before.ipap, after.ipap))
    if _moved(before.low_pressure, after.low_pressure):
        steps.append(Step(at, "cpap" if after.is_cpap else "epap", before.low_pressure, after.low_pressure))
    return steps


def _other_kind(before: Settings, after: Settings) -> bool:
    def kind(s: Settings) -> str | None:
        if s.is_bilevel:
            return "bilevel"
        return "cpap" if s.is_cpap else s.mode

    was, now = kind(before), kind(after)
    return was is not None and now is not None and was != now


def oxygen_recorded(settings: Settings) -> bool:
    """Whether anything is known of the oxygen given: a fraction or a flow."""
    return not (isnan(settings.fio2) and isnan(settings.o2_flow))


def _oxygen_steps(at: Instant, before: Settings, after: Settings) -> list[Step]:
    if not oxygen_recorded(before) or not oxygen_recorded(after):
        return []
    if not isnan(before.fio2) and not isnan(after.fio2):
        return [Step(at, "fio2", before.fio2, after.fio2)] if before.fio2 != after.fio2 else []
    steps: list[Step] = []
    if isnan(before.fio2) != isnan(after.fio2):
        steps.append(Step(at, "fio2", number(before.fio2), number(after.fio2)))
    if not isnan(after.o2_flow) and before.o2_flow != after.o2_flow:
        steps.append(Step(at, "o2_flow", number(before.o2_flow), after.o2_flow))
    return steps


def _timing_steps(at: Instant, before: Settings, after: Settings) -> list[Step]:
    steps = [
        Step(at, channel, was, now)
        for channel, was, now in (("rate_set", before.rate_set, after.rate_set), ("ti", before.ti, after.ti))
        if _moved(was, now)
    ]
    if before.interface is not None and after.interface is not None and before.interface != after.interface:
        steps.append(Step(at, "interface", before.interface, after.interface))
    return steps


def rate_takes_effect(before: Settings, after: Settings, own_rate: float | None) -> bool | None:
    """Whether a change of the backup rate acts on ventilation; None where the own rate is not known.

    It acts where either rate reaches the patient's own rate, in a mode that has one; a timed mode always.
    """
    if after.mode is not None and after.mode not in _RATE_MODES:
        return False
    if after.mode == "BPAP-T":
        return True
    if own_rate is None:
        return None
    return max(before.rate_set, after.rate_set) >= own_rate


def effects(steps: tuple[Step, ...], before: Settings, after: Settings, own_rate: float | None) -> tuple[str, ...]:
    """Which of CO2 and oxygen these steps can act on, in that order; empty where they do nothing.

    A rate whose effect is not known counts as acting: a doubt does not hide a change.
    """
    channels = {s.channel for s in steps}
    acts: set[str] = set()
    if channels & {"ipap", "epap"} and _moved(before.pressure_support, after.pressure_support):
        acts.add(CO2)
    if channels & {"pressure_support", "ti"}:
        acts.add(CO2)
    if channels & {"epap", "cpap"} or channels & OXYGEN_CHANNELS:
        acts.add(OXYGEN)
    if "rate_set" in channels and rate_takes_effect(before, after, own_rate) is not False:
        acts.add(CO2)
    if "mode" in channels:
        acts.add(CO2)
        if HIGH_FLOW in (before.mode, after.mode):
            acts.add(OXYGEN)
    if "interface" in channels:
        acts |= {CO2, OXYGEN}
    return tuple(e for e in (CO2, OXYGEN) if e in acts)


def effect_of_change(before: Settings, after: Settings, own_rate: float | None) -> tuple[Message, ...]:
    """What a change can act on, to be said at entry. `own_rate` per minute, None where not known.

    Keys: `effect.pressure_support`, `effect.epap_lowers_support`, `effect.support_kept`,
    `effect.expiratory_pressure`, `effect.mode`, `effect.fio2`, `effect.fio2_not_known`, `effect.o2_flow`,
    `effect.rate`, `effect.rate_none`, `effect.rate_not_known`, `effect.ti`, `effect.interface`.

    >>> from math import nan
    >>> was = Settings("BPAP-ST", 16, 5, nan, 0.35, nan, 14, nan, None)
    >>> [m.key for m in effect_of_change(was, Settings("BPAP-ST", 16, 8, nan, 0.35, nan, 14, nan, None), 24)]
    ['effect.epap_lowers_support']
    """
    steps = changed(0, before, after)
    by_channel = {s.channel: s for s in steps}
    said = [*_pressure_words(by_channel, before, after)]
    for channel in ("fio2", "o2_flow", "ti", "interface", "mode"):
        step = by_channel.get(channel)
        if step is None:
            continue
        key = "effect.fio2_not_known" if channel == "fio2" and step.after is None else f"effect.{channel}"
        said.append(Message(key, {"before": step.before, "after": step.after}))
    if "rate_set" in by_channel:
        said.append(_rate_words(before, after, own_rate))
    return tuple(said)


def _pressure_words(steps: dict[str, Step], before: Settings, after: Settings) -> list[Message]:
    """Pressure support with the pressures that moved it: where IPAP moves too, nothing moved "alone"."""
    values: dict[str, Value] = {"before": number(before.pressure_support), "after": number(after.pressure_support)}
    for channel in ("ipap", "epap"):
        if channel in steps and before.is_bilevel:
            values |= {f"{channel}_before": steps[channel].before, f"{channel}_after": steps[channel].after}
    said: list[Message] = []
    if _moved(before.pressure_support, after.pressure_support):
        alone = before.is_bilevel and after.is_bilevel and "epap" in steps and "ipap" not in steps
        lowered = alone and after.low_pressure > before.low_pressure
        said.append(Message("effect.epap_lowers_support" if lowered else "effect.pressure_support", values))
    elif "ipap" in steps and "epap" in steps:
        said.append(Message("effect.support_kept", values))
    if steps.keys() & {"epap", "cpap"} and not (said and "epap_after" in values):
        low = {"before": number(before.low_pressure), "after": number(after.low_pressure)}
        said.append(Message("effect.expiratory_pressure", low))
    return said


def _rate_words(before: Settings, after: Settings, own_rate: float | None) -> Message:
    acts = rate_takes_effect(before, after, own_rate)
    key = {True: "effect.rate", False: "effect.rate_none", None: "effect.rate_not_known"}[acts]
    values = {"before": before.rate_set, "after": after.rate_set, "own_rate": own_rate, "mode": after.mode}
    return Message(key, values)
