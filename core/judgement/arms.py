"""The two arms of a response: CO2 and oxygen, and the verdict they make together (rules of judgement 3)."""

from __future__ import annotations

from dataclasses import dataclass

from core.judgement import response_reasons as why
from core.judgement.paired_limits import above
from core.judgement.policy import Policy
from core.judgement.response_noise import direction, paco2_noise, pf_noise, ph_noise, rr_noise
from core.judgement.shapes import GasFigure
from core.judgement.vitals_near import Found
from core.record.message import Message

BETTER, WORSE, MIXED = "better", "worse", "mixed"
NO_CHANGE, OVER_CORRECTION = "no clear change", "over-correction"
NOT_YET, NOT_JUDGED = "not yet known", "not judged"


@dataclass(frozen=True, slots=True)
class Arm:
    """One arm's answer. None with reasons where it cannot answer; `sign` of PaCO2 or P/F beyond noise."""

    verdict: str | None
    why: tuple[Message, ...] = ()
    sign: int = 0


@dataclass(frozen=True, slots=True)
class Oxygenation:
    """What the oxygen arm needs beside the gases: rate and SpO2 on both sides, and the range to keep.

    `given_before`, `given_after`: whether oxygen was given, since above range counts only then.
    """

    spo2_before: Found | None
    spo2_after: Found | None
    rr_before: Found | None
    rr_after: Found | None
    low: float
    high: float
    given_before: bool
    given_after: bool


def acute_hypercapnia(gas: GasFigure, policy: Policy) -> bool:
    """pH below 7.35 and PaCO2 above 45 mmHg (6.0 kPa)."""
    return gas.ph is not None and gas.ph < policy.state.acidotic_below_ph.value and _hypercapnic(gas, policy)


def hypoxaemia(gas: GasFigure, policy: Policy) -> bool:
    """P/F at or below 300 mmHg."""
    return gas.pf_mmHg is not None and gas.pf_mmHg <= policy.state.hypoxaemia_pf_mmHg.value


def co2_arm(base: GasFigure, gas: GasFigure, policy: Policy, quiet: bool = False) -> Arm:
    """The CO2 arm: pH up is +, PaCO2 down is +, each beyond noise; over-correction from a hypercapnic baseline.

    `quiet` leaves the reasons out, where only the verdict is wanted.
    """
    ph_sign, co2_sign = _ph_sign(base, gas, policy), _paco2_sign(base, gas, policy)
    verdict = _co2_verdict(base, gas, policy, ph_sign, co2_sign)
    if quiet and verdict is not None:
        return Arm(verdict, (), co2_sign or 0)
    said = [_ph_said(base, gas, policy, ph_sign), _paco2_said(base, gas, policy, co2_sign)]
    if verdict == OVER_CORRECTION:
        said.insert(0, why.over_correction(gas, base))
    if ph_sign == -1 and _alkalosis_ended(base, gas, policy):
        said.append(why.towards_normal(base.ph or 0.0, gas.ph or 0.0))
    return Arm(verdict, tuple(said), co2_sign or 0)


def _co2_verdict(
    base: GasFigure, gas: GasFigure, policy: Policy, ph_sign: int | None, co2_sign: int | None
) -> str | None:
    if ph_sign is None and co2_sign is None:
        return None
    if co2_sign == -1 and _over_corrected(base, gas, policy):
        return OVER_CORRECTION
    good = ph_sign == 1 or co2_sign == -1
    bad = ph_sign == -1 or co2_sign == 1
    if (ph_sign is None or co2_sign is None) and not bad:
        return None  # what is missing may have got worse: half a gas makes nobody better, nor unchanged
    return MIXED if good and bad else BETTER if good else WORSE if bad else NO_CHANGE


def _ph_sign(base: GasFigure, gas: GasFigure, policy: Policy) -> int | None:
    if base.ph is None or gas.ph is None:
        return None
    return direction(gas.ph - base.ph, ph_noise(policy.noise))


def _paco2_sign(base: GasFigure, gas: GasFigure, policy: Policy) -> int | None:
    if base.paco2_mmHg is None or gas.paco2_mmHg is None:
        return None
    return direction(gas.paco2_mmHg - base.paco2_mmHg, paco2_noise(policy.noise, base.paco2_mmHg))


def _ph_said(base: GasFigure, gas: GasFigure, policy: Policy, sign: int | None) -> Message:
    if base.ph is None or gas.ph is None or sign is None:
        return why.missing("ph", "baseline" if base.ph is None else "gas")
    return why.compared("ph", base.ph, gas.ph, ph_noise(policy.noise), sign)


def _paco2_said(base: GasFigure, gas: GasFigure, policy: Policy, sign: int | None) -> Message:
    before, after = base.paco2_mmHg, gas.paco2_mmHg
    if before is None or after is None or sign is None:
        return why.missing("paco2", "baseline" if before is None else "gas")
    return why.compared("paco2", before, after, paco2_noise(policy.noise, before), sign)


def _over_corrected(base: GasFigure, gas: GasFigure, policy: Policy) -> bool:
    limit = policy.state.alkalotic_above_ph.value
    if gas.ph is None or gas.ph <= limit:
        return False
    carried = base.ph is None or base.ph <= limit
    return carried and _hypercapnic(base, policy)


def _alkalosis_ended(base: GasFigure, gas: GasFigure, policy: Policy) -> bool:
    """pH came down from above its upper limit to within its limits."""
    low, high = policy.state.acidotic_below_ph.value, policy.state.alkalotic_above_ph.value
    return base.ph is not None and gas.ph is not None and base.ph > high and low <= gas.ph <= high


