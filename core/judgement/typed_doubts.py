"""Readings of the device that people typed and that cannot be relied on: with the mask off, or a volume in much leak.

What a figure leaves out or doubts must look so wherever the reading itself is shown.
"""

from __future__ import annotations

from typing import Final

import numpy as np

from core.judgement.context import Context
from core.judgement.derived import TypedDoubt
from core.judgement.probable_breaks import in_any
from core.judgement.tidal_volume import codes_of
from core.physiology.tidal_volume_trust import Trust, why_doubtful
from core.record.channels import Group, by_group
from core.record.episode import Series
from core.record.message import Message
from core.record.samples import Values

OFF_MASK: Final = Message("device.off_mask")
_VOLUMES: Final = ("vte", "mv")
_NO_SHARE: Final = 1e6
"""mL: of a minute volume the breath is not known, so the leak's limit alone speaks, never its share of a breath."""


def typed_doubts(ctx: Context) -> tuple[TypedDoubt, ...]:
    """Every such reading with why, by channel and time."""
    return tuple(d for c in by_group(Group.DEVICE) for d in _of(ctx, c.key))


def _of(ctx: Context, channel: str) -> list[TypedDoubt]:
    if channel not in ctx.episode.series:
        return []
    typed = ctx.episode.number(channel).spots
    if not len(typed):
        return []
    off = in_any(typed.t, ctx.support.off_times)
    found = [TypedDoubt(channel, int(t), OFF_MASK) for t in typed.t[off]]
    if channel in _VOLUMES:
        found += _volumes(ctx, channel, typed.cut(~off))
    return sorted(found, key=lambda d: d.at)


def _volumes(ctx: Context, channel: str, typed: Series) -> list[TypedDoubt]:
    volume: Values = typed.v if channel == "vte" else np.full(typed.v.shape, _NO_SHARE)
    limit = ctx.policy.leak.doubt_tidal_volume_above_L_per_min.value
    codes = codes_of(ctx, typed.t, volume, typed.spot)
    why = ((int(t), why_doubtful(Trust(int(code)), limit)) for t, code in zip(typed.t, codes, strict=True))
    return [TypedDoubt(channel, at, doubt) for at, doubt in why if doubt is not None]
