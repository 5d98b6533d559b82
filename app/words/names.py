"""Names of markers, groups of flags, due items and levers, as they stand in a list or a heading."""

from typing import Final

MARKERS: Final[dict[str, str]] = {
    "marker.acidosis_off_support": "acidosis off support",
    "marker.fio2_need_rising": "oxygen need rising with SpO2 held",
    "marker.gain_lost": "gain lost",
    "marker.gas_overdue": "gas overdue",
    "marker.gcs_below_11": "GCS below 11",
    "marker.gcs_below_8": "GCS below 8",
    "marker.gcs_fall": "GCS fallen",
    "marker.hacor_above_5": "HACOR above 5 at 1-2 h",
    "marker.hacor_above_5_later": "HACOR above 5 later",
    "marker.hacor_above_8": "HACOR above 8 at 1-2 h",
    "marker.hdu_criterion": "pH below 7.30 or no better: level of care",
    "marker.late_failure": "acidosis again after 48 h of success",
    "marker.leak_large": "large leak",
    "marker.leak_over_limit": "leak over its limit",
    "marker.new_confusion": "new confusion or worse",
    "marker.no_gain_after_hours": "no gain after hours of support",
    "marker.over_oxygenation": "SpO2 too high on oxygen, hypercapnic risk",
    "marker.paco2_rising": "PaCO2 rising",
    "marker.pao2_below_45": "PaO2 below 45 mmHg (6 kPa)",
    "marker.pao2_below_45_on_highest_oxygen": "PaO2 below 45 mmHg (6 kPa) on the highest oxygen",
    "marker.pao2_below_60": "PaO2 below 60 mmHg (8 kPa)",
    "marker.pf_below_150_ards": "P/F below 150 mmHg (20 kPa) in ARDS",
    "marker.pf_low_at_1h": "P/F at or below 146 mmHg (19.5 kPa) after 1 h",
    "marker.ph_720_725_twice": "pH 7.20 to 7.25 twice, an hour apart",
    "marker.ph_below_715": "pH below 7.15",
    "marker.ph_below_715_before_support": "pH below 7.15 before support",
    "marker.ph_below_720_on_support": "pH below 7.20 on support",
    "marker.ph_below_severe": "pH below 7.25",
    "marker.ph_not_better": "pH not better at 1-2 h",
    "marker.ph_not_better_settling": "pH not better at 1-2 h, but settling",
    "marker.ph_not_better_severe": "pH below 7.25 and not better at 1-2 h",
    "marker.rate_below_12_drowsy": "rate below 12 and drowsy",
    "marker.rate_falling_worse_gas": "rate falling with a worse gas: tiring",
    "marker.rate_falling_worse_gcs": "rate falling with a lower GCS: tiring",
    "marker.sf_below_985": "S/F below 98.5",
    "marker.skin_check_overdue": "skin check overdue",
    "marker.spo2_above_range": "SpO2 above range",
    "marker.spo2_below_range": "SpO2 below range",
    "marker.spo2_deep": "SpO2 far below range",
    "marker.too_little_support": "too little support",
    "marker.venous_ph_below_severe": "venous pH below 7.25: confirm arterially",
}

GROUPS: Final[dict[str, str]] = {
    "group.acidosis": "acidosis",
    "group.consciousness": "consciousness",
    "group.contraindication": "contraindication",
    "group.mask": "mask",
    "group.oxygen": "oxygen",
    "group.timing": "timing",
}

DUE: Final[dict[str, str]] = {
    "due_item.arterial_gas": "arterial gas",
    "due_item.break_end": "end of the break",
    "due_item.ceiling": "ceiling of care",
    "due_item.complete_score": "complete the score",
    "due_item.gas": "blood gas",
    "due_item.mask_check": "mask check",
    "due_item.oxygen_review": "oxygen review",
    "due_item.probable_break": "ask about a probable break",
    "due_item.reassessment": "reassessment",
    "due_item.repeat_gas": "repeat blood gas",
    "due_item.skin_check": "skin check",
    "due_item.spo2_recheck": "SpO2 recheck",
}

LEVERS: Final[dict[str, str]] = {
    "lever_name.backup_rate": "backup rate",
    "lever_name.epap": "EPAP",
    "lever_name.fio2": "oxygen",
    "lever_name.inspiratory_time": "inspiratory time",
    "lever_name.mask": "leak, mask, exhalation port",
    "lever_name.pressure_support": "pressure support",
    "lever_name.secretions": "secretions, sedation, asynchrony",
    "lever_name.time_on_mask": "time on the mask",
}

TEMPLATES: Final[dict[str, str]] = MARKERS | GROUPS | DUE | LEVERS
