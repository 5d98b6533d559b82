"""What a change did, in words: what was compared, against which noise, or why nothing was judged."""

from typing import Final

from app.words.taken import BEFORE_TAKEN, TAKEN

_SIDE = "baseline=the baseline gas;before=the baseline gas;gas=this gas;after=this gas;else=a gas"
_WHO = "baseline=The baseline gas;gas=This gas;else=A gas"
_PRESSURES = "[[IPAP {ipap_before:trim} to {ipap_after:trim}, ]][[EPAP {epap_before:trim} to {epap_after:trim}, ]]"

TEMPLATES: Final[dict[str, str]] = {
    "effect.epap_lowers_support":
        "Raising EPAP alone lowers pressure support: EPAP {epap_before:trim} to {epap_after:trim}, "
        "pressure support {before:trim} to {after:trim} cmH2O.",
    "effect.expiratory_pressure": "Expiratory pressure {before:trim} to {after:trim} cmH2O.",
    "effect.fio2": "FiO2 {before:fraction} to {after:fraction}.",
    "effect.fio2_not_known": "FiO2 is no longer known[[ (was {before:fraction})]].",
    "effect.interface": "Interface {before} to {after}.",
    "effect.mode": "Mode {before} to {after}.",
    "effect.o2_flow": "Oxygen flow {before:trim} to {after:trim} L/min.",
    "effect.pressure_support": _PRESSURES + "pressure support {before:trim} to {after:trim} cmH2O.",
    "effect.rate": "Backup rate {before:trim} to {after:trim}/min.",
    "effect.rate_none":
        "Backup rate {before:trim} to {after:trim}/min takes no effect: the patient's own rate is {own_rate:0}/min.",
    "effect.rate_not_known":
        "Backup rate {before:trim} to {after:trim}/min; whether it takes effect is not known: "
        "no rate of the patient's own is known.",
    "effect.support_kept": _PRESSURES + "pressure support stays {after:trim} cmH2O.",
    "effect.ti": "Inspiratory time {before:trim} to {after:trim} s.",
    "response.acidosis_off_support": "It shows acidosis all the same: pH {ph:2} at {gas_at:time}.",
    "response.also_changed": "{steps:pick 1=One other change;else=Other changes} in between, "
        "the last at {last_at:time}.",
    "response.before_baseline": "The gas of {gas_at:time} was drawn before the baseline.",
    "response.baseline_early": "The baseline, of {gas_at:time}, is an early gas: not steady.",
    "response.capillary": "Capillary gas: stands for arterial in pH and PCO2, not in PO2.",
    "response.early": "Early gas, before the response window: not steady.",
    "response.after_support":
        "The gas of {gas_at:time} was drawn after support ended: it is not used for a verdict.",
    "response.not_steady":
        "The gas of {gas_at:time} was drawn {minutes:minutes} after the mask went on again at {back_on_at:time}, so "
        "not yet steady: it is not used for a verdict.",
    "response.off_support":
        "The gas of {gas_at:time} was drawn while the mask was off: it is not used for a verdict.",
    "response.venous_only": "The gas of {gas_at:time} is venous: it gives no verdict on arterial gases.",
    "response.by_spo2_alone": "Judged by SpO2 alone, without a gas.",
    "response.co2_not_active":
        "No verdict: the baseline gas of {gas_at:time} shows no acute hypercapnia, so CO2 alone gives none, "
        "and oxygen cannot be compared.",
    "response.compared":
        "{quantity:name} {before:q} to {after:q} ({change:q+}): "
        "{direction:pick up=up beyond;down=down beyond;inside noise=within} measurement error ({noise:qn}).",
    "response.confirm_arterially": "Venous pH {ph:2} at {gas_at:time}: confirm arterially.",
    "response.corrected": "{side:pick " + _WHO + "} of {gas_at:time} was corrected.",
    "response.disputed":
        "{side:pick " + _WHO + "} of {gas_at:time} is disputed: two values or corrections of it differ.",
    "response.fio2_differs": "P/F not compared: FiO2 {before:fraction} then {after:fraction}.",
    "response.fio2_not_known": "P/F not compared: FiO2 of {side:pick " + _SIDE + "} not known.",
    "response.gain_lost": "Gain lost: {quantity:name} was {best:q} at {best_at:time}, now {now:q}.",
    "response.inconsistent": "{side:pick " + _WHO + "} of {gas_at:time} has a pH, PCO2 and bicarbonate that do not "
        "agree.",
    "response.no_baseline":
        "No baseline: {because:pick no gas=no gas before it;too old=the last gas is too old;"
        "other support=the last gas was drawn in another state of support;venous=only a venous gas before it}"
        "[[ (newest {newest_at:time})]]; at most {limit_h:trim} h before is accepted.",
    "response.no_effect": "It acts on neither CO2 nor oxygen.",
    "response.no_gas_yet": "No gas in the response window yet.",
    "response.not_attributable": "The gas of {gas_at:time} cannot be attributed: {steps:pick 1=a later change "
        "lies;else=later changes lie} between.",
    "response.not_compared_with_start": "Not compared with the start.",
    "response.only_early": "Only an early gas so far ({minutes:minutes} after): "
        "{verdict:pick none=not judged;else=}{verdict}.",
    "response.over_correction":
        "Over-correction: pH {ph:2} with PaCO2 {before:gas} to {after:gas}.",
    "response.pf_not_compared": "P/F not compared: no arterial PO2 on both sides ({site}).",
    "response.reference": "The gas of {gas_at:time} is the reference: support was running when logging began.",
    "response.serves_as_baseline": "The gas of {gas_at:time} serves as the baseline.",
    "response.spo2_range":
        "SpO2 {before:0} % (" + BEFORE_TAKEN + ") to {after:0} % (" + TAKEN + "), {where} {low:0} to {high:0} %.",
    "response.spo2_range_after": "SpO2 {after:0} % (" + TAKEN + "), {where} {low:0} to {high:0} %.",
    "response.superseded": "No gas before the next change at {next_at:time}.",
    "response.support_ended": "Support ended at {ended_at:time} before a gas.",
    "response.support_was_running": "Support was running when logging began.",
    "response.tiring_not_excluded":
        "Respiratory rate {before:0} (" + BEFORE_TAKEN + ") to {after:0}/min (" + TAKEN + ") while PaCO2 rose and "
        "P/F did not: tiring not excluded.",
    "response.unconfirmed": "{side:pick " + _WHO + "} of {gas_at:time} holds a value nobody confirmed.",
    "response.unusual": "{side:pick " + _WHO + "} of {gas_at:time} holds an unusual value.",
    "response.implausible": "{side:pick " + _WHO + "} of {gas_at:time} holds values that hardly belong together.",
    "response.not_better_in_doubt": "Not called better: {side:pick " + _SIDE + "} of {gas_at:time} is in doubt.",
    "response.towards_normal": "pH {before:2} was above its limits and {after:2} is within them: "
        "counted as a fall all the same.",
    "response.value_missing": "{quantity:name} not reported on {side:pick " + _SIDE + "}.",
}  # fmt: skip
