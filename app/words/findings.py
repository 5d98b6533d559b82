"""What was found in a gas, the settings, a formula or a score, and why a figure is absent."""

from typing import Final

SUPPORT: Final[dict[str, str]] = {
    "support.fio2_not_known_on_flow":
        "FiO2 not known: an oxygen flow[[ of {o2_flow:trim} L/min]] was logged without it",
    "support.mode_not_recorded": "mode not recorded",
    "support.not_recorded": "{channel:name} not recorded",
    "support.not_started": "support has not started",
    "support.one_pressure": "[[{mode} has ]]one pressure",
    "support.start_not_recorded": "the start of support is not recorded",
}  # fmt: skip

_SECOND = (
    "{second:pick none=;metabolic_acidosis= mixed with a metabolic acidosis;"
    "metabolic_alkalosis= mixed with a metabolic alkalosis;"
    "respiratory_acidosis= mixed with a respiratory acidosis;"
    "respiratory_alkalosis= mixed with a respiratory alkalosis}"
)


def _one_of(kind: str, of: str) -> str:
    """Acute or chronic; neither where the gas fits both."""
    whole = f"respiratory {of}"
    return (f"{{apart:pick no={whole.capitalize()}, acute or chronic not to be told apart;"
            f"else={kind.capitalize()} {whole}}}")  # fmt: skip


