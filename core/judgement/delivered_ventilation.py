"""The ventilation a device delivered: alveolar ventilation over time, with what had to be assumed."""

from __future__ import annotations

from dataclasses import dataclass
from math import isnan

import numpy as np

from core.judgement.context import Context
from core.judgement.device_medians import medians
from core.judgement.leak_trend import leak_definition, limits_at
from core.judgement.probable_breaks import in_any
from core.physiology.ventilation import base_weight, predicted_body_weight
from core.record.episode import Series
from core.record.instant import MINUTE, Instant
from core.record.message import Message
from core.record.samples import Times, Values
from core.record.support import Break

BIN = 5 * MINUTE
DEAD_SPACE_PER_KG = 2.2
"""mL per kg of predicted weight (common practice)."""
DEAD_SPACE_ML = 150.0
"""Where height or sex is not known (common practice)."""


@dataclass(frozen=True, slots=True)
class Ventilation:
    """Alveolar ventilation, L/min, on 5-min medians, shapes (n,): `t` is where each begins.

    `source` is "mv" or "rr x vte"; `doubtful` where leak makes the volumes uncertain or its meaning is not known.
    """

    t: Times
    va: Values
    source: str
    dead_space_ml: float
    doubtful: bool

    @property
    def assumptions(self) -> tuple[Message, ...]:
        """What has to be said beside every figure made from it."""
        said = [
            Message("expected.ventilation_source", {"source": self.source}),
            Message("expected.dead_space_assumed", {"dead_space_ml": round(self.dead_space_ml)}),
        ]
        if self.doubtful:
            said.append(Message("expected.leak_doubt"))
        return tuple(said)


def delivered(ctx: Context, start: Instant, end: Instant, off: tuple[Break, ...]) -> Ventilation | None:
    """The alveolar ventilation delivered from `start` to `end`; None where the device gave no volumes.

    Minute volume where the device gives it, else rate x tidal volume; less dead space x rate. `off` are the breaks,
    logged or probable: they are left out.
    """
    parts = {c: _worn(ctx, c, start, end, off) for c in ("mv", "vte", "rr_total")}
    bins = {c: medians(s.t, s.v, BIN) for c, s in parts.items()}
    source, first, second = ("mv", "mv", "rr_total") if len(parts["mv"]) else ("rr x vte", "vte", "rr_total")
    _, i, j = np.intersect1d(bins[first].bin, bins[second].bin, return_indices=True)
    if not i.size:
        return None
    rate, amount = bins[second].v[j], bins[first].v[i]
    dead = _dead_space(ctx)
    minute_volume = amount if source == "mv" else amount * rate / 1000.0
    va = minute_volume - dead * rate / 1000.0
    positive = va > 0.1
    if not positive.any():
        return None
    t = bins[first].bin[i][positive] * BIN
    return Ventilation(t, va[positive], source, dead, _leak_doubtful(ctx, start, end))


def _worn(ctx: Context, channel: str, start: Instant, end: Instant, off: tuple[Break, ...]) -> Series:
    series = ctx.episode.number(channel).machine.between(start, end)
    return series.cut(~in_any(series.t, off) & np.isfinite(series.v) & (series.v > 0))


def _dead_space(ctx: Context) -> float:
    height, sex = ctx.episode.latest("height"), ctx.episode.latest_text("sex")
    pbw = float(predicted_body_weight(height if height is not None else np.nan, base_weight(sex)))
    return DEAD_SPACE_ML if isnan(pbw) else DEAD_SPACE_PER_KG * pbw


def _leak_doubtful(ctx: Context, start: Instant, end: Instant) -> bool:
    """Leak over the limit at which volumes are doubtful, not measured, or of a meaning nobody stated."""
    leak = ctx.episode.number("leak").machine.between(start, end)
    definition = leak_definition(ctx)
    if definition is None or not len(leak):
        return True
    rules = ctx.policy.leak
    limit, _ = limits_at(ctx, leak.t, definition)
    limit = limit - rules.unintentional_limit_L_per_min.value + rules.doubt_tidal_volume_above_L_per_min.value
    return bool(np.nanmedian(leak.v - limit) > 0) if np.isfinite(leak.v - limit).any() else True
