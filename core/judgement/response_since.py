"""Each gas against the start, so that a slow drift cannot hide; and a gain that was lost again."""

from __future__ import annotations

from dataclasses import dataclass, field

from core.judgement import arms
from core.judgement import response_reasons as why
from core.judgement.arms import Oxygenation
from core.judgement.policy import Policy
from core.judgement.response_noise import direction, pf_noise, ph_noise
from core.judgement.response_shapes import SinceStart
from core.judgement.shapes import GasFigure
from core.record.message import Message


@dataclass(frozen=True, slots=True)
class StartBaseline:
    """What gases are compared with since the start. `reference` marks the first gas of a record that began
    with support running; `gas` is None, with `why`, where there is nothing to compare with."""

    gas: GasFigure | None
    why: Message | None = None
    reference: bool = False


@dataclass(slots=True)
class Earlier:
    """The gases on support between the start and now: those of the highest pH, and those with a P/F."""

    by_ph: list[GasFigure] = field(default_factory=list)
    with_pf: list[GasFigure] = field(default_factory=list)

    def add(self, gas: GasFigure) -> None:
        """One more gas. Only the two best by pH are kept: one of them may be the baseline itself."""
        if gas.ph is not None:
            self.by_ph = sorted((*self.by_ph, gas), key=_by_ph, reverse=True)[:2]
        if gas.pf_mmHg is not None:
            self.with_pf.append(gas)

    def best(self, base: GasFigure | None) -> GasFigure | None:
        """The gas of the highest pH, of equal ones that of the lowest PaCO2, the baseline left out."""
        return next((g for g in self.by_ph if g is not base), None)


def _by_ph(gas: GasFigure) -> tuple[float, float]:
    return gas.ph or 0.0, -(gas.paco2_mmHg or 0.0)


def since_start(
    start: StartBaseline, gas: GasFigure, earlier: Earlier, seen: Oxygenation, policy: Policy
) -> SinceStart:
    """One gas against the start. `earlier` are the gases on support between the start and this gas."""
    loss = gain_lost(start.gas, gas, earlier, policy)
    reasons = dict(loss.reasons)
    lost = bool(loss.reasons)
    base = start.gas
    if base is None or base is gas:
        key = "response.reference" if start.reference else "response.serves_as_baseline"
        reasons["verdict"] = start.why if base is None and start.why else Message(key, {"gas_at": gas.at})
        return SinceStart(gain_lost=lost, reasons=reasons, ph_lost=loss.ph, pf_lost=loss.pf)
    if start.reference:
        reasons["baseline"] = Message("response.reference", {"gas_at": base.at})
    co2 = arms.co2_arm(base, gas, policy, quiet=True)
    oxygen = arms.oxygen_arm(base, gas, seen, policy, co2)
    active = arms.acute_hypercapnia(base, policy)
    told = arms.verdict(co2, oxygen, active)
    found = arms.sure(told, base, gas)
    first = (why.in_doubt(base, gas),) if found != told else ()
    if told is None and co2.verdict is not None and not active:
        first = (why.co2_not_active(base),)
    said = (*first, *co2.why, *oxygen.why)
    if found is None and said:
        reasons["verdict"] = said[0]
    return SinceStart(
        difference(base.ph, gas.ph),
        difference(base.paco2_mmHg, gas.paco2_mmHg),
        None if arms.pf_comparable(base, gas, policy) else difference(base.pf_mmHg, gas.pf_mmHg),
        found, lost, reasons, loss.ph, loss.pf,
    )  # fmt: skip


def difference(before: float | None, after: float | None) -> float | None:
    """After minus before, to a millionth; None where either is missing."""
    return None if before is None or after is None else round(after - before, 6)


@dataclass(frozen=True, slots=True)
class Loss:
    """Whether what was gained since the start is lost again, for pH with PaCO2 and for P/F: None where the gas does
    not hold what it takes to tell. `reasons` name each loss by its own key."""

    ph: bool | None
    pf: bool | None
    reasons: dict[str, Message]


def gain_lost(base: GasFigure | None, gas: GasFigure, earlier: Earlier, policy: Policy) -> Loss:
    """A relapse from the best gas since the start, beyond noise.

    The best gas is the one of the highest pH. It must be better than the start's baseline, where there is one:
    what was never gained is not lost. The same for P/F.
    """
    best = earlier.best(base)
    ph = _ph_lost(base, best, gas, policy)
    pf, top = _pf_lost(base, gas, [g for g in earlier.with_pf if g is not base], policy)
    reasons: dict[str, Message] = {}
    if ph and best is not None:
        reasons["gain_lost"] = _lost("ph", best.at, best.ph, gas.ph)
    if pf and top is not None:
        reasons["oxygen_gain_lost"] = _lost("pf", top.at, top.pf_mmHg, gas.pf_mmHg)
    return Loss(ph, pf, reasons)


def _ph_lost(base: GasFigure | None, best: GasFigure | None, gas: GasFigure, policy: Policy) -> bool | None:
    """pH fell or PaCO2 rose from the best gas, and the gas is not where treatment wants it.

    A pH of 7.35 or above with a PaCO2 at or below 45 mmHg has arrived: coming down to it from an alkalosis, or a
    little further within the normal, loses nothing. A pH that fell to acidosis is lost though PaCO2 fell too. A PaCO2
    that climbs within its limits is `paco2_rising`'s.
    """
    if best is None:
        return False
    if gas.ph is None:
        return None
    if base is not None and base.ph is not None and (best.ph or 0.0) <= base.ph:
        return False
    if gas.ph >= policy.state.acidotic_below_ph.value and gas.hypercapnic is not True:
        return False if gas.hypercapnic is False else None
    acidotic = gas.ph < policy.state.acidotic_below_ph.value
    fell = direction(gas.ph - (best.ph or 0.0), ph_noise(policy.noise)) == -1
    if (acidotic and fell) or arms.co2_arm(best, gas, policy, quiet=True).verdict == arms.WORSE:
        return True
    return None if gas.paco2_mmHg is None and best.paco2_mmHg is not None else False


def _pf_lost(
    base: GasFigure | None, gas: GasFigure, earlier: list[GasFigure], policy: Policy
) -> tuple[bool | None, GasFigure | None]:
    """Whether the best comparable P/F is lost, and which gas held it."""
    if gas.pf_mmHg is None or gas.fio2 is None:
        return None, None
    alike = [g for g in earlier if arms.pf_comparable(g, gas, policy) is None]
    if not alike:
        return (None if earlier else False), None  # on another FiO2 than every gas before: not comparable
    best = max(alike, key=lambda g: g.pf_mmHg or 0.0)
    top = best.pf_mmHg or 0.0
    if base is not None and (not arms.hypoxaemia(base, policy) or top <= (base.pf_mmHg or 0.0)):
        return False, None
    return direction(gas.pf_mmHg - top, pf_noise(policy.noise, top)) == -1, best


def _lost(quantity: str, best_at: int, best: float | None, now: float | None) -> Message:
    return Message("response.gain_lost", {"quantity": quantity, "best_at": best_at, "best": best, "now": now})
