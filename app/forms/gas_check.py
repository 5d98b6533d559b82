"""What a gas says of itself while it is typed: core's formulas, put side by side for the gas form."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass
from math import isnan, nan

from core.judgement.policy import Policy
from core.physiology.acid_base import bicarbonate
from core.physiology.consistency import bicarbonate_agreement, gradient_doubt
from core.record.message import Message
from core.record.reading import Reading


@dataclass(frozen=True, slots=True)
class GasCheck:
    """`facts` to be told in any case; `agrees` None where a value is missing or bicarbonate is standard by the
    ward's setting; `explanations` likeliest first."""

    facts: tuple[Message, ...]
    agrees: bool | None
    explanations: tuple[Message, ...] = ()


def check_of(readings: Sequence[Reading], fio2_set: float, policy: Policy) -> GasCheck:
    """Check the values that are typed; `fio2_set` is the setting, used where the gas names no FiO2 of its own.

    >>> from core.judgement.policy import shipped_policy
    >>> from core.record.channels import channel
    >>> from core.record.reading import read_value
    >>> gas = [read_value(channel(k), t) for k, t in (("ph", "7.30"), ("paco2", "8.4"), ("hco3", "30"))]
    >>> check = check_of(gas, 0.28, shipped_policy())
    >>> check.agrees, check.explanations[0].key
    (False, 'consistency.kpa_taken_for_mmhg')
    """
    got = {r.channel.key: r.number for r in readings if r.number is not None}
    ph, paco2, hco3 = (got.get(key, nan) for key in ("ph", "paco2", "hco3"))
    calculated = float(bicarbonate(ph, paco2)) if not isnan(ph) and not isnan(paco2) else nan
    if isnan(calculated):
        return GasCheck((), None)
    facts = [Message("form.calculated_bicarbonate", {"calculated": calculated})]
    agreement = bicarbonate_agreement(
        ph, paco2, hco3, actual=policy.state.reported_bicarbonate == "actual",
        tolerance=policy.state.consistent_within_mmol_L.value,
    )  # fmt: skip
    if not isnan(hco3):
        key = "form.standard_not_checked" if agreement.consistent is None else "form.bicarbonate_difference"
        within = policy.state.consistent_within_mmol_L.value
        facts.append(Message(key, {"difference": agreement.difference, "within": within}))
    doubt = _oxygen_doubt(got.get("pao2", nan), paco2, got.get("gas_fio2", fio2_set))
    agrees = agreement.consistent if doubt is None else False
    return GasCheck(tuple(facts), agrees, (*agreement.explanations, *((doubt,) if doubt is not None else ())))


def _oxygen_doubt(pao2: float, paco2: float, fio2: float) -> Message | None:
    return None if isnan(pao2) or isnan(fio2) else gradient_doubt(pao2, paco2, fio2)
