"""Figures as people read them: times with the month in letters, units always, half-up rounding by decimal.

Settings lose trailing zeros (16 cmH2O); laboratory values keep their precision (pH 7.40). Text made here is
plain text: where Qt could take it for rich text, pass it through `inert`.
"""

from __future__ import annotations

import re
from collections.abc import Sequence
from decimal import ROUND_HALF_UP, Decimal
from html import escape
from math import isnan

from app.telling.language import in_language
from core.record.channels import CHANNELS, Group, Kind
from core.record.instant import HOUR, MINUTE, Instant
from core.record.local_time import MONTHS, candidates, local
from core.record.units import MMHG_PER_KPA, written

MINUS = "\N{MINUS SIGN}"
PLUS_MINUS = "\N{PLUS-MINUS SIGN}"
NO_BREAK = "\N{NO-BREAK SPACE}"
ABSENT = "not recorded"
"""Fixed letters, so that no computer's region turns a day into a month."""
GAS_UNITS = ("mmHg", "kPa")
_CHOICES = {"copd": "COPD", "ards": "ARDS", "confusion": "new confusion", "full": "full treatment"}
_GAS_DECIMALS = {"mmHg": 0, "kPa": 1}


def rounded(value: float, decimals: int) -> Decimal:
    """Half-up rounding of the shortest decimal that reads back as `value`.

    >>> str(rounded(7.345, 2)), str(rounded(-0.25, 1))
    ('7.35', '-0.3')
    """
    return Decimal(repr(float(value))).quantize(Decimal(1).scaleb(-decimals), ROUND_HALF_UP)


def fixed(value: float, decimals: int) -> str:
    """With exactly `decimals` decimals, a leading zero, no minus on a zero.

    >>> fixed(7.4, 2), fixed(-0.001, 2), fixed(0.5, 0)
    ('7.40', '0.00', '1')
    """
    text = f"{abs(rounded(value, decimals)):f}"
    return text if rounded(value, decimals) >= 0 or not float(text) else MINUS + text


def trimmed(value: float, decimals: int = 2) -> str:
    """At most `decimals` decimals, without trailing zeros.

    >>> trimmed(16.0), trimmed(12.50), trimmed(0.85)
    ('16', '12.5', '0.85')
    """
    text = fixed(value, decimals)
    return text.rstrip("0").rstrip(".") if "." in text else text


def signed(value: float, decimals: int) -> str:
    """With its sign, plus or minus; a zero has none.

    >>> signed(0.054, 2), signed(-12, 0), signed(0.001, 2)
    ('+0.05', '−12', '0.00')
    """
    text = fixed(value, decimals)
    return text if text.startswith(MINUS) or not float(text) else f"+{text}"


def day(at: Instant, zone: str) -> str:
    """The date on the wall of a zone, e.g. 28-Mar-2026."""
    moment = local(at, zone)
    return f"{moment.day:02d}-{MONTHS[moment.month - 1]}-{moment.year}"


def clock(at: Instant, zone: str) -> str:
    """The time on the wall of a zone, 24 h; an hour that comes twice carries its zone's letters."""
    moment = local(at, zone)
    twice = len(candidates(moment.date(), moment.time().replace(fold=0), zone)) > 1
    return f"{moment:%H:%M}" + (f" {moment.tzname()}" if twice else "")


def wall(at: Instant, zone: str) -> str:
    """Date and time on the wall of a zone.

    >>> from core.record.instant import parse
    >>> wall(parse("2026-03-28T02:10:00Z"), "UTC")
    '28-Mar-2026 02:10'
    """
    return f"{day(at, zone)} {clock(at, zone)}"


def lately(at: Instant, now: Instant, zone: str) -> str:
    """The time on the wall where it can be no other day's; with its date where it could.

    >>> from core.record.instant import HOUR, parse
    >>> now = parse("2026-03-28T05:30:00Z")
    >>> lately(now - 7 * HOUR, now, "UTC"), lately(now - 13 * HOUR, now, "UTC")
    ('22:30', '27-Mar-2026 16:30')
    """
    return clock(at, zone) if abs(now - at) < 12 * HOUR else wall(at, zone)


def span(start: Instant, end: Instant, zone: str) -> str:
    """From one moment to another; the date is said once where both share it."""
    same = day(start, zone) == day(end, zone)
    until = clock(end, zone) if same else wall(end, zone)
    return in_language("{start} to {end}").format(start=wall(start, zone), end=until)


LONG_H = 96
"""Longer spans are said in days: nobody reads 5968 h."""


def minutes(count: float) -> str:
    """A length of time: 45 min, 2 h, 2 h 05 min; beyond four days in days.

    >>> minutes(45), minutes(120), minutes(125.4), minutes(5968 * 60)
    ('45 min', '2 h', '2 h 05 min', '248 days 16 h')
    """
    whole = int(rounded(abs(count), 0))
    hours, rest = divmod(whole, 60)
    if hours > LONG_H:
        days, hours = divmod(hours, 24)
        return f"{days} days {hours} h" if hours else f"{days} days"
    if not hours:
        return f"{rest} min"
    return f"{hours} h {rest:02d} min" if rest else f"{hours} h"


