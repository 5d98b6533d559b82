"""How the columns of a table become entries: which channel, which unit, which time, whose episode.

A mapping is kept by name in the store's layouts and recognised by the table's header. It is incomplete until every
question of `open_questions` is answered: nothing that could be read in two ways is guessed.
"""

from __future__ import annotations

from collections.abc import Mapping as Map
from dataclasses import dataclass, field, replace
from types import MappingProxyType
from typing import Protocol

from core.record.channels import CHANNELS, LEAK_DEFINITIONS, Kind
from core.record.message import Message, refuse
from storage.intake.writing import AS_FOUND, Writing, check_writing
from storage.rules import is_device_channel

PREFIX = "mapping:"
ORDERS = ("iso", "dmy", "mdy", "ymd", "epoch_s", "epoch_ms")
"""How a date is written: ISO 8601; day, month, year; month, day, year; year, month, day; seconds or ms since 1970."""
WRITERS = ("person", "device")
DECIMALS = (".", ",")
FORMAT = 2
"""1 knows nothing of `written`; a mapping without it is kept as 1, so that older programs go on reading it."""


@dataclass(frozen=True, slots=True)
class ColumnUse:
    """A column of a wide table: the channel it holds and its unit. An empty channel leaves the column out."""

    column: str
    channel: str = ""
    unit: str = ""


@dataclass(frozen=True, slots=True)
class TimeUse:
    """Where the time stands (one column, or date and clock), how it is written, and in which zone.

    `zone` is a zone's name for times without an offset; `repeated` says which of an hour that came twice is meant.
    """

    date: str = ""
    clock: str = ""
    order: str = ""
    zone: str = ""
    repeated: str = ""


@dataclass(frozen=True, slots=True)
class LongUse:
    """The columns of a long table, one value a row. `names` are its words for channels; `units` theirs."""

    channel: str
    value: str
    unit: str = ""
    names: Map[str, str] = field(default_factory=dict)
    units: Map[str, str] = field(default_factory=dict)


@dataclass(frozen=True, slots=True)
class Mapping:
    """How one kind of table is read. Wide: `columns`. Long: `long` and no columns.

    `written` is what a person said of how such a table is written; the rest of that is found anew in each.
    `codes` are local codes of results (HL7, FHIR) with their channels; a mapping of those alone has no header.
    """

    name: str = ""
    header: tuple[str, ...] = ()
    columns: tuple[ColumnUse, ...] = ()
    time: TimeUse = field(default_factory=TimeUse)
    long: LongUse | None = None
    episode_column: str = ""
    by_column: str = ""
    decimal: str = ""
    written_by: str = ""
    leak_definition: str = ""
    codes: Map[str, str] = field(default_factory=lambda: MappingProxyType({}))
    written: Writing = AS_FOUND
    format: int = FORMAT

    @property
    def used(self) -> tuple[ColumnUse, ...]:
        """The columns that are not left out."""
        return tuple(c for c in self.columns if c.channel)

    def with_column(self, column: str, channel: str, unit: str = "") -> Mapping:
        """The mapping with a column's use changed, or added."""
        use = ColumnUse(column, channel, unit)
        if any(c.column == column for c in self.columns):
            return replace(self, columns=tuple(use if c.column == column else c for c in self.columns))
        return replace(self, columns=(*self.columns, use))


def channels_of(mapping: Mapping) -> tuple[str, ...]:
    """The channels a mapping fills."""
    if mapping.long is not None:
        return tuple(dict.fromkeys(c for c in mapping.long.names.values() if c))
    return tuple(dict.fromkeys(c.channel for c in mapping.used))


def open_questions(mapping: Mapping, *, episode_given: bool, has_offsets: bool) -> tuple[Message, ...]:
    """What has to be answered before a table can be read by the mapping; empty when it is complete.

    `has_offsets`: the table's own times carry their offset.
    """
    asked: list[Message] = []
    if not mapping.time.date:
        asked.append(Message("mapping.no_time", {"accepted": "the column with date and time"}))
    elif mapping.time.order not in ORDERS:
        asked.append(Message("mapping.time_order", {"column": mapping.time.date, "accepted": " | ".join(ORDERS)}))
    needs_zone = not has_offsets and not mapping.time.order.startswith("epoch")
    if mapping.time.date and needs_zone and not mapping.time.zone:
        asked.append(Message("mapping.time_zone", {"accepted": "a time zone, e.g. Europe/Oslo"}))
    if not mapping.episode_column and not episode_given:
        asked.append(Message("mapping.episode", {"accepted": "a column, or one episode for the whole file"}))
    if not channels_of(mapping):
        asked.append(Message("mapping.nothing", {"accepted": "at least one column with a channel"}))
    asked += _about_values(mapping)
    if mapping.written_by not in WRITERS:
        asked.append(Message("mapping.writer", {"accepted": " | ".join(WRITERS)}))
    if "leak" in channels_of(mapping) and mapping.leak_definition not in LEAK_DEFINITIONS:
        asked.append(Message("mapping.leak", {"accepted": " | ".join(LEAK_DEFINITIONS)}))
    return tuple(asked)


