"""What each blood gas says by itself: computed figures, state, consistency, whether it was drawn off support."""

from __future__ import annotations

from math import isnan

from core.judgement.derived import FigureInput
from core.judgement.paired_limits import above
from core.judgement.policy import Policy
from core.judgement.shapes import GasFigure
from core.physiology import acid_base, consistency, oxygenation, saturation, specimen
from core.physiology.formula import Reasoned, reasoned
from core.record.channels import CHANNELS
from core.record.gas_sample import GasSample
from core.record.instant import MINUTE, Instant
from core.record.message import Message
from core.record.reading import soft_doubts
from core.record.settings import SettingsInForce
from core.record.support import SupportTime

STANDS_FOR_ARTERIAL = frozenset({"arterial", "capillary"})
"""Sites whose pH and PCO2 judge. A capillary PO2 does not stand for an arterial one."""

SHOWN_UNUSUAL = ("ph", "paco2", "pao2")
JUDGED_BY = frozenset({"ph", "paco2", "pao2", "hco3", "site", "gas_fio2"})
"""Channels of a gas that verdicts rest on: one of them that nobody confirmed puts the gas in doubt."""

_DUST = 9
"""Decimals of a P/F: 42.34 mmHg on 29 % make 146, which a float gives as 146.00000000000003, past its limit."""
SATURATION_WITHIN = 5.0
"""Points of % between a reported saturation and the one that PO2 and pH make one expect (common practice)."""


def gas_figures(
    samples: tuple[GasSample, ...], settings: SettingsInForce, support: SupportTime, policy: Policy
) -> tuple[GasFigure, ...]:
    """The figures of every sample, in order of time."""
    # septic shock denied is not shock denied: then it is not known
    shock = True if settings.episode.latest_text("septic_shock") == "yes" else None
    return tuple(gas_figure(g, settings, support, policy, shock) for g in samples)


def gas_figure(
    gas: GasSample, settings: SettingsInForce, support: SupportTime, policy: Policy, shock: bool | None = None
) -> GasFigure:
    """The figures of one sample. Everything absent has a reason. `shock` None: not known."""
    reasons: dict[str, Message] = {}
    warnings: list[Message] = []
    off = is_off_support(gas.at, support, policy)
    fio2, fio2_from = _fio2(gas, settings, support, policy, warnings)
    calculated = reasoned(acid_base.bicarbonate, gas.ph, gas.paco2)
    sbe = reasoned(acid_base.standard_base_excess, gas.ph, calculated.value)
    for name, result in (("hco3_calculated_mmol_L", calculated), ("sbe_mmol_L", sbe)):
        if result.reason is not None:
            reasons[name] = result.reason
    pf = _arterial(gas, reasons, "pf_mmHg", reasoned(oxygenation.pf_ratio, gas.pao2, fio2))
    pf = pf if pf is None else round(pf, _DUST)
    gradient = reasoned(oxygenation.aa_gradient, gas.pao2, gas.paco2, fio2)
    aa = _arterial(gas, reasons, "aa_gradient_mmHg", gradient)
    if aa is not None and aa < 0:
        warnings.append(Message("gas.negative_gradient", {"aa": aa, "fio2": fio2}))
    consistent = _consistent(gas, calculated.value, policy, reasons, warnings)
    _check_saturation(gas, warnings)
    unusual = _unusual(gas)
    implausible = _implausible(calculated.value, policy)
    warnings += [*unusual, *([implausible] if implausible is not None else [])]
    if gas.site_assumed:
        warnings.append(Message("gas.site_assumed", {}))
    state = state_of(gas, policy, reasons)
    return GasFigure(
        at=gas.at, site=gas.site, site_assumed=gas.site_assumed,
        ph=_number(gas.ph), ph_text=gas.text("ph"), paco2_mmHg=_number(gas.paco2), paco2_text=_typed(gas, "paco2"),
        pao2_mmHg=_number(gas.pao2), hco3_mmol_L=_number(gas.hco3),
        hco3_calculated_mmol_L=_number(calculated.value), sbe_mmol_L=_number(sbe.value), be_mmol_L=_number(gas.be),
        lactate_mmol_L=_number(gas.lactate), fio2=_number(fio2), fio2_from=fio2_from, pf_mmHg=pf,
        aa_gradient_mmHg=aa, consistent=consistent, state=state,
        hypercapnic=None if isnan(gas.paco2) else above(gas.paco2, policy.state.hypercapnia_mmHg),
        ph_above=_ph_above(gas, policy),
        off_support=off, back_on_at=_back_on_at(gas.at, support) if off else None,
        support_ended=off and _after_the_end(gas.at, support),
        doubt=gas.doubt or bool(unusual) or implausible is not None,
        unconfirmed=bool(gas.doubted & JUDGED_BY), implausible=implausible,
        corrected=gas.corrected, disputed=gas.disputed, rivals=gas.rivals, reasons=reasons,
        warnings=tuple(warnings), ids=gas.ids, sao2_percent=_number(gas.sao2),
        explanations=_explanations(gas, policy) if consistent is False else (),
        rule_out=specimen.venous_rule_out(gas.paco2, shock=shock) if gas.site == "venous" else None,
        temperature=_temperature(gas, settings, policy) if policy.state.temperature_correction else None,
    )  # fmt: skip