def since(at: Instant, now: Instant) -> str:
    """How long ago, e.g. "35 min ago"; a moment to come is "in 35 min".

    >>> since(0, 35 * MINUTE), since(120 * MINUTE, 0), since(0, 20)
    ('35 min ago', 'in 2 h', 'just now')
    """
    length = (now - at) / MINUTE
    if abs(length) < 0.5:
        return in_language("just now")
    text = in_language("{length} ago") if length > 0 else in_language("in {length}")
    return text.format(length=minutes(abs(length)))


def hours(count: float) -> str:
    """A length of time given in hours, as it is said: 3 h 54 min.

    >>> hours(3.9), hours(0.25), hours(48.0)
    ('3 h 54 min', '15 min', '48 h')
    """
    return minutes(count * 60.0)


def gas_pressure(mmhg: float, unit: str = "mmHg", *, sign: bool = False) -> str:
    """A gas pressure in the reader's unit; `sign`: a difference, which reads as none where it is zero.

    >>> gas_pressure(60, "kPa"), gas_pressure(59.6), gas_pressure(-4.5, sign=True)
    ('8.0 kPa', '60 mmHg', '−5 mmHg')
    >>> gas_pressure(0.2, sign=True)
    '±0 mmHg'
    """
    if unit not in GAS_UNITS:
        raise ValueError(f"gas pressure unit {unit!r}: mmHg or kPa is accepted")
    value = mmhg / MMHG_PER_KPA if unit == "kPa" else mmhg
    text = (signed if sign else fixed)(value, _GAS_DECIMALS[unit])
    is_none = sign and not rounded(value, _GAS_DECIMALS[unit])  # "P/F 0 mmHg" would be a value nobody lives with
    return f"{PLUS_MINUS}{text} {unit}" if is_none else f"{text} {unit}"


def fraction(value: float) -> str:
    """A fraction of inspired oxygen in per cent.

    >>> fraction(0.35), fraction(0.285)
    ('35 %', '28.5 %')
    """
    return f"{trimmed(value * 100, 1)} %"


def quantity(channel: str, value: float | str | None, gas_unit: str = "mmHg") -> str:
    """A channel's value with its unit, as the channel is to be read.

    >>> quantity("ipap", 16.0), quantity("ph", 7.4), quantity("fio2", 0.35), quantity("paco2", 60, "kPa")
    ('16 cmH2O', '7.40', '35 %', '8.0 kPa')
    >>> quantity("dyspnoea", 8.0), quantity("indication", "copd"), quantity("told", "registrar | busy")
    ('8 of 10', 'COPD', 'registrar. Answer: busy')
    """
    if value is None or (isinstance(value, float) and isnan(value)):
        return ABSENT
    known = CHANNELS.get(channel)
    if channel == "told" and isinstance(value, str):
        return told_words(value)
    if isinstance(value, str) or known is None or known.kind is not Kind.NUMBER:
        if not isinstance(value, str):
            return trimmed(value)
        return choice_word(value) if known is not None and known.kind is Kind.CHOICE else _CHOICES.get(value, value)
    if known.unit == "fraction":
        return fraction(value)
    if channel in ("paco2", "pao2", "usual_paco2"):
        return gas_pressure(value, gas_unit)
    keeps_zeros = known.group is Group.GAS or channel == "temp"
    text = fixed(value, known.decimals) if keeps_zeros else trimmed(value, known.decimals)
    return with_unit(text, shown_unit(channel))


def as_typed(raw: str, raw_unit: str) -> str:
    """What was typed, its unit as people write it: nothing else of it is touched.

    >>> as_typed("37,4", "degC"), as_typed("8", "points"), as_typed("24", "/min"), as_typed("71", "mmHg")
    ('37,4 °C', '8', '24/min', '71 mmHg')
    """
    return with_unit(raw, written(raw_unit)).strip()


def logged(channel: str, value: float | str | None, raw: str, raw_unit: str, gas_unit: str = "mmHg") -> str:
    """A logged value as it was typed; what it is kept as, in the reader's unit, beside it where that reads otherwise.

    >>> logged("temp", 37.0, "98.6", "degF"), logged("paco2", 70.0, "9.33", "kPa"), logged("ph", 7.4, "7.40", "pH")
    ('98.6 °F (37.0 °C)', '9.33 kPa (70 mmHg)', '7.40')
    >>> logged("fio2", 0.35, "0.35", "fraction"), logged("dyspnoea", 8.0, "8", "points")
    ('0.35 (35 %)', '8 of 10')
    >>> logged("indication", "copd", "copd", ""), logged("rr", 24.0, "", "")
    ('COPD', '24/min')
    """
    kept, known = quantity(channel, value, gas_unit), CHANNELS.get(channel)
    plain_scale = channel == "dyspnoea" and isinstance(value, float) and raw == trimmed(value)
    if not raw or known is None or known.kind in (Kind.MARK, Kind.CHOICE) or plain_scale:
        return kept
    typed = as_typed(raw, raw_unit)
    if known.kind is not Kind.NUMBER:
        return typed
    in_gas_unit = channel in ("paco2", "pao2", "usual_paco2")
    same = raw_unit == (gas_unit if in_gas_unit else known.unit) and known.unit != "fraction"
    if same or raw_unit == "%":
        return typed
    return f"{typed} (pH {kept})" if channel == "ph" else f"{typed} ({kept})"


