"""Why a flag stands, what is due and why, what could act, whom to see first: core's judgement in words."""

from typing import Final

from app.words.taken import BEFORE_TAKEN, TAKEN

_STATE = "pick severe=severe acidosis;acidotic=acidotic;resolved=not acidotic"
_DOUBT = (
    "pick early=was drawn before the response window: not steady;"
    "unconfirmed=holds a value nobody confirmed;unusual=holds an unusual value;"
    "implausible=holds values that hardly belong together;"
    "inconsistent=has a pH, PCO2 and bicarbonate that do not agree;"
    "corrected=was corrected;disputed=is disputed: two values or corrections of it differ;"
    "site assumed=has no site recorded, taken as arterial"
)
_POPULATION = "validated in: {population}"

EVIDENCE: Final[dict[str, str]] = {
    "evidence.after_beta_agonist":
        "A beta-agonist or a nebuliser was given at {at:time}[[ ({text})]]: lactate may come from it.",
    "evidence.above_usual": "{quantity:name} {value:q} at {at:time}, above the patient's usual {usual:q}.",
    "evidence.ceiling":
        "Ceiling of care: {ceiling}. Escalating here means "
        "{ceiling:pick no intubation=a decision with the responsible clinician, not intubation;"
        "ward support is the ceiling=telling the responsible clinician, not a higher level of care;"
        "comfort=comfort and telling whom it concerns;else=what was agreed}.",
    "evidence.change":
        "{quantity:name} {before:q} (" + BEFORE_TAKEN + ") to {after:q} (" + TAKEN + "), {change:q+}"
        "[[, {direction:pick up=beyond;down=beyond;else=within} measurement error ({noise:qn})]].",
    "evidence.unchanged": "{quantity:name} unchanged, {value:q} ({before_at:time} and {at:time}).",
    "evidence.event": "{event:name}[[ {text}]] at {at:time}.",
    "evidence.failed_percent": "In the source {percent:0} % of those with {points:trim} points failed.",
    "evidence.gas_doubt": "The gas of {at:time} {doubt:" + _DOUBT + "}.",
    "evidence.hours": "{hours:hours} {what} (limit {limit:trim} h).",
    "evidence.no_reason_logged": "No reason for it is logged.",
    "evidence.not_trusted": "{quantity:name} was not to be trusted for {minutes:minutes} from {since:time} to "
        "{at:time}.",
    "evidence.not_settled": "Not judged again by the gas of {gas_at:time}[[ (pH {ph:2})]]: "
        "{because:pick missing=;venous=it is venous;doubtful=it is in doubt;"
        "off support=it was drawn off, or just back on, support;"
        "outside=its score is made for other patients than this gas shows;"
        "early=it is an early gas, so not yet steady;"
        "other hours=pH has not risen beyond measurement error, and it was drawn outside the hours that the "
        "flag judges (;"
        "score hours=its points do not rule it out, and it was drawn outside the hours that the flag judges (;"
        "no answer=it is not good enough to end the flag, and is outside what the flag asks}"
        "[[{missing:list} missing]][[{from_min:minutes} to ]][[{to_min:minutes} after the start or a change)]].",
    "evidence.not_steady":
        "This gas was drawn {minutes:minutes} after the mask went on again at {back_on_at:time}, so not yet steady.",
    "evidence.off_support": "This gas was drawn while the mask was off.",
    "evidence.support_ended": "This gas was drawn after support ended.",
    "evidence.on_oxygen": "On FiO2 {fio2:fraction}.",
    "evidence.outside_population": "Outside its population (" + _POPULATION + ").",
    "evidence.overdue": "{what:due} was due by {until:time}.",
    "evidence.score": "{score:name}[[ {points:trim} points]][[!points| between {lowest:trim} and {highest:trim}]] "
        "at {at:time}, above {limit:trim}[[; missing: {missing:list}]].",
    "evidence.range_then":
        "The range was {low:trim} to {high:trim} % then; since {since:time} it is {low_now:trim} to "
        "{high_now:trim} %, "
        "{by:pick prescribed=as prescribed;gas=by a gas that showed hypercapnia, none prescribed}.",
    "evidence.score_rise": "{score:name} {before:trim} ({before_at:time}) to at least {lowest:trim} ({at:time}).",
    "evidence.share": "Off the mask for {percent:0} % of {minutes:minutes} "
        "({breaks:pick 1=one break;else=# breaks}), limit {limit:0} %.",
    "evidence.stale": "The newest value, of {at:time}, is {minutes:minutes} old.",
    "evidence.success": "Not acidotic from {since:time} for {hours:hours}.",
    "evidence.support": "{quantity:name}[[ {value:q}]][[!value| not set, one pressure]], "
        "{relation} {limit:q}.",
    "evidence.support_ends": "Support ends at {at:time}.",
    "evidence.sustained": "{quantity:name} {relation} {limit:q} for {minutes:minutes} in all since {since:time}"
        "[[, median {median:q} up to {at:time}]].",
    "evidence.think_of": "Think of {what}.",
    "evidence.timing":
        "{anchor:pick pressure raised=;else=Judged }{minutes:minutes} after "
        "{anchor:pick start=the start;change=the change;interface=the new interface;break_end=the end of the break;"
        "pressure raised=the pressure was raised;"
        "else=the change}{anchor:pick pressure raised=, at;else= of} {anchor_at:time}.",
    "evidence.twice": "{quantity:name} {first:q} ({first_at:time}) and {second:q} ({second_at:time}), "
        "both at or below {high:q}.",
    "evidence.unknown": "{quantity:name} is not known.",
    "evidence.unknown_now":
        "{quantity:name} near this gas is not known; that of the baseline is {value:q} ({at:time}).",
    "evidence.unknown_then":
        "{quantity:name} of the baseline is not known, so {value:q} ({at:time}) cannot be compared.",
    "evidence.value": "{quantity:name} {value:qt}[[ (median from {since:time} to {at:clock})]]"
        "[[!since| at {at:time}]], {relation} {limit:q}.",
    "evidence.venous": "It is a venous sample.",
}  # fmt: skip

