"""What a table's columns probably are, from their names, units and values. A proposal is shown and answered by a
person; where two readings are possible it stays open, with a hint."""

from __future__ import annotations

import re
from collections.abc import Sequence
from dataclasses import dataclass, field, replace
from functools import lru_cache

from core.record.channels import CHANNELS, Channel, Group, Kind
from core.record.message import Message, RecordError, Value
from core.record.units import MMHG_GAS
from storage.intake.mapping import ColumnUse, LongUse, Mapping, TimeUse, channels_of
from storage.intake.table import Table
from storage.intake.table_times import all_have_offsets, fitting_orders

_MORE: dict[str, tuple[str, ...]] = {
    "ph": ("ph art", "ph a", "aph", "arterial ph"),
    "paco2": ("pco2", "paco2", "pco2 a", "co2", "arterial pco2", "paco 2", "pco 2"),
    "pao2": ("po2", "pao2", "po2 a", "arterial po2"),
    "hco3": ("hco3", "bicarbonate", "bicarb", "hco3 act", "chco3", "actual bicarbonate"),
    "be": ("be", "base excess", "sbe", "be ecf"),
    "lactate": ("lactate", "lac", "clac"),
    "hb": ("hb", "thb", "cthb", "haemoglobin", "hemoglobin"),
    "sao2": ("sao2", "so2"),
    "gas_fio2": ("fio2 gas",),
    "spo2": ("spo2", "sat", "sats", "saturation", "o2 sat", "oxygen saturation"),
    "hr": ("hr", "heart rate", "pulse", "pulse rate"),
    "rr": ("rr", "resp rate", "respiratory rate", "resp", "breaths per minute"),
    "sbp": ("sbp", "sys", "systolic", "systolic bp", "nibp sys"),
    "dbp": ("dbp", "dia", "diastolic", "diastolic bp", "nibp dia"),
    "temp": ("temp", "temperature"),
    "vte": ("vte", "vt", "tidal volume", "tidal vol", "tv", "exp tidal volume"),
    "mv": ("mv", "minute volume", "minute ventilation", "min vol", "ve"),
    "leak": ("leak", "leakage", "leak rate", "unintentional leak", "total leak"),
    "pip": ("pip", "peak pressure", "peak pres"),
    "rr_total": ("rr total", "total rate", "total rr", "breath rate", "device rate"),
    "spont_percent": ("spont", "triggered", "spontaneous", "spont percent"),
    "ipap": ("ipap", "insp pressure", "inspiratory pressure"),
    "epap": ("epap", "exp pressure", "expiratory pressure"),
    "fio2": ("fio2", "inspired oxygen", "o2 fraction"),
    "o2_flow": ("o2 flow", "oxygen flow", "oxygen"),
    "rate_set": ("rate set", "backup rate", "set rate"),
    "ti": ("ti", "insp time", "inspiratory time"),
    "site": ("site", "sample site", "sample type", "specimen"),
    "note": ("note", "notes", "comment", "remark", "remarks"),
    "mode": ("mode",),
}
_TIME = ("time", "date", "datetime", "date time", "timestamp", "at", "zeit", "datum", "date and time", "sampled",
         "collected", "sample time", "recorded", "zeitpunkt", "datum zeit", "uhrzeit")  # fmt: skip
_CLOCK = ("time", "clock", "uhrzeit", "zeit", "time of day")
_EPISODE = ("episode", "patient", "subject", "id", "bed", "case")
_BY = ("by", "user", "person", "staff", "initials", "nurse", "operator")
_CHANNEL = ("channel", "parameter", "analyte", "test", "name", "measurement", "item", "observation")
_VALUE = ("value", "result", "reading")
_UNIT = ("unit", "units")
_CLOCK_TEXT = re.compile(r"\d{1,2}:\d{2}(:\d{2}([.,]\d+)?)?(\s*[AaPp][Mm])?")
_DATE_TEXT = re.compile(r"\d{4}-\d{2}-\d{2}|\d{1,4}[./-]\d{1,2}[./-]\d{1,4}")
_EPOCH_TEXT = re.compile(r"1[0-9]{9}|1[0-9]{12}")
_COMMA = re.compile(r"[+-]?\d+,\d+")
_POINT = re.compile(r"[+-]?\d+\.\d+")
_LIKELY_KPA, _LIKELY_MMHG = (2.0, 15.0), (20.0, 160.0)
"""Spans of gas pressures in which one unit is likelier (common practice, no source): a hint, never an answer."""


@dataclass(frozen=True, slots=True)
class Proposal:
    """A mapping as far as it can be told, and hints by column for what has to be asked."""

    mapping: Mapping
    hints: dict[str, Message] = field(default_factory=dict)
    has_offsets: bool = False


