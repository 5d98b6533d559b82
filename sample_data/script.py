"""A script: what people do at the bedside, minute by minute from the start of support, and what they log of it."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import dataclass, field

import numpy as np

from sample_data.saturation import Values

Setting = float | str

LOGGED_SETTINGS = (
    "mode", "ipap", "epap", "cpap", "fio2", "o2_flow", "rate_set", "ti", "device", "interface",
    "interface_size", "humidifier",
)  # fmt: skip
HIDDEN = ("fit_leak", "severity_end", "asynchrony_extra", "sedation", "mask", "drive_extra")
"""What happens without anyone writing it down: how the mask sits, where the illness heads (1: as it began),
how far patient and machine are out of step, sedation 0 to 1, mask on (1) or off (0)."""


@dataclass(frozen=True, slots=True)
class Act:
    """One thing at one minute. `what` is settings | event | gas | vitals | hidden."""

    minute: int
    what: str
    values: tuple[tuple[str, Setting], ...]
    by: str = ""


@dataclass
class Script:
    """The acts of one episode, from `first` to `last` minute (support starts at minute 0).

    Before `logged_from` things happen, and nobody logs them.
    """

    first: int
    last: int
    logged_from: int
    leak_definition: str = "unintentional"
    pressure_unit: str = "mmHg"
    acts: list[Act] = field(default_factory=list)

    def settings(self, minute: int, by: str, /, **values: Setting) -> None:
        """Change settings and log them."""
        self._add(minute, "settings", values, by)

    def event(self, minute: int, channel: str, by: str, text: str = "") -> None:
        """Log an event. Breaks and the mask coming off or on also happen to the patient."""
        self._add(minute, "event", {channel: text}, by)
        if channel in ("break_start", "mask_off", "stopped"):
            self.hidden(minute, mask=0.0)
        if channel in ("break_end", "mask_on"):
            self.hidden(minute, mask=1.0)

    def gas(self, minute: int, by: str, site: str = "arterial", *, sent: bool = False) -> None:
        """Take a gas. `sent` logs that it was sent, 3 min before."""
        if sent:
            self.event(minute - 3, "gas_sent", by)
        self._add(minute, "gas", {"site": site}, by)

    def vitals(self, minutes: Iterable[int], by: str) -> None:
        """Count and write down vital signs."""
        for minute in minutes:
            self._add(minute, "vitals", {}, by)

    def hidden(self, minute: int, /, **values: Setting) -> None:
        """Let something happen that nobody writes down."""
        self._add(minute, "hidden", values, "")

    def _add(self, minute: int, what: str, values: dict[str, Setting], by: str) -> None:
        if self.first <= minute <= self.last:
            self.acts.append(Act(minute, what, tuple(values.items()), by))

    def in_order(self) -> list[Act]:
        """The acts by time; those of one minute in the order written."""
        return sorted(self.acts, key=lambda a: a.minute)


@dataclass(frozen=True, slots=True)
class Inputs:
    """What acts on the patient each minute: arrays of shape (minutes,), or (minutes, n) for a cohort."""

    on: Values
    ipap: Values
    epap: Values
    rate_set: Values
    ti: Values
    fio2: Values
    o2_flow: Values
    fit_leak: Values
    severity_end: Values
    asynchrony_extra: Values
    sedation: Values
    drive_extra: Values

    def at(self, minute: int) -> Inputs:
        """What acts in one minute: each array without its first axis."""
        return Inputs(**{name: getattr(self, name)[minute] for name in self.__dataclass_fields__})

    @property
    def minutes(self) -> int:
        """How many minutes."""
        return int(self.on.shape[0])


START = {
    "mask": 0.0, "ipap": 0.0, "epap": 0.0, "cpap": 0.0, "rate_set": 0.0, "ti": 1.0, "fio2": 0.21, "o2_flow": np.nan,
    "fit_leak": 10.0, "severity_end": 1.0, "asynchrony_extra": 0.0, "sedation": 0.0, "drive_extra": 0.0,
}  # fmt: skip


def inputs_of(script: Script) -> Inputs:
    """Turn the acts into step functions by minute."""
    count = script.last - script.first + 1
    table = {name: np.full(count, value, np.float64) for name, value in START.items()}
    bilevel = np.ones(count)
    support = np.zeros(count)
    for act in script.in_order():
        if act.what not in ("settings", "hidden"):
            continue
        i = act.minute - script.first
        for name, value in act.values:
            if name == "mode":
                bilevel[i:] = 0.0 if value in ("CPAP", "off") else 1.0
                support[i:] = 0.0 if value == "off" else 1.0
                table["mask"][i:] = support[i]
            elif name in table:
                table[name][i:] = float(value)
                if name in ("fio2", "o2_flow"):
                    other = "o2_flow" if name == "fio2" else "fio2"
                    table[other][i:] = np.nan
    on = table["mask"] * support
    low = np.where(bilevel > 0, table["epap"], table["cpap"]) * on
    high = np.where(bilevel > 0, table["ipap"], table["cpap"]) * on
    rest = {k: table[k] for k in HIDDEN if k != "mask"}
    return Inputs(
        on, high, low, table["rate_set"] * on * bilevel, table["ti"], table["fio2"], table["o2_flow"], **rest
    )


def side_by_side(inputs: list[Inputs]) -> Inputs:
    """Inputs of many episodes of equal length as arrays of shape (minutes, n)."""
    names = Inputs.__dataclass_fields__
    return Inputs(**{name: np.stack([getattr(i, name) for i in inputs], axis=1) for name in names})
