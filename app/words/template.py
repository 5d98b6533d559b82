"""Sentences with named values: how a template and a message become text.

    "{channel:name} {value} is below {low:0}."     a value, and after the colon how it is written
    "[[ Recorded by {by}.]]"                        left out when a value inside is absent
    "[[!by| Nobody said who.]]"                     only there when that value is absent
    "{where:pick below=under;above=over}"          a word for a value that is one of a few

How values are written (see `_WRITERS`): `time` an instant, `clock` its hour and minute, `0` to `3` fixed
decimals, `+2` with sign, `trim` at most two decimals, `gas` a gas pressure in the reader's unit, `gas+` with
sign, `fraction` an FiO2 in per cent, `name` a channel's name, `unit` its unit, `of` a value of the channel named
in `channel`, `q` of the quantity named in `quantity` (`q+` with sign, `qn` a noise limit, `qt` as typed),
`minutes` a length of time, `hours`, `list`, `marker` and `due` a marker's and a due item's name. In a `pick`, `#`
stands for the value itself.
"""

from __future__ import annotations

import logging
import re
from collections.abc import Callable, Mapping
from dataclasses import dataclass
from math import isnan

from app.look import formats
from app.telling.language import in_language
from app.words.shown_difference import difference_text, pressure_difference
from core.record.channels import CHANNELS
from core.record.instant import Instant
from core.record.message import Value
from core.record.units import MMHG_PER_KPA

_log = logging.getLogger("luffmark")

FIELD = re.compile(r"\{(\w+)(?::([^{}]*))?\}")
_NUMBER = re.compile(r"[\d.]+")
_OPTIONAL = re.compile(r"\[\[(.*?)\]\]", re.DOTALL)
_WHEN_ABSENT = re.compile(r"!(\w+)\|(.*)", re.DOTALL)
MISSING = "?"


@dataclass(frozen=True, slots=True)
class Reader:
    """Whom a sentence is for: the zone of wall-clock times, the unit of gas pressures, the language.

    `translate` turns a template into the reader's language: by default that of `speak`. `near` is a stretch of
    time whose dates the page itself states: moments in it are told by the clock alone.
    """

    zone: str = "UTC"
    gas_unit: str = "mmHg"
    translate: Callable[[str], str] = in_language
    near: tuple[Instant, Instant] | None = None

    def time(self, at: Instant) -> str:
        """A moment in words."""
        if self.near is not None and self.near[0] <= at <= self.near[1]:
            return formats.clock(at, self.zone)
        return formats.wall(at, self.zone)

    def name(self, channel: str) -> str:
        """What a channel or computed quantity is called inside a sentence."""
        return self.translate(quantity_name(channel))


Writer = Callable[[Value, Mapping[str, Value], Reader], str]


def quantity_name(key: str) -> str:
    """The name of a channel or of a computed quantity, as it stands inside a sentence.

    >>> quantity_name("rr"), quantity_name("pf"), quantity_name("pao2")
    ('respiratory rate', 'P/F', 'PaO2')
    """
    if key in _QUANTITIES:
        return _QUANTITIES[key]
    known = CHANNELS.get(key)
    if known is None:
        return key.replace("_", " ")
    return known.name if any(c.isupper() for c in known.name[1:]) else known.name[0].lower() + known.name[1:]


_QUANTITIES = {
    "ph": "pH", "pf": "P/F", "sf": "S/F", "rox": "ROX", "hacor": "HACOR", "hacor_updated": "updated HACOR",
    "news2": "NEWS2", "ps": "pressure support", "pressure_support": "pressure support", "aa": "A-a gradient",
    "sbe": "standard base excess", "hco3_calculated": "calculated bicarbonate", "oxygen": "oxygen",
}  # fmt: skip


def fill(template: str, values: Mapping[str, Value], reader: Reader) -> str:
    """The sentence of a template. A value that is not there is written `?` and logged; it never raises."""

    def optional(match: re.Match[str]) -> str:
        if only := _WHEN_ABSENT.match(match[1]):
            return only[2] if _is_absent(values.get(only[1])) else ""
        absent = any(_is_absent(values.get(f[1])) for f in FIELD.finditer(match[1]))
        return "" if absent else match[1]

    def field(match: re.Match[str]) -> str:
        if match[1] not in values:
            _log.warning("no value %s for %r", match[1], template)
            return MISSING
        return write(values[match[1]], match[2] or "", values, reader)

    return FIELD.sub(field, _OPTIONAL.sub(optional, template))