def propose(table: Table, zone: str = "") -> Proposal:
    """Propose how a table is to be read. `zone` is proposed for times without an offset.

    Raises:
        Nothing: what cannot be told stays open.
    """
    time, offsets = _time(table, zone)
    taken = {time.date, time.clock}
    episode = _named(table, _EPISODE, taken)
    by = _named(table, _BY, taken | {episode})
    taken |= {episode, by}
    mapping = Mapping(header=table.header, time=time, episode_column=episode, by_column=by)
    long = _long(table, taken)
    hints: dict[str, Message] = {}
    if long is not None:
        mapping = replace(mapping, long=long)
    else:
        uses = _uses(table, taken, hints)
        mapping = replace(mapping, columns=uses)
    mapping = replace(mapping, decimal=_decimal(table, mapping), written_by=_writer(table, mapping))
    return Proposal(mapping, hints, offsets)


def _time(table: Table, zone: str) -> tuple[TimeUse, bool]:
    dated = [name for name in table.header if _is_time(table.column(name))]
    dated.sort(key=lambda name: _plain(name)[0] not in _TIME)
    if dated:
        values = table.column(dated[0])
        if all(_EPOCH_TEXT.fullmatch(v.partition(".")[0]) for v in values):
            return TimeUse(dated[0], order="epoch_s" if len(values[0].partition(".")[0]) == 10 else "epoch_ms"), True
        orders = fitting_orders(values)
        order = orders[0] if len(orders) == 1 else ""
        offsets = bool(orders) and all_have_offsets(values, orders[0])
        return TimeUse(dated[0], order=order, zone="" if offsets else zone), offsets
    dates = [n for n in table.header if table.column(n) and all(map(_DATE_TEXT.fullmatch, table.column(n)))]
    clocks = [n for n in table.header if table.column(n) and all(map(_CLOCK_TEXT.fullmatch, table.column(n)))]
    if not dates or not clocks:
        return TimeUse(zone=zone), False
    joined = [f"{d} {c}" for d, c in zip(table.column(dates[0]), table.column(clocks[0]), strict=False)]
    orders = fitting_orders(joined)
    return TimeUse(dates[0], clocks[0], orders[0] if len(orders) == 1 else "", zone), False


def _is_time(values: tuple[str, ...]) -> bool:
    if not values:
        return False
    epoch = all(_EPOCH_TEXT.fullmatch(v.partition(".")[0]) for v in values)
    return epoch or bool(fitting_orders(values))


def _named(table: Table, names: tuple[str, ...], taken: set[str]) -> str:
    return next((h for h in table.header if h not in taken and _plain(h)[0] in names), "")


def _long(table: Table, taken: set[str]) -> LongUse | None:
    """A long table has a column of names of quantities and one of values."""
    value = _named(table, _VALUE, taken)
    channel = _named(table, _CHANNEL, taken | {value})
    if not value or not channel:
        return None
    words = tuple(dict.fromkeys(table.column(channel)))[:200]
    names = {word: _channel(word) for word in words}
    if not any(names.values()):
        return None
    unit = _named(table, _UNIT, taken | {value, channel})
    read = list(zip(table.column(channel), table.column(value), strict=False))
    units = {}
    for word, key in names.items():
        if key:
            seen = tuple(v for w, v in read if w == word)
            units[word] = _unit(CHANNELS[key], _plain(word)[1]) or _evident_unit(CHANNELS[key], seen)
    units = {} if unit else units
    return LongUse(channel, value, unit, names, {k: v for k, v in units.items() if v})


def _uses(table: Table, taken: set[str], hints: dict[str, Message]) -> tuple[ColumnUse, ...]:
    uses: list[ColumnUse] = []
    used: set[str] = set()
    for name in table.header:
        key = "" if name in taken else _channel(name)
        if key in used or (key and not _can_hold(CHANNELS[key], table.column(name))):
            key = ""
        used |= {key} - {""}
        unit = ""
        if key:
            known = CHANNELS[key]
            unit = unit_of(key, name, table.column(name))
            hint = _hint(known, table.column(name)) if not unit and len(known.units) > 1 else None
            if hint is not None:
                hints[name] = hint
        uses.append(ColumnUse(name, key, unit))
    if any(CHANNELS[k].group is Group.GAS for k in used) and "gas_fio2" not in used:
        # among gases it is the FiO2 that the sample was taken on: as a setting it would be a change of settings
        uses = [replace(u, channel="gas_fio2") if u.channel == "fio2" else u for u in uses]
    return tuple(uses)


def unit_of(channel: str, column: str, values: Sequence[str]) -> str:
    """The unit of a column that holds a channel, where its name or its values settle it; "" where a person must.

    >>> unit_of("pip", "Ppeak (mbar)", ["18"]), unit_of("paco2", "gas 2", ["6.1"])
    ('hPa', '')
    """
    known = CHANNELS[channel]
    return _unit(known, _plain(column)[1]) or _evident_unit(known, values)


def _can_hold(known: Channel, values: tuple[str, ...]) -> bool:
    """Whether a column's values could be the channel's at all: numbers where it takes numbers."""
    if known.kind is not Kind.NUMBER or not values:
        return True
    return any(_as_number(v) is not None for v in values)


