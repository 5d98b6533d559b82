"""What a typed line would record, in words: for whom, when, each value with its unit, and what it can act on."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass, replace
from math import isnan

from PySide6.QtCore import QCoreApplication

from app.look.formats import clock, day, quantity, trimmed
from app.operations.entry import Preview
from app.telling.phrases import channel_name
from app.telling.support_course import SHOWN
from app.words import Reader, sentence
from core.judgement.setting_change import effect_of_change
from core.record.channels import CHANNELS, Group, Kind
from core.record.entries import Action, NewEntry
from core.record.episode import Episode
from core.record.instant import HOUR, Instant
from core.record.reading import Reading
from core.record.settings import Settings, SettingsInForce

translate = QCoreApplication.translate
OWN_RATE_AGE = HOUR
MOST_NAMES = 6
_GAS_PRESSURES = ("paco2", "pao2", "usual_paco2")


@dataclass(frozen=True, slots=True)
class PreviewWords:
    """`head`: for whom and when. `values`: each reading. `effects`: support before and after, what can act.
    `questions`: what must be answered with yes."""

    head: str
    values: tuple[str, ...]
    effects: tuple[str, ...]
    questions: tuple[str, ...]


def preview_words(preview: Preview, record: Episode | None, now: Instant, reader: Reader) -> PreviewWords:
    """The preview in words. `record` gives the settings in force; None where the episode is not known yet."""
    line = preview.line
    effects = [sentence(m, reader) for m in line.notes]
    if record is not None and any(r.channel.group is Group.SETTING for r in line.readings):
        effects += _effects(record, line.at, line.readings, reader)
    elif _has_support(line.support_before, line.support_after):
        effects.append(_support_words(line.support_before, line.support_after))
    return PreviewWords(
        translate("strip", "{label}, {when}").format(label=preview.label, when=_when(line.at, now, reader.zone)),
        tuple(reading_words(r, reader) for r in line.readings),
        tuple(effects),
        tuple(sentence(m, reader) for m in preview.questions),
    )


def reading_words(reading: Reading, reader: Reader) -> str:
    """One reading as it will be kept: name, value, unit; what was typed beside it where the unit differs."""
    name = channel_name(reading.channel.key)
    if reading.value is None:
        return name
    if reading.channel.kind is Kind.INSTANT:
        return f"{name} {reader.time(int(reading.number or 0))}"
    if isinstance(reading.value, str):
        told = quantity(reading.channel.key, reading.value)
        return f"{name}: {told}" if reading.channel.group is not Group.SETTING else f"{name} {told}"
    if reading.channel.key in _GAS_PRESSURES and reading.raw_unit in ("mmHg", "kPa"):
        raw = reading.raw.replace(",", ".")
        other = "kPa" if reading.raw_unit == "mmHg" else "mmHg"
        return f"{name} {raw} {reading.raw_unit} ({quantity(reading.channel.key, reading.value, other)})"
    text = quantity(reading.channel.key, reading.value, reader.gas_unit)
    if (
        reading.channel.group is Group.GAS
        and reading.decimals is not None
        and reading.raw_unit == reading.channel.unit
    ):
        text = f"{reading.raw.replace(',', '.')} {text.partition(' ')[2]}".strip()
    return f"{name} {text}"


def recorded_words(entries: Sequence[NewEntry], now: Instant, reader: Reader) -> str:
    """What was recorded: its moment and each value, as the preview said it."""
    values = [
        reading_words(Reading(CHANNELS[e.channel], e.number, e.words, e.raw, e.raw_unit, e.decimals), reader)
        if e.channel in CHANNELS
        else e.words or e.channel
        for e in entries
    ]
    moments = dict.fromkeys(_when(e.at, now, reader.zone) for e in entries)
    return f"{', '.join(moments)}: {', '.join(values)}"


def undone_words(entries: Sequence[NewEntry]) -> str:
    """What was taken back: the names of its values, and how many more where they are many."""
    names = list(dict.fromkeys(channel_name(e.channel) for e in entries))
    if len(names) <= MOST_NAMES:
        return ", ".join(names)
    told = translate("strip", "{names} and {count} more")
    return told.format(names=", ".join(names[: MOST_NAMES - 1]), count=len(names) - MOST_NAMES + 1)


def taken_back_words(entries: Sequence[NewEntry], now: Instant, reader: Reader) -> str:
    """What an undo would take back, before it does."""
    action = entries[0].action
    if action is Action.WITHDRAW:
        return translate("strip", "the withdrawal of {what}").format(what=undone_words(entries))
    if action in (Action.FLAG, Action.DUE):
        return translate("strip", "the word '{what}'").format(what=entries[0].words or "")
    if action in (Action.MASK, Action.SHIFT):  # their numbers are times and no value of the channel
        meant = {Action.MASK: translate("strip", "that device samples do not count ({what})"),
                 Action.SHIFT: translate("strip", "that device samples belong to another time ({what})")}  # fmt: skip
        return meant[action].format(what=undone_words(entries))
    text = {Action.CORRECT: translate("strip", "the correction to {what}"),
            Action.MOVE: translate("strip", "the move to this patient of {what}")}.get(action, "{what}")  # fmt: skip
    return text.format(what=recorded_words(entries, now, reader))


def _when(at: Instant, now: Instant, zone: str) -> str:
    told = clock(at, zone)
    if day(at, zone) != day(now, zone):
        return f"{day(at, zone)} {told}"
    return translate("strip", "now ({time})").format(time=told) if at == now else told


def _effects(record: Episode, at: Instant, readings: tuple[Reading, ...], reader: Reader) -> list[str]:
    before = SettingsInForce(record).at(at)
    after = with_readings(before, readings)
    told = effect_of_change(before, after, own_rate(record, at))
    settings = [r for r in readings if r.channel.key in SHOWN]
    if settings and all(getattr(before, r.channel.key) == r.value for r in settings):
        return [translate("strip", "Nothing changes: it is set like this already.")]
    words = [sentence(m, reader) for m in told]
    if not any(m.key.startswith("effect.pressure_support") or "support" in m.key for m in told) and _has_support(
        before.pressure_support, after.pressure_support
    ):
        words.insert(0, _support_words(before.pressure_support, after.pressure_support))
    return words


def with_readings(before: Settings, readings: tuple[Reading, ...]) -> Settings:
    """The settings in force once the readings are."""
    got = {r.channel.key: r.value for r in readings if r.channel.key in SHOWN and r.value is not None}
    if "o2_flow" in got and "fio2" not in got:
        got["fio2"] = 0.21 if got["o2_flow"] == 0 else float("nan")
    elif "fio2" in got and "o2_flow" not in got:
        got["o2_flow"] = float("nan")
    return replace(before, **got)  # type: ignore[arg-type]


def own_rate(record: Episode, at: Instant) -> float | None:
    """The patient's own rate, counted or by the device, at most an hour old."""
    for channel in ("rr", "rr_total"):
        series = record.number(channel)
        i = series.last_at_or_before(at)
        if i >= 0 and at - int(series.t[i]) <= OWN_RATE_AGE:
            return float(series.v[i])
    return None


def _has_support(before: float, after: float) -> bool:
    return not isnan(after) and (isnan(before) or before != after)


def _support_words(before: float, after: float) -> str:
    if isnan(before):
        return translate("strip", "Pressure support {after} cmH2O.").format(after=trimmed(after))
    return translate("strip", "Pressure support {before} to {after} cmH2O.").format(
        before=trimmed(before), after=trimmed(after)
    )