DUE: Final[dict[str, str]] = {
    "due.break_end": "The break of {break_at:time} has been open for {hours:hours} while the device ventilates.",
    "due.ceiling": "No ceiling of care is recorded (support since {started_at:time}).",
    "due.complete_score": "{score:name} at {gas_at:time} is {lowest:trim} to {highest:trim} (limit {limit:trim}): "
        "missing {missing:list}.",
    "due.confirm_arterially": "Venous pH {ph:2} at {gas_at:time}.",
    "due.gas_after_break": "The break ended at {anchor_at:time}.",
    "due.gas_after_chain": "Settings changed in {steps} steps, the last at {anchor_at:time}.",
    "due.gas_after_change": "Settings changed at {anchor_at:time}.",
    "due.gas_after_start": "Support started at {anchor_at:time}.",
    "due.gas_reference": "A first gas to compare with: support was running when logging began.",
    "due.mask_check": "{marker:marker} since {since:time}.",
    "due.oxygen_review": "{marker:marker} since {since:time}.",
    "due.probable_break": "A break that nobody logged is probable from {break_at:time}[[ to {end_at:time}]].",
    "due.reassessment": "After the settings of {anchor_at:time}[[; last look at the patient {last_at:time}]].",
    "due.reassessment_flag":
        "{marker:marker} since {since:time}[[; last look at the patient {last_at:time}]].",
    "due.repeat_gas": "After the gas of {gas_at:time}: pH {ph:2}[[, {state:" + _STATE + "}]].",
    "due.repeat_gas_flag": "{marker:marker} since {since:time}; last gas at {gas_at:time}.",
    "due.repeat_gas_soon": "After the gas of {gas_at:time}: pH {ph:2}, {why:pick severe=severe acidosis;"
        "doubtful=in doubt;worse=worse;"
        "worse since start=worse since the start;gain lost=gain lost;not better=not better}.",
    "due.first_skin_check": "The first skin check since {of} began at {since_at:time}.",
    "due.skin_check": "Skin under the mask last seen at {last_at:time}.",
    "due.spo2_recheck": "One SpO2 reading of {spo2:0} % at {at:time}, outside {low:0} to {high:0} %.",
}  # fmt: skip

CONCERN: Final[dict[str, str]] = {
    "concern.due_soon": "{what:due} is due by {until:time}.",
    "concern.ended": "Support ended at {ended_at:time}.",
    "concern.state": "pH {ph:2} at {gas_at:time}, {state:" + _STATE + "}, {support}",
    "concern.flag": "{tier:pick escalate=Escalate;concern=Concern;remark=Remark}: {marker:marker}"
        "{unconfirmed:pick yes=*;else=}, since {since:time}[[; last gas {state:" + _STATE + "}]]"
        "{more:pick 0=;1=, one more group of flags;else=, # more groups of flags}.",
    "concern.overdue": "{what:due} is overdue since {until:time}.",
}  # fmt: skip