def choice_word(value: str) -> str:
    """One of a channel's choices as it is read: COPD, new confusion.

    >>> choice_word("ards"), choice_word("alert")
    ('ARDS', 'alert')
    """
    return in_language(_CHOICES.get(value, value))


def told_words(words: str) -> str:
    """Who was told and what was answered; a bar parts them where both were typed.

    >>> told_words("registrar | busy, will come"), told_words("registrar")
    ('registrar. Answer: busy, will come', 'registrar')
    """
    who, bar, answer = (part.strip() for part in words.partition("|"))
    if not (bar and answer):
        return who if bar else words
    return in_language("{who}. Answer: {answer}").format(who=who, answer=answer)


def with_unit(text: str, unit: str) -> str:
    """A number and its unit; rates stand close, as in 24/min.

    >>> with_unit("24", "/min"), with_unit("16", "cmH2O"), with_unit("7.40", "")
    ('24/min', '16 cmH2O', '7.40')
    """
    return f"{text}{unit}" if not unit or unit.startswith("/") else f"{text} {unit}"


def shown_unit(channel: str) -> str:
    """The unit as it is written behind a value; none for pH, points and fractions.

    >>> shown_unit("temp"), shown_unit("ph"), shown_unit("leak")
    ('°C', '', 'L/min')
    """
    unit = CHANNELS[channel].unit
    if channel == "dyspnoea":
        return "of 10"
    return {"pH": "", "points": "", "degC": "°C", "fraction": "%"}.get(unit, unit)


def inert(text: str) -> str:
    """Text that Qt shows as it is even where it looks for rich text (tool tips, rich labels).

    >>> inert("<b>note</b>")
    '<span>&lt;b&gt;note&lt;/b&gt;</span>'
    """
    return f"<span>{escape(text, quote=False)}</span>".replace("\n", "<br>")


def counted(count: int, one: str, many: str) -> str:
    """A number with the word for one or for many.

    >>> counted(1, "entry", "entries"), counted(2340, "entry", "entries")
    ('1 entry', '2,340 entries')
    """
    return f"{count:,} {one if count == 1 else many}"


def some_of(names: Sequence[str], most: int = 5) -> str:
    """The first of several names, and how many more there are.

    >>> some_of(("A", "B")), some_of("ABCDE", 3)
    ('A, B', 'A, B, C and 2 more')
    """
    more = len(names) - most
    return ", ".join(names[:most]) + (f" and {more:,} more" if more > 0 else "")


def opened(text: str) -> str:
    """The words as a sentence begins; pH keeps its letters.

    >>> opened("escalate"), opened("pH below 7.20")
    ('Escalate', 'pH below 7.20')
    """
    return text if text[:2] == "pH" else text[:1].upper() + text[1:]


def zone_name(zone: str) -> str:
    """A zone by its IANA name; the many names of UTC are one.

    >>> zone_name("Etc/UTC"), zone_name("Europe/London")
    ('UTC', 'Europe/London')
    """
    return "UTC" if zone in ("Etc/UTC", "Etc/UCT", "Etc/Universal", "Etc/Zulu", "UTC", "UCT", "Zulu") else zone


_UNITS = "cmH2O|mmHg|kPa|L/min|mmol/L|mL/kg|mL|min|kg|cm|h|s|y|g/L|\N{DEGREE SIGN}C|%"
_VALUE = re.compile(rf"(?<=\d) (?=(?:{_UNITS})(?![\w/]))|(?<=\d h) (?=\d\d min\b)|(?<=\bpH) (?=\d)")


def unbroken(text: str) -> str:
    """A text whose lines end between values, never between a number and its unit.

    >>> unbroken("PaCO2 77 mmHg after 1 h 12 min, 5 more").replace(NO_BREAK, "_")
    'PaCO2 77_mmHg after 1_h_12_min, 5 more'
    """
    return _VALUE.sub(NO_BREAK, text)


def whole_units(text: str) -> str:
    """The same for the screen, where no line ends inside a unit either: 30 L/min stays whole."""
    return unbroken(text).replace("/min", "/\N{WORD JOINER}min")


def plain(text: str) -> str:
    """Text for pasting where only the plainest signs are safe: minus as hyphen, no hard spaces or joiners."""
    return text.replace(MINUS, "-").replace(PLUS_MINUS, "+-").replace(NO_BREAK, " ").replace("\N{WORD JOINER}", "")
