"""What to ask where a gas is very unlike the last of this patient: of two alike beds the wrong one may be in hand."""

from __future__ import annotations

from collections.abc import Sequence
from math import isnan, nan

from core.judgement.policy import Policy
from core.physiology.acid_base import bicarbonate
from core.record.episode import Episode
from core.record.gas_sample import GasSample
from core.record.instant import HOUR, MINUTE, Instant
from core.record.message import Message, Value
from core.record.reading import Reading

_SLACK = 1e-9


def unlike_last_gas(readings: Sequence[Reading], at: Instant, record: Episode, policy: Policy) -> tuple[Message, ...]:
    """The question a gas raises whose pH, PaCO2 or bicarbonate lies far from that of the nearest gas of its kind.

    Bicarbonate is that of pH and PaCO2, which moves within days. `record`: the episode without the readings; values
    of the same minute are of the same gas and no comparison. A venous gas is compared with venous ones only.

    >>> from core.judgement.policy import shipped_policy
    >>> unlike_last_gas((), 0, Episode("E1", (), {}, {}, ()), shipped_policy())
    ()
    """
    if not any(r.channel.key in ("ph", "paco2") for r in readings):
        return ()
    already = next((g for g in record.gases if g.at // MINUTE == at // MINUTE), None)
    ph, paco2 = _value(readings, "ph", already), _value(readings, "paco2", already)
    site = next((r.words for r in readings if r.channel.key == "site"), already.site if already else "arterial")
    last = _nearest(at, (site == "venous"), record, policy)
    if last is None:
        return ()
    rules = policy.entry
    pairs = (
        ("ph", ph, last.ph, rules.unlike_ph_by.value),
        ("paco2", paco2, last.paco2, rules.unlike_paco2_by_mmHg.value),
        ("hco3", _bicarbonate(ph, paco2), _bicarbonate(last.ph, last.paco2),
         rules.unlike_bicarbonate_by_mmol_L.value),
    )  # fmt: skip
    unlike = [name for name, now, then, by in pairs if abs(now - then) >= by - _SLACK]  # NaN is unlike nothing
    if not unlike:
        return ()
    said: dict[str, Value] = {"at": last.at}
    for name, now, then, _ in pairs:
        if not isnan(now) and not isnan(then) and (name != "hco3" or name in unlike):
            said |= {name: now, f"{name}_then": then}
    return (Message("gas.unlike_last", said),)


def _nearest(at: Instant, venous: bool, record: Episode, policy: Policy) -> GasSample | None:
    """The gas nearest in time with a pH or PaCO2, within the policy's hours before or after."""
    within = policy.entry.unlike_within_h.value * HOUR
    like = [g for g in record.gases if (g.site == "venous") is venous and not (isnan(g.ph) and isnan(g.paco2))
            and abs(g.at - at) <= within and g.at // MINUTE != at // MINUTE]  # fmt: skip
    return min(like, key=lambda g: abs(g.at - at), default=None)


def _value(readings: Sequence[Reading], channel: str, already: GasSample | None) -> float:
    typed = next((r.number for r in readings if r.channel.key == channel and r.number is not None), None)
    return typed if typed is not None else float(getattr(already, channel)) if already is not None else nan


def _bicarbonate(ph: float, paco2: float) -> float:
    return float(bicarbonate(ph, paco2))
