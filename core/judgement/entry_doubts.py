"""What to ask before an entry is taken, beyond its own soft limits: values that do not belong together."""

from __future__ import annotations

from collections.abc import Sequence
from math import isnan, nan

from core.judgement.policy import Policy
from core.physiology import acid_base, oxygenation
from core.record.gas_sample import GasSample
from core.record.message import Message
from core.record.reading import Reading
from core.record.settings import Settings
from core.record.units import MMHG_PER_KPA

LEAST_MMHG = 20.0


def gas_doubts(
    readings: Sequence[Reading], in_force: Settings, policy: Policy, already: GasSample | None = None
) -> tuple[Message, ...]:
    """The questions a gas raises: bicarbonate that cannot belong to it, an FiO2 that cannot be right.

    `already` is the sample logged for the same moment, whose values the new ones join. A gas whose pH, PCO2 and
    actual bicarbonate disagree by more than the policy's limit is accepted only after confirmation.
    """

    def value(channel: str) -> float:
        for r in readings:
            if r.channel.key == channel and r.number is not None:
                return r.number
        return float(getattr(already, channel)) if already is not None else nan

    asks: list[Message] = []
    if not any(r.channel.key in ("ph", "paco2", "hco3", "pao2", "gas_fio2") for r in readings):
        return ()
    ph, paco2, hco3 = value("ph"), value("paco2"), value("hco3")
    calculated = float(acid_base.bicarbonate(ph, paco2))
    within = policy.state.consistent_within_mmol_L.value
    actual = policy.state.reported_bicarbonate == "actual"
    if actual and not isnan(hco3) and not isnan(calculated) and abs(hco3 - calculated) > within + 1e-9:
        difference = hco3 - calculated
        values = {"hco3": hco3, "calculated": calculated, "difference": difference, "within": within}
        asks.append(Message("gas.inconsistent", values))
    asks += _kilopascals(readings)
    own, setting = value("gas_fio2"), in_force.fio2
    if not isnan(own) and not isnan(setting) and abs(own - setting) > policy.oxygen.fio2_same_within.value + 1e-9:
        asks.append(Message("gas.fio2_differs", {"gas_fio2": own, "setting": setting}))
    fio2 = setting if isnan(own) else own
    gradient = float(oxygenation.aa_gradient(value("pao2"), paco2, fio2))
    if not isnan(gradient) and gradient < 0:
        asks.append(Message("gas.negative_gradient", {"aa": gradient, "fio2": fio2}))
    return tuple(asks)


def _kilopascals(readings: Sequence[Reading]) -> list[Message]:
    """A PaCO2 or PaO2 this low in mmHg is hardly compatible with life: it is likelier to be a figure in kPa."""
    return [
        Message("gas.kpa_suspected", {"channel": r.channel.key, "value": r.number, "mmHg": r.number * MMHG_PER_KPA})
        for r in readings
        if r.channel.key in ("paco2", "pao2")
        and r.raw_unit == "mmHg"
        and r.number is not None
        and r.number < LEAST_MMHG
    ]