def _evident_unit(known: Channel, values: Sequence[str]) -> str:
    """The unit where there is one alone, or where the values themselves tell (a fraction from per cent, pH)."""
    if len(known.units) == 1:
        return known.unit
    numbers = [n for n in map(_as_number, values) if n is not None]
    if known.unit == "fraction" and numbers:
        if all(0.2 <= n <= 1.0 for n in numbers):
            return "fraction"
        return "%" if all(n >= 20 for n in numbers) else ""
    if known.unit == "pH" and 2 * sum(6.5 <= n <= 8.0 for n in numbers) > len(numbers):
        return "pH"  # no concentration in nmol/L lies there: a wrong value among them is refused by its line
    return ""


def _hint(known: Channel, values: tuple[str, ...]) -> Message | None:
    """What a gas pressure's values suggest."""
    numbers = [n for n in map(_as_number, values) if n is not None]
    if known.units is not MMHG_GAS or not numbers:
        return None
    low, high = min(numbers), max(numbers)
    told: dict[str, Value] = {"channel": known.key, "low": low, "high": high}
    if _LIKELY_KPA[0] <= low and high <= _LIKELY_KPA[1]:
        return Message("proposal.likely_kpa", {**told, "unit": "kPa"})
    if _LIKELY_MMHG[0] <= low and high <= _LIKELY_MMHG[1]:
        return Message("proposal.likely_mmhg", {**told, "unit": "mmHg"})
    return Message("proposal.either_unit", told)


def _decimal(table: Table, mapping: Mapping) -> str:
    """The decimal mark, where the values show one and not both; open otherwise."""
    names = [c.column for c in mapping.used] if mapping.long is None else [mapping.long.value]
    comma, point = _marks(table, names)
    if not comma and not point and mapping.long is None:  # whole numbers, or columns that a person has yet to name
        others = {mapping.time.date, mapping.time.clock, mapping.episode_column, mapping.by_column}
        comma, point = _marks(table, [name for name in table.header if name not in others])
    if table.book is not None and not comma:
        return "."
    if comma and not point:
        return ","
    return "." if not comma else ""


def _marks(table: Table, columns: Sequence[str]) -> tuple[int, int]:
    """How many values of columns are written with a decimal comma, and how many with a point."""
    values = [v for name in columns for v in table.column(name)]
    return sum(1 for v in values if _COMMA.fullmatch(v)), sum(1 for v in values if _POINT.fullmatch(v))


def _writer(table: Table, mapping: Mapping) -> str:
    """A machine's table has many rows of device channels; a gas or a note says a person's; of both it is asked."""
    groups = {CHANNELS[key].group for key in channels_of(mapping)}
    of_machine = Group.DEVICE in groups and len(table.first) >= 30
    if groups & {Group.GAS, Group.EVENT, Group.PROFILE}:
        return "" if of_machine else "person"
    return "device" if of_machine else ""


def _as_number(text: str) -> float | None:
    try:
        return float(text.replace(",", "."))
    except ValueError:
        return None


@lru_cache(maxsize=1024)
def _plain(name: str) -> tuple[str, str]:
    """A column's name without its unit, in small letters, and the unit.

    >>> _plain("pCO2 (kPa)"), _plain("leak_L/min"), _plain("Heart rate [bpm]")
    (('pco2', 'kPa'), ('leak', 'L/min'), ('heart rate', 'bpm'))
    """
    found = re.fullmatch(r"(.*?)\s*[(\[]\s*([^()\[\]]*)\s*[)\]]\s*", name)
    word, unit = (found[1], found[2]) if found else (name, "")
    if not unit:
        for mark in (",", "/", " in ", "_", " "):
            before, sep, after = word.rpartition(mark)
            if sep and before.strip() and _is_unit(after.strip()):
                word, unit = before, after.strip()
                break
            first, sep, rest = word.partition(mark)
            if sep and mark in ("_", " ", ",") and _is_unit(rest.strip()):
                word, unit = first, rest.strip()
                break
    return " ".join(re.sub(r"[_.\-:]+", " ", word).split()).casefold(), unit.strip()


@lru_cache(maxsize=1)
def _unit_names() -> frozenset[str]:
    units = {u for c in CHANNELS.values() for u in c.units}
    return frozenset(x.casefold() for u in units for x in (u.name, *u.spellings) if len(x) > 1 or x == "%")


def _is_unit(text: str) -> bool:
    return text.casefold() in _unit_names()


def _unit(known: Channel, text: str) -> str:
    """The channel's unit of that spelling; empty where it has none of it."""
    if not text:
        return ""
    try:
        return known.unit_named(text).name
    except RecordError:
        return ""


@lru_cache(maxsize=1)
def _words() -> dict[str, str]:
    found: dict[str, str] = {}
    for c in CHANNELS.values():
        for word in (c.key.replace("_", " "), c.name.casefold(), *c.short):
            if len(word) > 1:
                found.setdefault(word, c.key)
    for key, words in _MORE.items():
        found.update(dict.fromkeys(words, key))
    return found


def _channel(name: str) -> str:
    return _words().get(_plain(name)[0], "")
