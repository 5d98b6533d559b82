"""Small episodes thrown by dice, with times and values crowded around the edges of the rules. No real people.

Rows are (minute, channel, text in the canonical unit); minute 0 is where support starts. Two settings, or a setting
and a mask that comes off or on, never share a minute: there the order of recording decides.
"""

from __future__ import annotations

from collections.abc import Callable, Iterable
from dataclasses import replace
from random import Random

from core.figures.episode_figures import episode_figures
from core.judgement.policy import shipped_policy
from core.judgement.shapes import EpisodeFigures
from core.record.channels import channel
from core.record.entries import Action, Entry, NewEntry, recorded
from core.record.episode import build_episode
from core.record.instant import MINUTE, Instant, parse
from core.record.knowledge import standing
from core.record.reading import read_value
from core.record.units import MMHG_PER_KPA

Row = tuple[int, str, str]
ZERO: Instant = parse("2026-03-27T20:00:00+00:00")
POLICY = shipped_policy()

# fmt: off
APART = (
    1, 5, 9, 10, 11, 19, 20, 21, 29, 30, 31, 44, 45, 59, 60, 61, 89, 90, 91, 119, 120, 121, 135, 240, 241, 359, 361,
)
PH = (
    "7.05", "7.14", "7.19", "7.20", "7.24", "7.249", "7.25", "7.283", "7.30", "7.34", "7.345", "7.35", "7.38", "7.45",
    "7.46", "7.50",
)
# fmt: on
PACO2 = ("38", "44", "45", "45.3", "45.4", "46", "50", "55", "60", "64.8", "65", "70", "73.6", "80", "90")
PAO2 = ("44", "45", "46", "52", "59", "60", "61", "70", "80", "100")
FIO2 = ("0.21", "0.24", "0.26", "0.28", "0.30", "0.33", "0.35", "0.40", "0.45", "0.50", "0.60", "0.80", "1")
GAS = (
    ("ph", PH, 0.92), ("paco2", PACO2, 0.92), ("pao2", PAO2, 0.7), ("gas_fio2", FIO2, 0.2),
    ("hco3", ("20", "26.4", "30"), 0.2),
)  # fmt: skip
VITALS = {
    "rr": ("8", "11", "12", "16", "20", "21", "24", "25", "26", "30", "31", "36", "40"),
    "spo2": ("82", "84", "86", "87", "88", "90", "92", "93", "95", "96", "97", "98"),
    "hr": ("50", "90", "91", "110", "120", "121", "131"), "gcs": ("15", "14", "12", "10", "8"),
    "sbp": ("90", "91", "100", "111", "150"), "temp": ("35.0", "36.5", "38.0", "38.1", "39.1"),
    "acvpu": ("alert", "alert", "confusion", "voice"),
}  # fmt: skip
SETTINGS = {
    "ipap": ("12", "14", "16", "18", "20", "24"), "epap": ("4", "5", "6", "8"), "fio2": FIO2,
    "o2_flow": ("0", "1", "2", "3", "6", "10"), "rate_set": ("12", "14", "16", "24"), "ti": ("0.8", "1.0", "1.2"),
    "interface": ("oronasal", "nasal", "full face"),
    "mode": ("BPAP-ST", "BPAP-S", "CPAP", "high-flow nasal", "off"),
}  # fmt: skip


