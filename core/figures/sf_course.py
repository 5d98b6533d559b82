"""S/F over a whole episode, to be drawn: SpO2 over FiO2 wherever both are known and S/F means something."""

from __future__ import annotations

import numpy as np

from core.figures.episode_figures import record_stage
from core.judgement.device_medians import medians, with_newest
from core.judgement.policy import Policy
from core.judgement.probable_breaks import in_any
from core.judgement.trend import same_since
from core.record.episode import Episode
from core.record.instant import MINUTE, Instant
from core.record.samples import Flags, Times, Values


def sf_course(episode: Episode, until: Instant, policy: Policy) -> tuple[Times, Values]:
    """Times and S/F up to a moment, both of shape (n,), by time: spot readings, and device values as medians.

    Left out, as in the trend of S/F: SpO2 above the policy's ceiling (97 %), FiO2 not known or changed within a
    median, and times off support.
    """
    ctx = record_stage(episode, until, policy)
    series = ctx.episode.number("spo2")
    series = series.cut(np.isfinite(series.v)) if len(series) else series
    spot, fio2 = series.spots, ctx.settings.fio2
    machine, span = series.machine, int(policy.trend.device_median_min.value * MINUTE)
    bins = medians(machine.t, machine.v, span)
    bins = with_newest(bins, machine.t, machine.v, span, same_since(machine.t, fio2))
    first: Values = fio2.on(bins.first)
    same: Flags = first == fio2.on(bins.last)
    t = np.concatenate((spot.t, bins.last))
    v = np.concatenate((spot.v, bins.v))
    oxygen = np.concatenate((fio2.on(spot.t), np.where(same, first, np.nan)))
    order = np.argsort(t, kind="stable")
    t, v, oxygen = t[order], v[order], oxygen[order]
    usable = np.isfinite(oxygen) & (v <= policy.oxygen.no_sf_above_spo2.value) & ~in_any(t, ctx.support.off_times)
    return t[usable], v[usable] / oxygen[usable]