EXPECTED: Final[dict[str, str]] = {
    "expected.acts_not_on_co2": "the latest change does not act on CO2",
    "expected.asynchrony": "asynchrony",
    "expected.baseline_steady": "the gas of {gas_at:time} is taken as steady",
    "expected.baseline_too_old": "the gas of {gas_at:time} is too old to expect from",
    "expected.changed_before": "settings changed at {changed_at:time}, after the last gas",
    "expected.dead_space_assumed": "dead space taken as {dead_space_ml:0} mL",
    "expected.leak": "leak",
    "expected.leak_doubt": "leak makes the ventilation delivered doubtful",
    "expected.less_dead_space": "less dead space than assumed",
    "expected.less_production": "less CO2 production",
    "expected.more_dead_space": "more dead space than assumed",
    "expected.more_production": "more CO2 production",
    "expected.needs_support_before": "holds only for a change of settings on running support",
    "expected.no_baseline": "no gas to expect from",
    "expected.own_effort": "more effort of the patient's own",
    "expected.ventilation_not_known":
        "the ventilation delivered is not known {side:pick before=before the change;after=after the change;else=}",
    "expected.ventilation_source": "ventilation from {source}",
    "expected.volume_under_read": "the device reads the volume too low",
    "expected.within_band": "as expected",
}  # fmt: skip

_TAKEN = "[[ (median from {since:time} to {at:clock})]][[!since| (one reading at {at:time})]]"
"""What a value of now is: a median of the device's samples over a span, or one reading of a moment."""
_RATE = ("[[ (median from {since:time} to {at:clock})]]"
         "[[!since| ({counted:pick yes=counted;no=one reading} at {at:time})]]")  # fmt: skip