def _about_values(mapping: Mapping) -> list[Message]:
    asked: list[Message] = []
    pairs = [(c.column, c.channel, c.unit) for c in mapping.used]
    if mapping.long is not None and not mapping.long.unit:
        long = mapping.long
        pairs = [(word, key, long.units.get(word, "")) for word, key in long.names.items() if key]
    seen: dict[str, str] = {}
    for column, key, unit in pairs:
        known = CHANNELS.get(key)
        if known is None:
            asked.append(Message("mapping.channel_unknown", {"column": column, "channel": key}))
            continue
        if mapping.long is None and key in seen:
            asked.append(Message("mapping.twice", {"channel": key, "first": seen[key], "second": column}))
        seen.setdefault(key, column)
        names = [u.name for u in known.units]
        if known.kind is Kind.NUMBER and len(names) > 1 and unit not in names:
            asked.append(Message("mapping.unit", {"column": column, "channel": key, "accepted": " | ".join(names)}))
    numeric = any(CHANNELS[k].kind is Kind.NUMBER for k in channels_of(mapping) if k in CHANNELS)
    if numeric and mapping.decimal not in DECIMALS:
        asked.append(Message("mapping.decimal", {"accepted": "point | comma"}))
    return asked


def to_text(mapping: Mapping) -> str:
    """The mapping as it is kept (JSON)."""
    import msgspec

    number = FORMAT if mapping.written != AS_FOUND else 1
    return msgspec.json.encode(replace(mapping, codes=dict(mapping.codes), format=number)).decode()


def from_text(text: str) -> Mapping:
    """A mapping as it was kept.

    Raises:
        RecordError: `mapping.unreadable`, `mapping.newer`, and as `check_writing`.
    """
    import msgspec

    try:
        found = msgspec.json.decode(text.encode(), type=Mapping)
    except (msgspec.DecodeError, msgspec.ValidationError) as error:
        raise refuse("mapping.unreadable", detail=str(error)[:200], accepted="a mapping of this program") from None
    if found.format > FORMAT:
        raise refuse("mapping.newer", format=found.format, accepted=FORMAT)
    check_writing(found.written)
    return replace(found, format=FORMAT)


class Layouts(Protocol):
    """Where mappings are kept: a store."""

    def layouts(self) -> Map[str, str]: ...

    def put_layout(self, name: str, text: str | None) -> None: ...


def kept_mappings(store: Layouts) -> dict[str, Mapping]:
    """The mappings kept in a store, by name; one that cannot be read any more is passed over."""
    found: dict[str, Mapping] = {}
    for name, text in store.layouts().items():
        if name.startswith(PREFIX):
            try:
                found[name.removeprefix(PREFIX)] = from_text(text)
            except ValueError:
                continue
    return found


def kept_mapping(store: Layouts, name: str) -> Mapping:
    """The mapping of that name.

    Raises:
        RecordError: `mapping.unknown`, `mapping.unreadable`.
    """
    text = store.layouts().get(PREFIX + name)
    if text is None:
        known = ", ".join(sorted(kept_mappings(store))) or "none is kept yet"
        raise refuse("mapping.unknown", name=name[:80], accepted=known)
    return from_text(text)


def keep_mapping(store: Layouts, mapping: Mapping) -> None:
    """Keep a mapping by its name; one of the same name is replaced.

    Raises:
        RecordError: `mapping.no_name`.
    """
    if not mapping.name.strip() or len(mapping.name) > 80:
        raise refuse("mapping.no_name", accepted="1 to 80 letters")
    store.put_layout(PREFIX + mapping.name, to_text(mapping))


def forget_mapping(store: Layouts, name: str) -> None:
    """Forget a mapping."""
    store.put_layout(PREFIX + name, None)


def fits(mapping: Mapping, header: tuple[str, ...]) -> bool:
    """Whether a mapping is of tables with this header: the same names, letters' case and order aside.

    >>> fits(Mapping("a", ("Time", "pH")), ("ph", "time"))
    True
    """
    return bool(mapping.header) and {_plain(h) for h in mapping.header} == {_plain(h) for h in header}


def _plain(name: str) -> str:
    return " ".join(name.split()).casefold()


def is_sampled(mapping: Mapping, channel: str) -> bool:
    """Whether a channel's values become device samples: a machine wrote them and the channel can hold them."""
    return mapping.written_by == "device" and is_device_channel(channel)
