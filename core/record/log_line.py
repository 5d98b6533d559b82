"""One typed line becomes readings at one moment: `14:20 ipap 16 epap 6 fio2 35%`, `16/6 35`, `gas sent`.

The grammar, in order:

    [time] item... | item... time
    time   14:20 | yesterday 23:40 | first 01:30 | second 01:30 | 20m ago | 1h ago | now
    item   16/6 [35]             IPAP / EPAP, then FiO2
           ps 10                 pressure support: IPAP is EPAP + 10
           bp 118/64             systolic / diastolic pressure
           CHANNEL VALUE [UNIT]  a key or short word of the registry; the value may touch it: rr28
           cpap 10 [40]          one pressure, then FiO2
           MODE                  bpap-st, cpap, off ... alone
           MOMENT [time]         support started 01:20: a fact that is a time; without one the line's own
           EVENT                 gas sent, mask off ... alone; note, told, drug and texts take the rest

Nothing is recorded here: the line says what it would record, asks about soft limits, and refuses in words.
"""

from __future__ import annotations

import re
from collections.abc import Callable
from dataclasses import dataclass
from math import isnan
from typing import NoReturn

from core.record.channels import CHANNELS, Channel, Group, Kind
from core.record.entries import NewEntry, from_reading
from core.record.instant import HOUR, Instant, iso
from core.record.line_time import check_no_bare_time, ends_in_time, meant_ago, moment_typed, read_time, time_behind
from core.record.line_words import CHANNEL_WORDS, names_beginning, parted
from core.record.message import Message, refuse
from core.record.reading import Reading, read_value
from core.record.settings import Settings, settings_after
from core.record.typed_first import INSTEAD, MODE_WORDS, named_apart, same_as, spaced_pair, two_meanings
from core.record.units import MMHG_GAS

EXAMPLE = "16/6 35 | ipap 16 epap 6 fio2 35% | 14:20 rr 28 spo2 91 | gas sent | note ..."

_NUMBER = re.compile(r"[+-]?(?:\d+(?:[.,]\d+)?|[.,]\d+)")
_VALUE = re.compile(r"([+-]?(?:\d+(?:[.,]\d+)?|[.,]\d+))(.*)")
_PAIR = re.compile(r"(\d+(?:[.,]\d+)?)/(\d+(?:[.,]\d+)?)")
OXYGEN_FORMS = "fio2 40% | flow 4"
LEAST_PERCENT = 21.0
"""No flow of a mask or a wall reaches this in L/min but high-flow oxygen, which is set by FiO2 as well."""
LONG_AGO = 8 * HOUR
"""A typed time further back than most of a shift is said aloud before it is recorded."""
_TAKES_REST = frozenset({"note", "told", "drug", "review", "alarm"})


@dataclass(frozen=True, slots=True)
class LogLine:
    """What a line would record: readings at one moment, and whether that moment was typed.

    `support_before` and `support_after` are pressure supports in cmH2O (NaN where not known); `questions` are
    the soft limits to confirm; `notes` say what else the line implies.
    """

    at: Instant
    time_typed: bool
    readings: tuple[Reading, ...]
    support_before: float
    support_after: float
    notes: tuple[Message, ...] = ()

    @property
    def questions(self) -> tuple[Message, ...]:
        """Soft limits passed: ask before recording."""
        return tuple(doubt for r in self.readings for doubt in r.doubts)

    def entries(self, episode: str, *, by: str, zone: str, confirmed: bool) -> tuple[NewEntry, ...]:
        """The entries to append. Unconfirmed soft limits are marked doubtful."""
        return tuple(from_reading(episode, self.at, r, by=by, zone=zone, confirmed=confirmed) for r in self.readings)