def _ph_above(gas: GasSample, policy: Policy) -> float | None:
    """The upper limit of pH that an arterial or capillary gas is above. Not acidotic is not yet normal."""
    limit = policy.state.alkalotic_above_ph.value
    return limit if gas.site in STANDS_FOR_ARTERIAL and gas.ph > limit else None


def is_off_support(at: Instant, support: SupportTime, policy: Policy) -> bool:
    """Whether a gas was drawn in a break, within the settling time after one, or after support ended.

    Before support began is not off support: such a gas is a baseline. A gas of the very minute in which the mask
    came off, or support ended, belongs before that.
    """
    if support.start is None or at < support.start:
        return False
    if _after_the_end(at, support):
        return True
    settle = int(policy.response.off_support_after_break_min.value * MINUTE)
    began = (b for b in support.breaks if b.start // MINUTE < at // MINUTE)
    return any(b.end is None or at <= b.end + settle for b in began)


def _back_on_at(at: Instant, support: SupportTime) -> Instant | None:
    """When the mask went on again before a gas; None for one drawn with the mask off, or after the end of support."""
    if _after_the_end(at, support) or support.drawn_in(at) is not None:
        return None
    return max((b.end for b in support.breaks if b.end is not None and b.end <= at), default=None)


def _after_the_end(at: Instant, support: SupportTime) -> bool:
    """Whether support had ended before the minute of a gas."""
    return support.end is not None and at // MINUTE > support.end // MINUTE


def state_of(gas: GasSample, policy: Policy, reasons: dict[str, Message] | None = None) -> str | None:
    """`severe`, `acidotic` or `resolved`; None for a venous gas, without a pH, or at pH 7.35 without a PaCO2.

    The pH is taken as reported, not rounded. Resolved needs the PaCO2 to be accounted for: it must be there.
    """
    why = reasons if reasons is not None else {}
    if gas.site not in STANDS_FOR_ARTERIAL:
        why["state"] = Message("gas.venous_has_no_state", {})
        return None
    if isnan(gas.ph):
        why["state"] = Message("gas.no_ph", {})
        return None
    if gas.ph < policy.state.severe_below_ph.value:
        return "severe"
    if gas.ph < policy.state.acidotic_below_ph.value:
        return "acidotic"
    if isnan(gas.paco2):
        why["state"] = Message("gas.no_paco2", {})
        return None
    return "resolved"


def _fio2(
    gas: GasSample, settings: SettingsInForce, support: SupportTime, policy: Policy, warnings: list[Message]
) -> tuple[float, str | None]:
    """The FiO2 of a gas: its own beats the setting, a difference asks. With the mask off the setting says nothing."""
    off = support.drawn_in(gas.at) is not None or _after_the_end(gas.at, support)
    setting = float("nan") if off else settings.fio2_drawn_on(gas.at)
    if not isnan(gas.gas_fio2):
        if abs(gas.gas_fio2 - setting) > policy.oxygen.fio2_same_within.value + 1e-9:
            values = {"gas_fio2": gas.gas_fio2, "setting": setting}
            warnings.append(Message("gas.fio2_differs", values))
        return gas.gas_fio2, "gas"
    return (setting, None) if isnan(setting) else (setting, "setting")


def _arterial(gas: GasSample, reasons: dict[str, Message], name: str, result: Reasoned) -> float | None:
    """A figure that only an arterial PO2 gives."""
    if gas.site != "arterial":
        reasons[name] = Message("gas.needs_arterial", {"site": gas.site})
        return None
    if result.reason is not None:
        reasons[name] = result.reason
    return _number(result.value)


def _consistent(
    gas: GasSample, calculated: float, policy: Policy, reasons: dict[str, Message], warnings: list[Message]
) -> bool | None:
    """Whether the reported actual bicarbonate belongs to this pH and PCO2."""
    if isnan(gas.hco3) or isnan(calculated):
        reasons["consistent"] = Message("gas.consistency_needs_three", {})
        return None
    if policy.state.reported_bicarbonate == "standard":
        reasons["consistent"] = Message("gas.bicarbonate_is_standard", {})
        return None
    difference = gas.hco3 - calculated
    within = policy.state.consistent_within_mmol_L.value
    if abs(difference) <= within + 1e-9:
        return True
    values = {"hco3": gas.hco3, "calculated": calculated, "difference": difference, "within": within}
    warnings.append(Message("gas.inconsistent", values))
    return False


def _explanations(gas: GasSample, policy: Policy) -> tuple[Message, ...]:
    within = policy.state.consistent_within_mmol_L.value
    return consistency.bicarbonate_agreement(gas.ph, gas.paco2, gas.hco3, tolerance=within).explanations


def _temperature(gas: GasSample, settings: SettingsInForce, policy: Policy) -> FigureInput:
    """The patient's temperature nearest to the gas, as fresh as a vital sign has to be; empty where there is none."""
    series = settings.episode.number("temp")
    reach = int(policy.freshness.vitals_min.value * MINUTE)
    near = series.between(gas.at - reach, gas.at + reach)
    if not len(near):
        return FigureInput()
    i = int(abs(near.t - gas.at).argmin())
    return FigureInput(float(near.v[i]), int(near.t[i]))


def _unusual(gas: GasSample) -> list[Message]:
    """Values outside their soft limits. Who confirmed one took it for true; that it is rare is still said."""
    return [m for key in SHOWN_UNUSUAL for m in soft_doubts(CHANNELS[key], getattr(gas, key))
            if not isnan(getattr(gas, key))]  # fmt: skip


def _implausible(calculated: float, policy: Policy) -> Message | None:
    """A pH and a PCO2 whose bicarbonate hardly exists: one of the two is probably wrong, whoever confirmed it."""
    low, high = policy.state.bicarbonate_least_mmol_L.value, policy.state.bicarbonate_most_mmol_L.value
    if isnan(calculated) or low <= calculated <= high:
        return None
    return Message("gas.implausible", {"calculated": float(calculated), "low": low, "high": high})


def _check_saturation(gas: GasSample, warnings: list[Message]) -> None:
    """Warn where the reported saturation does not belong to the sample's own PO2 and pH."""
    if isnan(gas.sao2) or isnan(gas.pao2) or isnan(gas.ph):
        return
    difference = saturation.saturation_difference(gas.sao2, gas.pao2, gas.ph)
    if abs(difference) > SATURATION_WITHIN + 1e-9:
        values = {"sao2": gas.sao2, "expected": gas.sao2 - difference, "within": SATURATION_WITHIN}
        warnings.append(Message("gas.saturation_differs", {**values}))


def _number(value: float) -> float | None:
    return None if isnan(value) else float(value)


def _typed(gas: GasSample, channel: str) -> str | None:
    raw, unit = (gas.texts or {}).get(channel, ("", ""))
    return f"{raw} {unit}" if raw else None