GAS: Final[dict[str, str]] = {
    "gas.bicarbonate_is_standard": "the ward's bicarbonate is standard, which is not checked against pH and PCO2",
    "gas.consistency_needs_three": "pH, PCO2 and bicarbonate are needed to check them against each other",
    "gas.fio2_differs":
        "FiO2 on the gas ({gas_fio2:fraction}) and in the settings ({setting:fraction}) differ.",
    "gas.implausible":
        "pH and PCO2 hardly belong together: they make a bicarbonate of {calculated:1} mmol/L, outside {low:trim} to "
        "{high:trim} mmol/L. One of the two is probably wrong.",
    "gas.inconsistent":
        "pH, PCO2 and bicarbonate do not agree: {hco3:1} mmol/L reported, {calculated:1} calculated "
        "(at most {within:trim} mmol/L apart is accepted).",
    "gas.needs_arterial": "needs an arterial sample (this one is {site})",
    "gas.kpa_suspected":
        "{channel:name} {value:trim} mmHg is hardly possible. "
        "{value:trim} kPa would be {mmHg:0} mmHg: which unit was meant?",
    "gas.negative_gradient":
        "The A-a gradient would be {aa:0} mmHg, which cannot be: FiO2 {fio2:fraction} or a pressure is wrong.",
    "gas.rest_of":
        "The gas of {at:time} has {has:name} and no {channel:name}. If both are of one sample, leave and log this "
        "with the time of that one before it.",
    "gas.unlike_last":
        "Very unlike the gas of {at:time}[[: pH {ph:2}, there {ph_then:2}]][[; PaCO2 {paco2:gas}, there "
        "{paco2_then:gas}]][[; bicarbonate by both {hco3:0}, there {hco3_then:0} mmol/L]]. Is it this patient's?",
    "gas.not_metabolic": "only of a metabolic disturbance",
    "gas.temperature_correction_off": "as measured at 37 \N{DEGREE SIGN}C: the ward corrects for no temperature",
    "gas.no_paco2": "PCO2 not reported",
    "gas.no_ph": "pH not reported",
    "gas.saturation_differs":
        "Saturation {sao2:0} % reported, {expected:0} % expected of its PO2 and pH: one of the three is wrong, or "
        "the haemoglobin is unusual.",
    "gas.site_assumed": "Nobody said what was sampled: taken as arterial.",
    "gas.venous_has_no_state": "a venous gas has no state",
    "consistency.digits_swapped": "Digits may be swapped: {channel:name} {typed} or {other}?",
    "consistency.fio2_cannot_be_right":
        "PaO2 {pao2:gas} with PaCO2 {paco2:gas} cannot be on FiO2 {fio2:fraction}.",
    "consistency.kpa_taken_for_mmhg":
        "PCO2 {paco2:trim} may be kPa: as such ({mmHg:0} mmHg) the values agree.",
    "consistency.mmhg_taken_for_kpa":
        "PCO2 may have been mmHg already: as {mmHg:0} mmHg the values agree.",
    "consistency.standard_bicarbonate":
        "Bicarbonate {hco3:1} mmol/L may be the standard one; the actual one would be {calculated:1} mmol/L.",
    "consistency.copying_slip":
        "One of pH {ph:2}, PCO2 {paco2:gas}, bicarbonate {hco3:1} mmol/L may be misread.",
    "specimen.capillary_is_not_arterial": "capillary {channel:name} does not stand for arterial",
    "specimen.venous_is_not_arterial": "venous {channel:name} does not stand for arterial",
    "specimen.arterial_is_not_arterial": "{channel:name} does not stand for arterial",
    "specimen.hypercapnia_not_ruled_out":
        "Venous PCO2 {pvco2:gas} does not rule out hypercapnia: take an arterial gas.",
    "specimen.hypercapnia_ruled_out":
        "Venous PCO2 {pvco2:gas} rules out arterial hypercapnia{shock_known:pick yes=;no= unless in shock}.",
    "specimen.no_rule_out_in_shock": "In shock a venous PCO2 ({pvco2:gas}) rules out nothing.",
    "specimen.pco2_unknown": "venous PCO2 not reported",
    "gas_class.none": "No disturbance.",
    "gas_class.not_known": "Not classified: pH or PCO2 is missing.",
    "gas_class.borderline": "At the border of normal.",
    "gas_class.acute_respiratory_acidosis": f"{_one_of('acute', 'acidosis')}{_SECOND}.",
    "gas_class.chronic_respiratory_acidosis":
        f"{_one_of('chronic', 'acidosis')}{_SECOND}{{acidotic:pick yes=, pH still low;no=}}.",
    "gas_class.acute_on_chronic_respiratory_acidosis": f"Acute-on-chronic respiratory acidosis{_SECOND}.",
    "gas_class.acute_respiratory_alkalosis": f"{_one_of('acute', 'alkalosis')}{_SECOND}.",
    "gas_class.chronic_respiratory_alkalosis": f"{_one_of('chronic', 'alkalosis')}{_SECOND}.",
    "gas_class.metabolic_acidosis": f"Metabolic acidosis{_SECOND}.",
    "gas_class.metabolic_alkalosis": f"Metabolic alkalosis{_SECOND}.",
    "reason.acidotic_all_the_same": "pH {ph:2} is still below {low:2}.",
    "reason.bicarbonate": "Bicarbonate {hco3:1} mmol/L (normal {low:0} to {high:0}).",
    "reason.lines_too_close":
        "It fits both lines, acute ({acute:1} mmol/L) and chronic ({chronic:1} mmol/L): too close to tell apart.",
    "reason.metabolic_line":
        "At bicarbonate {hco3:1} mmol/L a PaCO2 of {expected_paco2:gas} (within {tolerance:gas}) is expected.",
    "reason.paco2": "PaCO2 {paco2:gas} (normal {low:gas} to {high:gas}).",
    "reason.ph": "pH {ph:2} (normal {low:2} to {high:2}).",
    "reason.respiratory_lines":
        "Bicarbonate {hco3:1} mmol/L; {acute:1} is expected when acute, {chronic:1} when chronic "
        "(within {tolerance:trim} mmol/L).",
}  # fmt: skip

COURSE: Final[dict[str, str]] = {
    "course.at_gas": "measured at {gas_at:time}",
    "course.before_first_gas": "before the first gas at {gas_at:time}",
    "course.between_gases": "between the gases of {from_at:time} and {to_at:time}; nothing is judged by it",
    "course.beyond_last_gas": "after the last gas at {gas_at:time}; nothing is judged by it",
    "course.changed": "not drawn past the change at {changed_at:time}",
    "course.no_gas": "no gas after this change",
    "course.not_yet": "not before {at:time}",
}  # fmt: skip