def read_line(
    text: str,
    *,
    now: Instant,
    zone: str,
    in_force: Settings | Callable[[Instant], Settings],
    gas_unit: str = "mmHg",
) -> LogLine:
    """Read one line over the settings in force at its moment (`SettingsInForce.at` serves as `in_force`).

    A gas has one pressure unit: a pressure typed without one is in that of the line's other, else in `gas_unit`,
    the ward's own. A `/` before the line, the key that leads to it, says nothing.

    Raises:
        RecordError: naming the word that could not be read and what is accepted.
    """
    at, rest, typed = read_time(text.strip().lstrip("/ "), now, zone)
    if not rest:
        raise refuse("line.empty", accepted=EXAMPLE)
    before = in_force if isinstance(in_force, Settings) else in_force(at)

    def moment(said: str) -> Instant:
        return moment_typed(said, now, zone) if said else at

    reader = _Items(rest.split(), before, gas_unit, moment)
    readings = reader.read()
    if reader.time_behind and typed:
        raise refuse("line.time_twice", accepted="one time on a line")
    if reader.time_behind:  # read anew over the settings of that moment
        first = f"{reader.time_behind} {' '.join(reader.words[: reader.i])}"
        return read_line(first, now=now, zone=zone, in_force=in_force, gas_unit=gas_unit)
    if not typed and (inside := ends_in_time(reader.rest)):
        reader.notes.append(Message("line.time_in_words", {"time": inside}))
    if typed and now - at > LONG_AGO:
        reader.notes.append(Message("line.long_ago", {"hours": (now - at) / HOUR}))
    keys = {r.channel.key for r in readings if r.channel.group is Group.GAS}
    if keys - {"gas_fio2"} and "site" not in keys:
        reader.notes.append(Message("line.site_assumed"))
    after = settings_after(before, readings)
    if after.is_bilevel and after.ipap <= after.epap:
        raise refuse("settings.ipap_not_above_epap", ipap=after.ipap, epap=after.epap, accepted="IPAP above EPAP")
    return LogLine(at, typed, tuple(readings), before.pressure_support, after.pressure_support,
                   tuple(reader.notes))  # fmt: skip


def _check_no_step(name: str, text: str) -> None:
    """Refuse `ipap +4`: four more, or four? Only a base excess is written with a sign."""
    if text[:1] in ("+", "-"):
        raise refuse("line.signed", channel=name, value=text, accepted="the new value itself, without a sign")