def fields(template: str) -> frozenset[str]:
    """The values that a template cannot do without."""
    return frozenset(m[1] for m in FIELD.finditer(_OPTIONAL.sub("", template)))


def all_fields(template: str) -> frozenset[str]:
    """Every value that a template names."""
    return frozenset(m[1] for m in FIELD.finditer(template))


def _is_absent(value: Value) -> bool:
    return value is None or value == "" or (isinstance(value, float) and isnan(value))


def write(value: Value, how: str, values: Mapping[str, Value], reader: Reader) -> str:
    """One value as `how` says."""
    if how.startswith("pick "):
        return _picked(value, how[5:])
    if _is_absent(value):
        return reader.translate(formats.ABSENT)
    writer = _WRITERS.get(how)
    if writer is None:
        raise ValueError(f"{how!r} is no way to write a value; accepted: {', '.join(_WRITERS)}")
    try:
        return writer(value, values, reader)
    except (TypeError, ValueError):
        _log.warning("a value of type %s cannot be written as %s", type(value).__name__, how)
        return str(value)


def _picked(value: Value, choices: str) -> str:
    words = dict(pair.split("=", 1) for pair in choices.split(";"))
    if value is None or isinstance(value, bool):
        key = {True: "yes", False: "no", None: "none"}[value]
    else:
        key = value if isinstance(value, str) else formats.trimmed(value)
    return words.get(key, words.get("else", str(value))).replace("#", key)


def _number(value: Value) -> float:
    if isinstance(value, bool) or value is None:
        raise TypeError(value)
    return float(value)


def _plain(value: Value, _values: Mapping[str, Value], _reader: Reader) -> str:
    if isinstance(value, bool):
        return "yes" if value else "no"
    return value if isinstance(value, str) else formats.trimmed(_number(value))


def _of_channel(value: Value, values: Mapping[str, Value], reader: Reader) -> str:
    amount = value if isinstance(value, str) else _number(value)
    return formats.quantity(str(values.get("channel", "")), amount, reader.gas_unit)


def _of_channel_as_typed(value: Value, values: Mapping[str, Value], reader: Reader) -> str:
    """A value as it was typed, what it is kept as beside it where that reads otherwise: rounded, it is another."""
    raw = values.get("raw")
    if not raw or isinstance(value, str):
        return _of_channel(value, values, reader)
    kept = str(values.get("channel", "")), _number(value), str(raw), str(values.get("raw_unit", ""))
    return formats.logged(*kept, reader.gas_unit)


def quantity_text(quantity: str, value: float, reader: Reader, *, sign: bool = False, noise: bool = False) -> str:
    """A value of pH, PaCO2, P/F, rate or SpO2 with its unit; noise limits keep the digits they need."""
    if quantity == "ph":
        return (formats.signed if sign else formats.fixed)(value, 3 if noise else 2)
    if quantity in ("paco2", "pao2", "pf", "aa"):
        if noise and reader.gas_unit == "mmHg":
            return f"{formats.trimmed(value, 1)} mmHg"
        return formats.gas_pressure(value, reader.gas_unit, sign=sign)
    if quantity in CHANNELS and not sign and not noise:
        return formats.quantity(quantity, value, reader.gas_unit)
    if quantity == "fio2":
        return f"{formats.signed(value * 100, 0)} %" if sign else formats.fraction(value)
    unit = formats.shown_unit(quantity) if quantity in CHANNELS else ""
    decimals = {"sf": 0, "rox": 2}.get(quantity, CHANNELS[quantity].decimals if quantity in CHANNELS else 1)
    return formats.with_unit(formats.signed(value, decimals) if sign else formats.trimmed(value, decimals or 1), unit)


def _quantity(*, sign: bool = False, noise: bool = False) -> Writer:
    def written(value: Value, values: Mapping[str, Value], reader: Reader) -> str:
        if sign and _lies_between(value, values):
            return _difference(values, reader)
        return quantity_text(str(values.get("quantity", "")), _number(value), reader, sign=sign, noise=noise)

    return written


def _lies_between(value: Value, values: Mapping[str, Value]) -> bool:
    """Whether a difference is that of the two values told beside it."""
    before, after = values.get("before"), values.get("after")
    known = isinstance(before, (int, float)) and isinstance(after, (int, float))
    return known and abs(_number(after) - _number(before) - _number(value)) < 1e-6