def _hypercapnic(gas: GasFigure, policy: Policy) -> bool:
    """PaCO2 above 45 mmHg (6.0 kPa); taken from the gas's own figures where they say so."""
    if gas.hypercapnic is not None or gas.paco2_mmHg is None:
        return bool(gas.hypercapnic)
    return above(gas.paco2_mmHg, policy.state.hypercapnia_mmHg)


def pf_comparable(base: GasFigure, gas: GasFigure, policy: Policy) -> Message | None:
    """None where P/F of both gases can be compared, else the reason why not."""
    if base.fio2 is None or gas.fio2 is None:
        return why.fio2_not_known("baseline" if base.fio2 is None else "gas")
    if abs(base.fio2 - gas.fio2) > policy.oxygen.fio2_same_within.value + 1e-9:
        return why.fio2_differs(base.fio2, gas.fio2)
    if base.pf_mmHg is None or gas.pf_mmHg is None:
        return why.pf_not_compared(base.site if base.pf_mmHg is None else gas.site)
    return None


def oxygen_arm(
    base: GasFigure, gas: GasFigure, seen: Oxygenation, policy: Policy, co2: Arm, by_spo2: bool = False
) -> Arm:
    """The oxygen arm: P/F where both FiO2 are known and alike, else SpO2 in range; PaCO2 vetoes.

    `by_spo2` is set for a change of oxygen itself, which P/F cannot judge.
    """
    said: list[Message] = []
    reason = None if by_spo2 else pf_comparable(base, gas, policy)
    if by_spo2 or reason is not None:
        arm = spo2_arm(seen, policy)
        said.extend(() if reason is None else (reason,))
    else:
        assert base.pf_mmHg is not None
        assert gas.pf_mmHg is not None
        noise = pf_noise(policy.noise, base.pf_mmHg)
        sign = direction(gas.pf_mmHg - base.pf_mmHg, noise)
        verdict = {1: BETTER, -1: WORSE, 0: NO_CHANGE}[sign]
        arm = Arm(verdict, (why.compared("pf", base.pf_mmHg, gas.pf_mmHg, noise, sign),), sign)
    veto = _tiring(seen, policy, co2, pf_sign=0 if by_spo2 or reason is not None else arm.sign)
    if veto is not None:
        return Arm(MIXED, (veto, *said, *arm.why), arm.sign)
    return Arm(arm.verdict, (*said, *arm.why), arm.sign)


def _tiring(seen: Oxygenation, policy: Policy, co2: Arm, pf_sign: int) -> Message | None:
    """Rate down, PaCO2 up beyond noise and P/F not up. Any fall of the rate counts: it need not be proved."""
    before, after = seen.rr_before, seen.rr_after
    if co2.sign != 1 or pf_sign == 1 or before is None or after is None or after.value >= before.value:
        return None
    noise = rr_noise(policy.noise, before.device and after.device)
    return why.tiring(before, after, noise, direction(after.value - before.value, noise) == -1)


def spo2_arm(seen: Oxygenation, policy: Policy) -> Arm:
    """SpO2 in its range: nearer to it beyond noise is better, further off worse; inside noise no clear change."""
    if seen.spo2_after is None:
        return Arm(None, (why.missing("spo2", "gas"),))
    after = seen.spo2_after.value
    off_after, where = _off_range(after, seen, seen.given_after)
    if seen.spo2_before is None:
        return Arm(
            None, (why.missing("spo2", "baseline"), why.spo2_range(None, seen.spo2_after, seen.low, seen.high, where))
        )
    before = seen.spo2_before.value
    off_before, _ = _off_range(before, seen, seen.given_before)
    noise = policy.noise.spo2.value
    sign = direction(after - before, noise)
    moved = 0 if sign == 0 else (off_after < off_before) - (off_after > off_before)
    verdict = {1: BETTER, -1: WORSE, 0: NO_CHANGE}[moved]
    reasons = (why.spo2_range(seen.spo2_before, seen.spo2_after, seen.low, seen.high, where),
               why.compared("spo2", before, after, noise, sign))  # fmt: skip
    return Arm(verdict, reasons, moved)


def _off_range(spo2: float, seen: Oxygenation, oxygen_given: bool) -> tuple[float, str]:
    """How far SpO2 lies outside its range, and on which side."""
    if spo2 < seen.low:
        return seen.low - spo2, "below"
    if spo2 > seen.high and oxygen_given:
        return spo2 - seen.high, "above"
    return 0.0, "within"


def sure(verdict: str | None, base: GasFigure, gas: GasFigure) -> str | None:
    """A verdict, but no `better` that a value in doubt would make: nobody may be reassured by a slip of the pen.

    Worse and mixed stand, with the doubt beside them.
    """
    return None if verdict == BETTER and (base.in_doubt or gas.in_doubt) else verdict


def verdict(co2: Arm, oxygen: Arm, co2_active: bool, of_oxygen_change: bool = False) -> str | None:
    """Both arms as one verdict (rules of judgement 3.4 and 3.5); None where the deciding arm cannot answer.

    Where CO2 was no trouble at the baseline, a PaCO2 that falls makes nobody better: then oxygen answers or nothing
    does. What warns (worse, mixed, over-correction) stands all the same.

    `of_oxygen_change`: the anchor is a change of FiO2 or flow. Then SpO2 answers unless CO2 moved, and CO2
    must be known where it is active (a patient at hypercapnic risk).
    """
    if co2.verdict == WORSE:
        return WORSE
    if co2.verdict == BETTER and oxygen.verdict == WORSE:
        return MIXED
    if of_oxygen_change and co2.verdict == NO_CHANGE:
        return oxygen.verdict
    if co2_active or (oxygen.verdict is None and co2.verdict in (MIXED, OVER_CORRECTION)):
        return co2.verdict
    return oxygen.verdict