TRENDS: Final[dict[str, str]] = {
    "leak.definition_not_known": "what the device calls leak is not known: a trend only, no limit",
    "leak.duty_assumed": "inspiration is taken as {share:fraction} of the breath",
    "leak.flag_not_judged":
        "Leak was over its limit in {over} of {of} readings, typed now and then: whether for {n} of {m} min, as its "
        "flag asks, is not known.",
    "leak.meaning_changed": "what the device calls leak changed at {at:time}: only what came after counts",
    "device.off_mask": "logged while the mask was off: not judged",
    "leak.off_mask": "leak was logged only while the mask was off (newest at {at:time}): not judged",
    "leak.no_values": "no leak values",
    "leak.typed_now_and_then": "readings typed now and then have no minutes",
    "leak.pressure_not_known": "the port's own leak is not known without pressures",
    "trend.few_points": "{points} points: too few to tell a trend from chance",
    "trend.fio2_not_known": "FiO2 not known at {at:time}",
    "trend.no_values": "no values",
    "trend.predicted_weight_not_known": "predicted body weight not known (height and sex are needed)",
    "trend.rate_not_known": "respiratory rate not known at {at:time}",
    "trend.rox_validated_in_high_flow": "validated on high-flow cannula, not on a mask",
    "trend.spo2_above_ceiling": "SpO2 {spo2:0} % at {at:time} is above {limit:0} %, where the curve is flat",
    "trend.too_few_for_interval": "{points} points: at least {needed} are needed for an interval",
    "trend.too_few_points": "{points} point(s): at least {needed} are needed for a slope",
}  # fmt: skip

UNDEFINED: Final[dict[str, str]] = {
    "undefined.air_only": "holds on room air only",
    "undefined.alveolar_not_positive": "the alveolar PO2 would not be positive: a value is wrong",
    "undefined.breath_longer_than_cycle": "inspiration would be longer than the breath",
    "undefined.fio2_unknown": "FiO2 not known",
    "undefined.fully_saturated": "says nothing at full saturation",
    "undefined.height_below_formula": "the formula does not hold below {low:0} cm",
    "undefined.hidden_by_metabolic_acidosis": "hidden by a metabolic acidosis",
    "undefined.hypercapnia_only": "holds in hypercapnia only",
    "undefined.kelman_below_10": "the curve does not hold below {low:0} mmHg",
    "undefined.missing": "{input:name} is missing",
    "undefined.no_breaths": "no breaths",
    "undefined.no_volume": "no volume measured",
    "undefined.outside": "{input:name} {value:trim}[[ {unit}]] is outside {low:trim} to {high:trim}",
    "undefined.pbw_unknown": "predicted body weight not known (height and sex are needed)",
    "undefined.pf_unknown": "P/F not known",
    "undefined.port_unknown": "the exhalation port's leak is not known",
    "undefined.result_not_positive": "the result would not be positive",
    "undefined.result_outside": "the result would be outside what is possible",
    "undefined.sex_unknown": "sex not known",
    "undefined.sf_unknown": "S/F not known",
    "undefined.spo2_above_97": "SpO2 {value:0} % is above 97 %, where the curve is flat",
    "undefined.tidal_volume_within_dead_space": "the tidal volume lies within the dead space",
}  # fmt: skip