def _difference(values: Mapping[str, Value], reader: Reader) -> str:
    """The difference of two values as they are shown."""
    quantity, before, after = str(values.get("quantity", "")), _number(values["before"]), _number(values["after"])
    if quantity in ("paco2", "pao2", "pf", "aa"):
        return pressure_difference(before, after, reader.gas_unit)
    if quantity == "ph":
        return difference_text(before, after, 2)
    if quantity == "fio2":
        return f"{difference_text(before * 100, after * 100, 0)} %"
    unit = formats.shown_unit(quantity) if quantity in CHANNELS else ""
    decimals = {"sf": 0, "rox": 2}.get(quantity, CHANNELS[quantity].decimals if quantity in CHANNELS else 1)
    return formats.with_unit(difference_text(before, after, decimals), unit)


def _as_typed(value: Value, values: Mapping[str, Value], reader: Reader) -> str:
    """A value of the quantity named in `quantity`; a pH with the digits it was reported in, if `text` has them."""
    typed = values.get("text")
    if values.get("quantity") == "ph" and isinstance(typed, str) and typed:
        return typed
    text, limit = _quantity()(value, values, reader), values.get("limit")
    if values.get("relation") in ("above", "below") and isinstance(limit, (int, float)):
        return _beside_limit(text, _number(value), float(limit), str(values.get("quantity", "")), reader)
    return text


def _beside_limit(text: str, value: float, limit: float, quantity: str, reader: Reader) -> str:
    """A value that is rounded to the limit it is past, with the decimals that decide: 97.4 %, above 97 %."""
    number = _NUMBER.match(text)
    if value == limit or number is None or text != quantity_text(quantity, limit, reader):
        return text
    in_kpa = reader.gas_unit == "kPa" and quantity in ("paco2", "pao2", "pf", "aa")
    shown, places = value / MMHG_PER_KPA if in_kpa else value, len(number[0].partition(".")[2])
    finer = (formats.fixed(shown, places + more) for more in (1, 2, 3))
    told = next((f for f in finer if float(f) != float(number[0])), number[0])
    return told + text[number.end() :]


def _name_from(kind: str) -> Writer:
    """The name of a marker or due item."""

    def written(value: Value, _values: Mapping[str, Value], reader: Reader) -> str:
        from app.policy.names import by_policy
        from app.words.names import TEMPLATES

        name = reader.translate(TEMPLATES.get(f"{kind}.{value}", str(value).replace("_", " ")))
        return by_policy(str(value), name) if kind == "marker" else name

    return written


def _decimals(count: int, *, sign: bool) -> Writer:
    def written(value: Value, _values: Mapping[str, Value], _reader: Reader) -> str:
        return (formats.signed if sign else formats.fixed)(_number(value), count)

    return written


def _listed(value: Value, _values: Mapping[str, Value], reader: Reader) -> str:
    """Comma-separated keys as names."""
    return ", ".join(reader.name(part.strip()) for part in str(value).split(","))


_WRITERS: dict[str, Writer] = {
    "": _plain,
    "time": lambda v, _m, r: r.time(int(_number(v))),
    "clock": lambda v, _m, r: formats.clock(int(_number(v)), r.zone),
    **{str(n): _decimals(n, sign=False) for n in range(4)},
    **{f"+{n}": _decimals(n, sign=True) for n in range(4)},
    "trim": lambda v, _m, _r: formats.trimmed(_number(v)),
    "gas": lambda v, _m, r: formats.gas_pressure(_number(v), r.gas_unit),
    "gas+": lambda v, _m, r: formats.gas_pressure(_number(v), r.gas_unit, sign=True),
    "fraction": lambda v, _m, _r: formats.fraction(_number(v)),
    "name": lambda v, _m, r: r.name(str(v)),
    "unit": lambda v, _m, _r: formats.shown_unit(str(v)),
    "of": _of_channel,
    "typed": _of_channel_as_typed,
    "q": _quantity(),
    "q+": _quantity(sign=True),
    "qn": _quantity(noise=True),
    "qt": _as_typed,
    "marker": _name_from("marker"),
    "due": _name_from("due_item"),
    "minutes": lambda v, _m, _r: formats.minutes(_number(v)),
    "hours": lambda v, _m, _r: formats.hours(_number(v)),
    "list": _listed,
}