class Dice:
    """Throws one episode."""

    def __init__(self, seed: int) -> None:
        self.random = Random(seed)
        self.rows: dict[tuple[int, str], str] = {}
        self.moves: set[int] = set()

    def put(self, minute: int, key: str, *values: str) -> None:
        self.rows[minute, key] = self.random.choice(values)

    def likely(self, share: float) -> bool:
        return self.random.random() < share

    def gas(self, minute: int) -> None:
        for key, values, share in GAS:
            if self.likely(share):
                self.put(minute, key, *values)
        if self.likely(0.6):
            self.put(minute, "site", *["arterial"] * 4, "capillary", "venous")

    def vitals(self, minute: int) -> None:
        for key, values in VITALS.items():
            if self.likely(0.7 if key in ("rr", "spo2") else 0.35):
                self.put(minute, key, *values)

    def setting(self, minute: int) -> None:
        if minute in self.moves:
            return
        self.moves.add(minute)
        key = self.random.choice(("ipap", "ipap", "epap", "fio2", "fio2", "o2_flow", *SETTINGS))
        if key == "mode":
            self.put(minute, "cpap", "6", "8")
        self.put(minute, key, *SETTINGS[key])

    def off_and_on(self, minute: int) -> int:
        """A break, or an end; the minute until which it lasts."""
        back = minute + self.random.choice((1, 10, 29, 30, 31, 60, 240))
        if not {minute, back} & self.moves:
            self.moves |= {minute, back}
            if self.likely(0.2):
                self.put(minute, "stopped", "")
            else:
                self.put(minute, self.random.choice(("mask_off", "break_start")), "")
                self.put(back, self.random.choice(("mask_on", "break_end")), "")
        return back

    def start(self) -> None:
        self.put(-400, "indication", "copd", "pneumonia", "obesity hypoventilation", "other")
        if self.likely(0.2):
            self.put(-400, "spo2_scale", "1", "2")
        if self.likely(0.85):
            self.gas(-self.random.choice((0, 0, 1, 30, 60, 119, 120, 121)))
        if self.likely(0.6):
            self.vitals(-self.random.choice((1, 10, 29, 30, 31, 60)))
        for key, value in (("mode", "BPAP-ST"), ("ipap", "15"), ("epap", "5"), ("rate_set", "14"), ("ti", "1.0"),
                           ("interface", "oronasal")):  # fmt: skip
            self.put(0, key, value)
        if self.likely(0.8):
            self.put(0, "fio2", *FIO2)
        else:
            self.put(0, "o2_flow", "0", "2", "6")
        self.moves.add(0)

    def night(self) -> None:
        moments = [0]
        for _ in range(self.random.randint(2, 12)):
            minute = self.random.choice(moments[-3:]) + self.random.choice(APART)
            deeds: tuple[Callable[[int], int | None], ...] = (
                self.gas, self.gas, self.gas, self.setting, self.setting, self.vitals, self.vitals, self.off_and_on
            )  # fmt: skip
            deed = self.random.choice(deeds)
            moments.append(deed(minute) or minute)
            if self.likely(0.05):
                self.put(minute, "gas_sent", "")


def thrown(seed: int) -> tuple[list[Row], int]:
    """The rows of an episode and the minute as of which it is looked at."""
    dice = Dice(seed)
    dice.start()
    dice.night()
    rows = [(minute, key, value) for (minute, key), value in dice.rows.items()]
    last = max(minute for minute, _, _ in rows)
    return rows, dice.random.choice((last, last + 1, last + 60, last + 300, max(30, last // 2)))


def entry_of(row: Row, seq: int, shift: int = 0, kpa: bool = False) -> Entry:
    """The ledger's entry of a row, named by what it says; gas pressures in mmHg or exactly converted to kPa."""
    minute, key, text = row
    ch = channel(key)
    unit = ch.unit
    if unit == "mmHg" and kpa and key in ("paco2", "pao2"):
        text, unit = repr(float(text) / MMHG_PER_KPA), "kPa"
    if key in ("fio2", "gas_fio2"):
        text, unit = f"{float(text) * 100:g}", "%"
    read = read_value(ch, text, unit)
    at = ZERO + (minute + shift) * MINUTE
    new = NewEntry("E", key, at, read.number, read.words, read.raw, read.raw_unit, read.decimals)
    return recorded(new, seq, f"{minute} {key}", at)


def entries_of(rows: Iterable[Row], shift: int = 0, kpa: bool = False) -> list[Entry]:
    return [entry_of(row, seq, shift, kpa) for seq, row in enumerate(rows, 1)]


def figures_of(entries: Iterable[Entry], as_of: int, shift: int = 0) -> EpisodeFigures:
    """The figures through the program's own door."""
    return episode_figures(build_episode("E", standing(entries)), ZERO + (as_of + shift) * MINUTE, POLICY)


def withdrawal(entry: Entry, seq: int) -> Entry:
    """The entry that takes another back."""
    return replace(
        entry, number=None, words=None, raw="", action=Action.WITHDRAW, replaces=entry.id, seq=seq, id=f"w{seq}"
    )


def minute_of(at: Instant | None) -> int | None:
    return None if at is None else (at - ZERO) // MINUTE