LEVERS: Final[dict[str, str]] = {
    "lever.acidosis": "pH {ph:2} with PaCO2 {paco2_mmHg:gas} at {at:time}.",
    "lever.acidosis_off_support":
        "Acidosis off support[[, {minutes:minutes} after the mask went on again]]: pH {ph:2} with PaCO2 "
        "{paco2_mmHg:gas} at {at:time}.",
    "lever.flag_open": "Open flag: {marker:marker}, since {since:time}.",
    "lever.flags_more": "{count:0} more about it {count:pick 1=is;else=are} open.",
    "lever.event": "{channel:name}[[: {text}]] at {at:time}.",
    "lever.fio2_at_maximum": "FiO2 is at its highest.",
    "lever.acidosis_not_known":
        "Whether the gas of {at:time} is an acidosis with a high PaCO2 is not known: {missing:list} not reported.",
    "lever.high_tidal_volume":
        "Tidal volume {vt_per_kg:1} mL/kg" + _TAKEN + " is above {limit:1} mL/kg already.",
    "lever.hypercapnic_risk": "At hypercapnic risk: SpO2 no higher than {high:0} %.",
    "lever.hypoxaemia": "EPAP may recruit lung.",
    "lever.leak_definition_not_known":
        "What the device calls leak is not known: {leak:0} L/min" + _TAKEN + " is judged by no limit.",
    "lever.leak_first": "Leak first: {leak:0} L/min" + _TAKEN + ".",
    "lever.leak_limit_not_known":
        "Leak {leak:0} L/min" + _TAKEN + ": its limit is not known without the pressures.",
    "lever.leak_not_known": "Leak is not known.",
    "lever.leak_over_limit": "Leak {leak:0} L/min" + _TAKEN + " is over {limit:0} L/min.",
    "lever.leak_was_over_limit":
        "Leak was over its limit in most minutes since {over_since:time}; now {leak:0} L/min" + _TAKEN +
        ", within {limit:0} L/min.",
    "lever.leak_within_limit": "Leak {leak:0} L/min" + _TAKEN + " is within {limit:0} L/min.",
    "lever.little_mask_time":
        "Only {hours:hours} of the last {of_hours:hours} on the mask (at least {least:fraction} is aimed at).",
    "lever.mask_time_enough":
        "On the mask for {hours:hours} of the last {of_hours:hours}, which is enough (at least {least:fraction}).",
    "lever.mask_time_not_known": "Time on the mask is not known: the start is not recorded.",
    "lever.mode_has_no_rate": "[[{mode}: ]]the mode has no such setting.",
    "lever.no_acidosis": "No acidosis with a high PaCO2 in the newest gas on support, {at:time}[[: pH {ph:2}]]"
        "[[, PaCO2 {paco2_mmHg:gas}]].",
    "lever.no_gas": "No gas on support yet.",
    "lever.no_pressure_support": "CPAP gives no pressure support; two levels of pressure would.",
    "lever.nothing_logged":
        "No secretions, vomiting, agitation, poor comfort or sedation logged in the last {hours:trim} h.",
    "lever.off_mask_acidotic": "Off the mask since {since:time} while acidotic.",
    "lever.own_rate_not_known": "The patient's own rate is not known.",
    "lever.oxygen_above_need":
        "SpO2 {spo2:0} %" + _TAKEN + " is above its range, {low:0} to {high:0} %: less oxygen is needed.",
    "lever.oxygen_enough": "Oxygenation does not ask for it.",
    "lever.pf_low": "P/F {pf:gas} at {at:time} is at or below {limit:gas}.",
    "lever.port_not_cleared":
        "{epap:trim} cmH2O may not clear the exhalation port (at least {least:trim} cmH2O does).",
    "lever.present_epap": "EPAP now {epap:trim} cmH2O.",
    "lever.present_leak":
        "Leak now {leak:0} L/min" + _TAKEN + "[[, {definition}]][[, limit {limit:0} L/min]].",
    "lever.present_mask_time": "{hours:hours} of {of_hours:hours} on the mask.",
    "lever.present_oxygen": "[[FiO2 now {fio2:fraction}. ]][[Oxygen now {o2_flow:trim} L/min.]]",
    "lever.present_rate": "Backup rate now {rate_set:0}/min.",
    "lever.present_rates":
        "Backup rate now {rate_set:0}/min, the patient's own rate {own_rate:0}/min" + _RATE + ".",
    "lever.present_support": "Pressure support now {pressure_support:trim} cmH2O[[ (IPAP {ipap:trim})]].",
    "lever.present_ti": "Inspiratory time now {ti:trim} s.",
    "lever.pressures_not_known": "The pressures are not recorded.",
    "lever.probable_break": "The mask seems off since {since:time}.",
    "lever.qualified_person_decides": "A qualified person decides.",
    "lever.raise_ipap_alike": "Raise IPAP alike, or pressure support falls.",
    "lever.rate_above_backup":
        "The patient's own rate is {own_rate:0}/min" + _RATE +
        ", not below the backup rate of {reach:0}/min: it does not act.",
    "lever.rate_below_backup":
        "The patient's own rate, {own_rate:0}/min" + _RATE + ", is below the backup rate of {reach:0}/min.",
    "lever.rate_in_reach":
        "The patient's own rate, {own_rate:0}/min" + _RATE + ", is below {reach:0}/min: a backup rate can act.",
    "lever.rate_no_effect":
        "The patient's own rate is {own_rate:0}/min" + _RATE +
        ", not below {reach:0}/min: a backup rate would not act.",
    "lever.review_epap": "EPAP {epap:trim} cmH2O: review before going past {limit:trim} cmH2O.",
    "lever.review_ipap": "IPAP {ipap:trim} cmH2O: review before going past {limit:trim} cmH2O.",
    "lever.review_ti": "Inspiratory time {ti:trim} s: review before going past {limit:trim} s.",
    "lever.spo2_below_range": "SpO2 {spo2:0} %" + _TAKEN + " is below its range, {low:0} to {high:0} %.",
    "lever.spo2_in_range": "SpO2 {spo2:0} %" + _TAKEN + " is within its range, {low:0} to {high:0} %.",
    "lever.spo2_not_known": "SpO2 is not known.",
    "lever.ti_may_help": "A longer inspiration may help here.",
    "lever.ti_not_for_this":
        "A longer inspiration helps in neuromuscular, chest wall or obesity hypoventilation only.",
    "lever.traps_air": "In COPD a longer inspiration or a faster rate traps air.",
    "lever.upper_airway": "EPAP holds the upper airway open.",
}  # fmt: skip

_CLASSES = (
    "no_axis_adverse=no axis adverse;between=between no axis adverse and the worst corner;worst_corner=worst corner"
)

OTHER: Final[dict[str, str]] = {
    "copd_failure.risk":
        "risk class: {lowest:pick " + _CLASSES + "}[[ to {up_to:pick " + _CLASSES + "}]]"
        "[[, published failure above {published_above_percent:0} %]]",
    "score.is_a_class": "a class of risk, not points",
}  # fmt: skip

TEMPLATES: Final[dict[str, str]] = EVIDENCE | DUE | CONCERN | EXPECTED | LEVERS | OTHER
