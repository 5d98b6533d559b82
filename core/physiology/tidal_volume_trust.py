"""Can a tidal volume be trusted at the leak of that minute? The answer travels with every figure made from it.

On a single-limb circuit the expired tidal volume is modelled. Common practice, no source: low confidence where
unintentional leak is above 30 L/min, or more than half of the inspired volume leaks away.
Leak in L/min, volumes in mL, times in s, pressures in cmH2O.
"""

from __future__ import annotations

from enum import IntEnum
from typing import Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from core.physiology.elementary import N, Values, sqrt
from core.physiology.formula import formula
from core.record.message import Message

LEAK_LIMIT = 30.0
LEAK_SHARE_LIMIT = 0.5


class Trust(IntEnum):
    """How far a tidal volume can be trusted."""

    NOT_KNOWN = 0
    """Leak missing, or nobody said what the device's leak means."""
    TRUSTED = 1
    DOUBTFUL = 2
    VOID = 3
    """No breath was measured: a probable break, or the leak is at the device's ceiling."""


REASONS: Final = {
    Trust.NOT_KNOWN: Message("tidal_volume.leak_not_known"),
    Trust.DOUBTFUL: Message("tidal_volume.leak_too_large", {"limit": LEAK_LIMIT, "share": LEAK_SHARE_LIMIT}),
    Trust.VOID: Message("tidal_volume.void"),
}


@formula()
def port_leak(pressure: N, port_constant: N) -> N:
    """The exhalation port's own leak, L/min: k x sqrt(P). k 8.02 is 30 L/min at 14 cmH2O (computed here).

    >>> round(port_leak(20.0, 8.02), 1)
    35.9
    """
    return port_constant * sqrt(pressure)


@formula()
def leaked_share(vte: N, leak: N, ti: N) -> N:
    """The share of the inspired volume that leaks: leak over Ti / (tidal volume + that leak). Computed here.

    >>> round(leaked_share(400.0, 24.0, 1.0), 2)
    0.5
    """
    lost = leak / 60.0 * ti * 1000.0
    return lost / (vte + lost)


def unintentional_leak(leak: ArrayLike, definition: str, port: ArrayLike = np.nan) -> Values:
    """Unintentional leak, L/min, by what the device's leak means; NaN where that is not known.

    Args:
        leak: as the device gives it.
        definition: "unintentional", "total" (then the port's leak is taken off, not below 0) or "not known".
        port: the port's leak at the time-weighted pressure, for "total".

    >>> unintentional_leak([40.0, 10.0], "total", 25.0).tolist()
    [15.0, 0.0]
    """
    given = np.asarray(leak, dtype=np.float64)
    if definition == "unintentional":
        return given
    if definition == "total":
        return np.asarray(np.maximum(given - np.asarray(port, dtype=np.float64), 0.0))
    return np.full(given.shape, np.nan)


def trust(
    vte: ArrayLike, unintentional: ArrayLike, ti: ArrayLike = np.nan, void: ArrayLike = False,
    limit: float = LEAK_LIMIT,
) -> NDArray[np.int8]:  # fmt: skip
    """Codes of `Trust` for tidal volumes (mL) with the unintentional leak (L/min) of the same minutes.

    Args:
        ti: inspiratory time, s; where unknown only the leak limit speaks.
        void: True in a probable break or where the leak stands at the device's ceiling.
        limit: unintentional leak above which a volume is doubtful, L/min.

    >>> trust([500.0, 400.0, 400.0, 400.0], [10.0, 31.0, float("nan"), 28.0], [1.0, 1.0, 1.0, 1.0]).tolist()
    [1, 2, 0, 2]
    """
    volume, leak, time, empty = np.broadcast_arrays(
        np.asarray(vte, np.float64),
        np.asarray(unintentional, np.float64),
        np.asarray(ti, np.float64),
        np.asarray(void, np.bool_),
    )
    share: Values = np.asarray(leaked_share(volume, leak, time))
    too_large = (leak > limit) | (share > LEAK_SHARE_LIMIT)
    unknown = np.isnan(leak) | np.isnan(volume)
    codes = np.select(
        [empty | (volume <= 0.0), unknown, too_large],
        [Trust.VOID, Trust.NOT_KNOWN, Trust.DOUBTFUL],
        Trust.TRUSTED,
    )
    return np.asarray(codes, dtype=np.int8)


def why_doubtful(code: Trust, limit: float = LEAK_LIMIT) -> Message | None:
    """What to say beside a figure made from such a tidal volume; None where it is trusted.

    `limit` is the one that `trust` was given.

    >>> why_doubtful(Trust.DOUBTFUL).key
    'tidal_volume.leak_too_large'
    """
    if code is Trust.DOUBTFUL and limit != LEAK_LIMIT:
        return Message("tidal_volume.leak_too_large", {"limit": limit, "share": LEAK_SHARE_LIMIT})
    return REASONS.get(code)
