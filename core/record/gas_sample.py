"""Gas samples: the gas rows of one moment, read as one sample."""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass
from math import nan

from core.record.channels import CHANNELS, Group
from core.record.instant import Instant
from core.record.knowledge import Standing


@dataclass(frozen=True, slots=True)
class GasSample:
    """One blood gas. Pressures in mmHg, bicarbonate and lactate in mmol/L; NaN where not reported.

    `texts` holds what was typed, by channel, with its precision (7.40 stays 7.40), for binning and display.
    `site_assumed` is True where nobody said what was sampled and arterial is taken.
    """

    at: Instant
    site: str = "arterial"
    site_assumed: bool = True
    ph: float = nan
    paco2: float = nan
    pao2: float = nan
    hco3: float = nan
    be: float = nan
    lactate: float = nan
    hb: float = nan
    sao2: float = nan
    gas_fio2: float = nan
    texts: Mapping[str, tuple[str, str]] | None = None
    doubt: bool = False
    """Any of its values nobody confirmed; `doubted` names the channels."""
    corrected: bool = False
    disputed: bool = False
    rivals: tuple[tuple[str, str], ...] = ()
    """By channel what else was recorded for this very moment, as typed with its unit; a later value stands."""
    recorded_at: Instant = 0
    ids: tuple[str, ...] = ()
    doubted: frozenset[str] = frozenset()

    def text(self, channel: str) -> str | None:
        """The text typed for a channel when it was typed in the canonical unit, else None."""
        raw, unit = (self.texts or {}).get(channel, ("", ""))
        return raw.replace(",", ".") if raw and unit == CHANNELS[channel].unit else None


def gas_samples(standing: Iterable[Standing]) -> tuple[GasSample, ...]:
    """All gas samples, by time: rows of group gas that share a moment are one sample.

    A lone `gas_fio2` or `site` without any measured value makes no sample.
    """
    by_moment: dict[Instant, list[Standing]] = {}
    for s in standing:
        if CHANNELS[s.entry.channel].group is Group.GAS:
            by_moment.setdefault(s.entry.at, []).append(s)
    made = (_one(at, rows) for at, rows in sorted(by_moment.items()))
    return tuple(g for g in made if g is not None)


_MEASURED = ("ph", "paco2", "pao2", "hco3", "be", "lactate", "hb", "sao2")


def _one(at: Instant, rows: list[Standing]) -> GasSample | None:
    rows = sorted(rows, key=lambda s: s.entry.seq)
    numbers = {s.entry.channel: s.entry.number for s in rows if s.entry.number is not None}
    if not any(k in numbers for k in _MEASURED):
        return None
    rivals = _rivals(rows)
    site = next((s.entry.words for s in reversed(rows) if s.entry.channel == "site"), None)
    return GasSample(
        at=at,
        site=site or "arterial",
        site_assumed=site is None,
        **{k: float(v) for k, v in numbers.items()},
        texts={s.entry.channel: (s.entry.raw, s.entry.raw_unit) for s in rows},
        doubt=any(s.entry.doubt for s in rows),
        corrected=any(s.corrected for s in rows),
        disputed=any(s.disputed for s in rows) or bool(rivals),
        rivals=rivals,
        recorded_at=max(s.entry.recorded_at for s in rows),
        ids=tuple(s.entry.id for s in rows),
        doubted=frozenset(s.entry.channel for s in rows if s.entry.doubt),
    )


def _rivals(rows: list[Standing]) -> tuple[tuple[str, str], ...]:
    """The values of this moment that a later one of their channel, which differs, took the place of."""
    last = {s.entry.channel: s for s in rows}
    return tuple(
        (s.entry.channel, s.entry.raw if s.entry.channel == "ph" else f"{s.entry.raw} {s.entry.raw_unit}".strip())
        for s in rows
        if _value(s) != _value(last[s.entry.channel])
    )


def _value(s: Standing) -> float | str | None:
    return s.entry.number if s.entry.number is not None else s.entry.words
