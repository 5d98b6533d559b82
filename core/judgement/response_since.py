"""Each gas against the start, so that a slow drift cannot hide; and a gain that was lost again."""

from __future__ import annotations

from dataclasses import dataclass, field

from core.judgement import arms
from core.judgement.arms import Oxygenation
from core.judgement.policy import Policy
from core.judgement.response_noise import direction, pf_noise
from core.judgement.shapes import GasFigure, SinceStart
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
    reasons: dict[str, Message] = {}
    lost = gain_lost(start.gas, gas, earlier, policy)
    if lost is not None:
        reasons["gain_lost"] = lost
    base = start.gas
    if base is None or base is gas:
        key = "response.reference" if start.reference else "response.serves_as_baseline"
        reasons["verdict"] = start.why if base is None and start.why else Message(key, {"gas_at": gas.at})
        return SinceStart(gain_lost=lost is not None, reasons=reasons)
    if start.reference:
        reasons["baseline"] = Message("response.reference", {"gas_at": base.at})
    co2 = arms.co2_arm(base, gas, policy, quiet=True)
    oxygen = arms.oxygen_arm(base, gas, seen, policy, co2)
    found = arms.verdict(co2, oxygen, arms.acute_hypercapnia(base, policy))
    said = (*co2.why, *oxygen.why)
    if found is None and said:
        reasons["verdict"] = said[0]
    return SinceStart(
        difference(base.ph, gas.ph),
        difference(base.paco2_mmHg, gas.paco2_mmHg),
        None if arms.pf_comparable(base, gas, policy) else difference(base.pf_mmHg, gas.pf_mmHg),
        found, lost is not None, reasons,
    )  # fmt: skip


def difference(before: float | None, after: float | None) -> float | None:
    """After minus before, to a millionth; None where either is missing."""
    return None if before is None or after is None else round(after - before, 6)


def gain_lost(base: GasFigure | None, gas: GasFigure, earlier: Earlier, policy: Policy) -> Message | None:
    """A relapse from the best gas since the start, beyond noise; None where there is none.

    The best gas is the one of the highest pH. It must be better than the start's baseline, where there is one:
    what was never gained is not lost. The same for P/F.
    """
    best = earlier.best(base)
    if best is not None and gas.ph is not None:
        gained = base is None or base.ph is None or (best.ph or 0.0) > base.ph
        if gained and arms.co2_arm(best, gas, policy, quiet=True).verdict == arms.WORSE:
            return _lost("ph", best.at, best.ph, gas.ph)
    return _pf_lost(base, gas, [g for g in earlier.with_pf if g is not base], policy)


def _pf_lost(base: GasFigure | None, gas: GasFigure, earlier: list[GasFigure], policy: Policy) -> Message | None:
    alike = [g for g in earlier if arms.pf_comparable(g, gas, policy) is None]
    if not alike or gas.pf_mmHg is None:
        return None
    best = max(alike, key=lambda g: g.pf_mmHg or 0.0)
    top = best.pf_mmHg or 0.0
    if base is not None and (not arms.hypoxaemia(base, policy) or top <= (base.pf_mmHg or 0.0)):
        return None
    fell = direction(gas.pf_mmHg - top, pf_noise(policy.noise, top)) == -1
    return _lost("pf", best.at, top, gas.pf_mmHg) if fell else None


def _lost(quantity: str, best_at: int, best: float | None, now: float) -> Message:
    return Message("response.gain_lost", {"quantity": quantity, "best_at": best_at, "best": best, "now": now})
