"""Figures as the JSON of the command line: keys carry units, instants are ISO 8601, absent is null with a reason.

Messages become `{"key": ..., "values": {...}}` and, where the caller has words, `"text"` beside them.
"""

from __future__ import annotations

from collections.abc import Callable, Mapping
from dataclasses import fields, is_dataclass
from math import isfinite
from typing import Any

from core.judgement.gas_reading import read
from core.judgement.shapes import EpisodeFigures, GasFigure, LeakFigure, RatioFigure
from core.record.channels import CHANNELS, Kind
from core.record.local_time import zoned_iso
from core.record.message import Message

Json = dict[str, Any]
Wording = Callable[[Message], str]

_INSTANTS = frozenset(
    {"at", "as_of", "since", "ended_at", "last_change_at", "break_since", "anchor_at", "first_at", "window_from",
     "window_to", "baseline_at", "headline_gas_at", "superseded_at", "span_from", "seen_at", "settled_at",
     "due_from", "due_until", "done_at", "observed_at", "latest_at", "over_since", "adjusted_at",
     "spo2_target_since", "back_on_at", "off_mask_since", "last_logged_at", "headline_at", "pf_at"}
)  # fmt: skip
_SPANS = frozenset({"t", "at", "probable_breaks", "median_of", "latest_median_of", "counted"})
_MICROSECONDS = 10**14
"""No count and no sequence is this large; an instant since 1973 is."""
_INTERNAL = frozenset({"reasons", "concern", "ids"})


_UNIT_IN_KEY = {"mmHg": "_mmHg", "y": "_years", "cm": "_cm", "kg": "_kg", "%": "_percent"}
_DIGITS = 10
"""Significant digits of a number: more than any input has, fewer than binary fractions show."""


def with_unit(channel: str) -> str:
    """A profile channel as a key that carries its unit.

    >>> with_unit("usual_paco2"), with_unit("age"), with_unit("indication")
    ('usual_paco2_mmHg', 'age_years', 'indication')
    """
    known = CHANNELS.get(channel)
    return channel + _UNIT_IN_KEY.get(known.unit, "") if known is not None else channel


def tidy(value: float) -> float:
    """A number without the last bits of its arithmetic.

    >>> tidy(224.99999999999997), tidy(0.1 + 0.2)
    (225.0, 0.3)
    """
    return float(f"{value:.{_DIGITS}g}") if isfinite(value) else value


def to_json(figures: EpisodeFigures, word: Wording | None = None) -> Json:
    """The figures of one episode as JSON values."""
    form = _Form(figures.zone, word)
    out: Json = {
        "episode": figures.episode,
        "label": figures.label,
        "as_of": form.instant(figures.as_of),
        "policy": figures.policy_hash,
        "profile": {with_unit(k): form.fact(k, v) for k, v in figures.profile.items()},
        "support": form.plain(figures.support),
        "now": form.plain(figures.now),
        "responses": [form.plain(r) for r in figures.responses],
        "gases": [form.gas(g, figures.profile.get("age")) for g in figures.gases],
        "ratios": {
            "pf": form.ratio(figures.pf, "_mmHg", "_mmHg"),
            "sf": form.ratio(figures.sf, "", ""),
            "rox": form.ratio(figures.rox, "", ""),
        },
        "trends": {k: form.plain(v) for k, v in figures.trends.items()},
        "leak": form.leak(figures.leak),
        "oxygenation": form.plain(figures.oxygenation),
        "ventilation": form.plain(figures.ventilation),
        "scores": {k: form.plain(v) for k, v in figures.scores.items()},
        "flags": [form.plain(f) for f in figures.flags],
        "due": [form.due(form.plain(d)) for d in figures.due],
        "levers": [form.plain(lever) for lever in figures.levers],
        "expected_co2": form.plain(figures.expected_co2) if figures.expected_co2 else None,
        "see": {"rank": figures.concern.rank, "why": form.value("why", figures.concern.why)},
        "warnings": [form.message(w) for w in figures.warnings],
    }
    return out


class _Form:
    """Turns shapes into JSON values in one zone, with or without words."""

    def __init__(self, zone: str, word: Wording | None) -> None:
        self.zone = zone
        self.word = word

    def instant(self, at: int) -> str:
        return zoned_iso(at, self.zone)

    def fact(self, channel: str, value: float | str | None) -> float | str | None:
        """A profile fact; a moment among them as ISO 8601."""
        if CHANNELS[channel].kind is Kind.INSTANT and isinstance(value, int | float):
            return self.instant(int(value))
        return tidy(value) if isinstance(value, float) else value

    def message(self, message: Message) -> Json:
        out: Json = {"key": message.key, "values": {k: self.moment(k, v) for k, v in message.values.items()}}
        if self.word is not None:
            out["text"] = self.word(message)
        return out

    def moment(self, name: str, value: Any) -> Any:
        """A message's value; an instant, by its name and its size, as ISO 8601."""
        named = name.endswith("_at") or name in ("at", "since", "until")
        if isinstance(value, float):
            return tidy(value)
        return self.instant(value) if named and isinstance(value, int) and value > _MICROSECONDS else value

    def plain(self, shape: Any) -> Json:
        """Every field by its name, with `NAME_reason` beside a null that has one."""
        out: Json = {}
        reasons: Mapping[str, Message] = getattr(shape, "reasons", {})
        for name in (f.name for f in fields(shape)):
            if name in _INTERNAL:
                continue
            value = getattr(shape, name)
            out[name] = self.value(name, value)
            if value is None and name in reasons:
                out[f"{name}_reason"] = self.message(reasons[name])
        return out

    def value(self, name: str, value: Any) -> Any:
        if name in _INSTANTS and isinstance(value, int):
            return self.instant(value)
        if isinstance(value, Message):
            return self.message(value)
        if is_dataclass(value) and not isinstance(value, type):
            return self.plain(value)
        if isinstance(value, Mapping):
            return {str(k): self.value(str(k), v) for k, v in value.items()}
        if isinstance(value, tuple):
            inner = "at" if name in _SPANS else ""
            return [self.value(inner, v) for v in value]
        return tidy(value) if isinstance(value, float) else value

    def gas(self, gas: GasFigure, age: Any) -> Json:
        """A gas, and under `reading` what it says in words and what its rules make one expect."""
        return self.plain(gas) | {"reading": self.plain(read(gas, age))}

    def ratio(self, ratio: RatioFigure, latest: str, slope: str) -> Json:
        """A ratio with its unit in the keys, as the format names them."""
        plain = self.plain(ratio)
        rename = {"latest": f"latest{latest}", "slope_per_h": f"slope{slope}_per_h"}
        rename["latest_reason"] = f"latest{latest}_reason"
        rename["slope_per_h_reason"] = f"slope{slope}_per_h_reason"
        return {rename.get(k, k): v for k, v in plain.items()}

    def leak(self, leak: LeakFigure) -> Json:
        return self.plain(leak)

    @staticmethod
    def due(plain: Json) -> Json:
        """`from` and `until`, which cannot be names of fields in Python."""
        rename = {"due_from": "from", "due_until": "until"}
        return {rename.get(k, k): v for k, v in plain.items()}