SCORES: Final[dict[str, str]] = {
    "caveat.chronic_gain_varies": "sources print {low:trim} to {high:trim} mmol/L per 10 mmHg of PaCO2",
    "caveat.constants_from_memory": "a constant is from memory; confirm it locally",
    "caveat.other_rules_of_age": "two other published rules give {quarter:0} and {regression:0} mmHg",
    "caveat.usual_paco2_is_a_guess":
        "a guess from bicarbonate, spoilt by diuretics and any metabolic disturbance; nothing is judged by it",
    "caveat.within": "within {tolerance:gas}",
    "caveat.co2_production_and_dead_space_constant": "assumes constant CO2 production and dead space",
    "caveat.dead_space_assumed": "dead space is assumed",
    "caveat.points_from_memory": "the added points are from memory; confirm them locally ({source})",
    "caveat.ratio_misses_changed_mechanics": "does not follow when lung mechanics change",
    "caveat.tidal_volume_modelled_on_mask": "expired volume on a mask is modelled from leak",
    "caveat.validated_in_high_flow": "validated on high-flow cannula, not on a mask",
    "caveat.validated_intubated_no_leak": "validated intubated, without leak",
    "caveat.validated_off_support": "validated breathing without support",
    "hacor_updated.band":
        "{points:trim} points: {band:pick 0=lowest;1=second;2=third;3=highest} of four bands of risk",
    "news2.high": "{at_least:pick yes=at least ;no=}{lowest:0} points: high, emergency assessment [{sure}]",
    "news2.low": "{lowest:0} points: low [{sure}]",
    "news2.low_medium": "{lowest:0} points with one parameter at 3: urgent ward review [{sure}]",
    "news2.medium": "{at_least:pick yes=at least ;no=}{lowest:0} points: medium, urgent review [{sure}]",
    "news2.none": "{lowest:0} points [{sure}]",
    "news2.scale":
        "SpO2 scale {scale}[[ (the target is {low:0}-{high:0} %: scale 2 needs a clinician's record)]]",
    "population.acute_hypercapnia":
        "in acute hypercapnia (pH {ph:2}, PaCO2 {paco2:gas}), outside its population",
    "population.below_16": "age {age:0} is below 16, outside its population",
    "population.input_unknown": "whether it is inside its population is not known: {input:name} is missing",
    "population.not_copd": "not COPD, outside its population",
    "population.not_hypoxaemic": "P/F {pf:gas} is above {limit:gas}, outside its population",
    "population.not_on_mask": "not on the mask, outside its population",
    "population.support_unknown": "whether it was on the mask is not known",
    "population.unknown": "whether it is inside its population is not known",
    "rox.failure_likely": "ROX {rox:2} is below {failure_below:2} at {hours:hours}: failure likely",
    "rox.grey_zone": "ROX {rox:2}: between {failure_below:2} and {low_risk_from:2}, undecided",
    "rox.low_risk": "ROX {rox:2} is at or above {low_risk_from:2}: lower risk",
    "rox.not_known": "ROX not known",
    "rox.too_early": "at {hours:hours} it is too early: cut-offs begin at {first_hours:0} h",
    "score.inputs_missing": "missing: {missing:list}",
    "score.input_before_change":
        "{channel:name} of {at:time} does not count: settings or mask changed at {changed_at:time}",
    "score.oxygen_off_mask":
        "whether oxygen is given was not logged since the mask came off at {at:time}; what was set on the device "
        "does not count",
    "score.input_too_old": "{channel:name} of {at:time} does not count: more than {limit_min:minutes} old",
    "score.no_gas": "no gas to score",
    "score.no_vitals": "no vital signs logged",
    "score.switched_off": "{score:name} is switched off in the policy",
    "tidal_volume.leak_not_known": "tidal volume doubtful: leak not known",
    "tidal_volume.leak_too_large":
        "tidal volume doubtful: leak over {limit:0} L/min or {share:fraction} of the inspired volume",
    "tidal_volume.void": "tidal volume void: the mask was off, or no breath was measured",
}  # fmt: skip

DERIVED: Final[dict[str, str]] = {
    "caveat.berlin_grades_on_mask":
        "on a mask the 2012 definition grades mild only: beyond it the band of P/F is shown",
    "caveat.imputed_by": "imputed from SpO2, {method} method; the three methods differ by a severity class",
    "caveat.no_adult_cut_off_on_mask": "no adult cut-off exists on a mask",
    "caveat.oxygenation_criterion_only":
        "oxygenation criterion alone; timing, imaging and the origin of oedema are for a clinician",
    "caveat.square_wave_no_leak": "assumes square pressures without leak",
    "oxygenation.needs_a_pressure": "needs an expiratory pressure",
    "oxygenation.no_arterial_gas": "no arterial gas on support",
    "oxygenation.no_fixed_pressure": "no fixed pressures[[ in {mode}]]",
    "oxygenation.off_support": "off support at that time",
    "ventilation.no_gas_on_support": "no gas with a PCO2 on support",
    "ventilation.no_rate": "respiratory rate not known at that time",
    "ventilation.tidal_volume_off_mask":
        "tidal volume was logged only while the mask was off (newest at {at:time}): not judged",
    "ventilation.no_tidal_volume": "no tidal volume measured",
    "ventilation.no_wished_paco2": "the usual PaCO2 is not recorded",
}  # fmt: skip

TEMPLATES: Final[dict[str, str]] = DERIVED | SUPPORT | GAS | COURSE | TRENDS | UNDEFINED | SCORES