class _Items:
    """Reads the items of a line from left to right."""

    def __init__(self, words: list[str], in_force: Settings, gas_unit: str, moment: Callable[[str], Instant]) -> None:
        self.words = words
        self.gas_unit = gas_unit
        self.moment = moment
        self.time_behind = ""
        """A time that stands last on the line; `i` is where it begins then, and nothing was settled."""
        self.rest = ""
        """The words that a text took."""
        self.i = 0
        self.in_force = in_force
        self.notes: list[Message] = []
        self.readings: list[Reading] = []
        self.support: str | None = None

    def read(self) -> list[Reading]:
        while self.i < len(self.words):
            if self.readings and (behind := time_behind(self.words[self.i :])):
                self.time_behind = behind
                return self.readings
            self._tidy()
            self._item()
        self._settle_pressures()
        self._settle_support()
        self._settle_mode()
        keys = [r.channel.key for r in self.readings]
        for key in keys:
            if keys.count(key) > 1:
                raise refuse("line.twice", channel=key, accepted="one value of a channel on a line")
        return self.readings

    def _tidy(self) -> None:
        """Write what stands here as the grammar has it, where it can mean one thing only."""
        word = self.words[self.i]
        pair, count = spaced_pair(self.words[self.i : self.i + 3])
        if pair:
            self.words[self.i : self.i + count] = [pair]
        elif (apart := named_apart(word, CHANNEL_WORDS)) is not None:
            self.words[self.i : self.i + 1] = apart
        else:
            same, count = same_as(self.words[self.i :])
            if count:
                self.words[self.i : self.i + count] = same

    def _item(self) -> None:
        word = self.words[self.i]
        low = word.casefold()
        if match := _PAIR.fullmatch(word):
            self.i += 1
            self._add("ipap", match[1])
            self._add("epap", match[2])
            self._bare_fio2()
        elif low == "ps":
            self.support = self._next_number("ps")
        elif (channel := self._channel()) is not None:
            self._channel_item(channel)
        elif low in ("o2", "oxygen"):
            self._oxygen()
        elif (named := self._mode()) is not None:
            self._add("mode", named)
        elif _NUMBER.fullmatch(word) and not self.readings:
            self._bare_numbers()
        elif (apart := parted(word)) is not None:
            self.words[self.i : self.i + 1] = apart
        else:
            self._refuse_word(word)

    def _refuse_word(self, word: str) -> NoReturn:
        if not self.readings:
            check_no_bare_time(self.words[self.i :])
        elif self.i + 1 == len(self.words):  # mask off 0350
            check_no_bare_time([word, *self.words[: self.i]], digits_only=True)
        mode = self._got("mode")
        if (two := two_meanings(self.words[self.i :], mode.words if mode is not None else None)) is not None:
            raise refuse("line.two_meanings", word=two[0], accepted=two[1])
        if _NUMBER.fullmatch(word):
            raise refuse("line.number_alone", value=word, accepted=EXAMPLE)
        instead, longer = meant_ago(word) or INSTEAD.get(word.casefold()), names_beginning(word)
        if longer and instead is None:  # `mask offf`: the word behind it is the one to mend
            word, instead = " ".join(self.words[self.i : self.i + 2]), " | ".join(longer)
        raise refuse("line.word_unknown", word=word, accepted=instead or EXAMPLE)

    def _mode(self) -> str | None:
        """The mode named here, two words first; leaves the reader behind it."""
        for count in (2, 1):
            mode = MODE_WORDS.get(" ".join(self.words[self.i : self.i + count]).casefold())
            if mode is not None:
                self.i += count if self.i + count <= len(self.words) else 1
                return mode
        return None

    def _channel(self) -> Channel | None:
        """The channel named here, two words first; leaves the reader behind the name."""
        for count in (3, 2, 1):
            name = " ".join(self.words[self.i : self.i + count]).casefold()
            channel = CHANNEL_WORDS.get(name)
            if channel is not None and self.i + count <= len(self.words):
                if channel.key == "cpap" and not self._number_follows(count):
                    return None  # "cpap" alone is the mode
                self.i += count
                return channel
        return None

    def _number_follows(self, offset: int) -> bool:
        follow = self.i + offset
        return follow < len(self.words) and _NUMBER.match(self.words[follow]) is not None

    def _channel_item(self, channel: Channel) -> None:
        if channel.kind is Kind.MARK and channel.key not in _TAKES_REST:
            self.readings.append(read_value(channel, ""))
        elif channel.kind in (Kind.MARK, Kind.TEXT, Kind.INSTANT):
            rest = " ".join(self.words[self.i :])
            self.i = len(self.words)
            if channel.kind is Kind.INSTANT:
                rest = iso(self.moment(rest))
            else:
                self.rest = rest
            self.readings.append(read_value(channel, rest))
        elif channel.kind is Kind.CHOICE:
            self._choice(channel)
        else:
            self._number(channel)

    def _choice(self, channel: Channel) -> None:
        longest = max(len(c.split()) for c in channel.choices)
        for count in range(min(longest, len(self.words) - self.i), 0, -1):
            text = " ".join(self.words[self.i : self.i + count])
            if any(text.casefold() == c.casefold() for c in channel.choices):
                self.i += count
                self._add(channel.key, text)
                return
        text = self.words[self.i] if self.i < len(self.words) else ""
        self.i += 1
        self._add(channel.key, MODE_WORDS.get(text.casefold(), text) if channel.key == "mode" else text)

    def _number(self, channel: Channel) -> None:
        if self.i < len(self.words):
            self.words[self.i : self.i + 1] = [w for w in (self.words[self.i].lstrip(":="),) if w]
        if self.i >= len(self.words):
            raise refuse("line.value_missing", channel=channel.key, accepted=f"{channel.key} NUMBER")
        if channel.key == "sbp":
            self._tidy()
        if channel.key == "sbp" and (pair := _PAIR.fullmatch(self.words[self.i])):
            self.i += 1
            self._add("sbp", pair[1])
            self._add("dbp", pair[2])
            return
        match = _VALUE.fullmatch(self.words[self.i])
        if match is None:
            raise refuse("value.not_a_number", channel=channel.key, value=self.words[self.i],
                         accepted=f"a number in {channel.unit or 'its unit'}")  # fmt: skip
        self.i += 1
        self._add(channel.key, match[1], match[2] or self._unit_word(channel))
        if channel.key == "cpap":
            self._bare_fio2()

    def _unit_word(self, channel: Channel) -> str:
        """A unit as a word of its own, when the next word is one of this channel's and names no channel."""
        if self.i >= len(self.words):
            return ""
        word = self.words[self.i].casefold()
        names = {n for u in channel.units for n in (u.name.casefold(), *u.spellings) if n}
        if word in names and word not in CHANNEL_WORDS:
            self.i += 1
            return word
        return ""

    def _bare_numbers(self) -> None:
        """`16 6 35`: two bare numbers are IPAP and EPAP, a third FiO2. One alone says nothing."""
        here = self.words[self.i :]
        if len(here) > 1:
            check_no_bare_time(here, digits_only=True)
        if len(here) < 2 or not _NUMBER.fullmatch(here[1].rstrip("%")):
            if len(here) > 1:
                check_no_bare_time(here)
            raise refuse("line.number_alone", value=self.words[self.i], accepted=EXAMPLE)
        self._add("ipap", self.words[self.i])
        self._add("epap", self.words[self.i + 1])
        self.i += 2
        self._bare_fio2()

    def _bare_fio2(self) -> None:
        if self.i < len(self.words) and (match := re.fullmatch(r"(\d+(?:[.,]\d+)?)(%?)", self.words[self.i])):
            self.i += 1
            self._add("fio2", match[1], match[2])

    def _next_text(self, name: str) -> str:
        self.i += 1
        if self.i >= len(self.words):
            raise refuse("line.value_missing", channel=name, accepted=f"{name} NUMBER")
        self.i += 1
        return self.words[self.i - 1]

    def _next_number(self, name: str) -> str:
        self.i += 1
        if self.i >= len(self.words) or not _NUMBER.fullmatch(self.words[self.i]):
            raise refuse("line.value_missing", channel=name, accepted=f"{name} NUMBER")
        _check_no_step(name, self.words[self.i])
        self.i += 1
        return self.words[self.i - 1]

    def _add(self, key: str, text: str, unit: str = "") -> None:
        channel = CHANNELS[key]
        if channel.hard is not None and channel.hard[0] >= 0:
            _check_no_step(key, text)
        if not unit and channel.units is MMHG_GAS:
            if channel.group is Group.GAS:  # its unit is known once the whole gas has been read
                self.readings.append(Reading(channel, None, None, text, "", None))
                return
            unit = self.gas_unit
        self.readings.append(read_value(channel, text, unit))

    def _settle_pressures(self) -> None:
        """A unit written behind one pressure of the gas counts for all that have none."""
        pressures = [r for r in self.readings if r.channel.group is Group.GAS and r.channel.units is MMHG_GAS]
        written = {r.raw_unit for r in pressures if r.raw_unit}
        unit = written.pop() if len(written) == 1 else self.gas_unit
        bare = [r for r in pressures if not r.raw_unit]
        self.readings = [read_value(r.channel, r.raw, unit) if r in bare else r for r in self.readings]
        if bare and len(bare) < len(pressures) and not written:
            self.notes.append(Message("line.gas_unit", {"unit": unit}))

    def _oxygen(self) -> None:
        """`o2 35%` is an FiO2, `o2 4 l` a flow; a small bare number could be either, so it is asked about."""
        number = self._next_text("o2")
        match = _VALUE.fullmatch(number)
        if match is None:
            raise refuse("value.not_a_number", channel="o2", value=number, accepted=OXYGEN_FORMS)
        unit = match[2].casefold() or self._unit_word(CHANNELS["o2_flow"])
        if unit in ("%", "percent", "pct") or (not unit and float(match[1].replace(",", ".")) >= LEAST_PERCENT):
            self._add("fio2", match[1], unit)
        elif unit:
            self._add("o2_flow", match[1], unit)
        else:
            raise refuse("line.oxygen_unclear", value=number, accepted=OXYGEN_FORMS)

    def _got(self, key: str) -> Reading | None:
        return next((r for r in self.readings if r.channel.key == key), None)

    def _settle_support(self) -> None:
        """Turn `ps 10` into the IPAP it means over the EPAP typed or in force."""
        if self.support is None:
            return
        if self._got("ipap") is not None:
            raise refuse("line.twice", channel="ipap", accepted="ps or ipap, not both")
        epap = self._got("epap")
        base = epap.number if epap is not None and epap.number is not None else self.in_force.epap
        if isnan(base):
            raise refuse("line.epap_needed", accepted="ps 10 epap 5")
        total = base + float(self.support.replace(",", "."))
        self._add("ipap", f"{total:g}")
        self.notes.append(Message("line.ps_means_ipap", {"ps": self.support, "epap": base, "ipap": total}))

    def _settle_mode(self) -> None:
        """One pressure is CPAP; two pressures need a mode with two."""
        mode = self._got("mode")
        named = mode.words if mode is not None else self.in_force.mode
        if self._got("cpap") is not None and named != "CPAP":
            if mode is not None:
                raise refuse("line.mode_contradicts", mode=named, channel="cpap", accepted="cpap 8")
            self._add("mode", "CPAP")
            self.notes.append(Message("line.mode_becomes", {"mode": "CPAP", "before": self.in_force.mode}))
        if (self._got("ipap") or self._got("epap")) and named in ("CPAP", "high-flow nasal", "off"):
            raise refuse("line.mode_needed", mode=named, accepted="bpap-st 16/6")
