"""One row for each marker: a log that meets it, and single changes after which it must not be met.

`edge`: the value or time at its limit, on the side that does not count. `missing`: an input left out. `stale`: an
input too old to count; None where the marker reads one value alone (an old one is then said to be stale). `outside`:
another population; None where it is meant for everyone. A change is (old text, new text).
"""

from __future__ import annotations

from dataclasses import dataclass

from tests.support.flag_cases import BEFORE, COPD, LUNG, START

Change = tuple[str, str]
BASE = COPD + BEFORE + START
OFF = (START, "")
"""Never on support."""
LATER = START.replace("01:00", "02:20")
MORE = START.replace("fio2 30", "fio2 50")
LEAK = COPD + START + "01:00 leak_definition unintentional\n"
LUNG_BEFORE = "00:30 ph 7.45 paco2 34 pao2 60 site arterial gas_fio2 0.4 rr 34 gcs 15\n"
LUNG_BASE = LUNG + LUNG_BEFORE + MORE
HACOR = LUNG + "00:30 ph 7.42 paco2 36 pao2 60 site arterial gas_fio2 0.4 rr 34 gcs 15 hr 110\n" + MORE
HACOR_GAS = "02:00 ph 7.42 paco2 36 pao2 60 site arterial\n01:55 rr 36 hr 125 gcs 15"
MAN = LUNG.replace("indication", "sex male height 175 indication") + MORE
RISK = "00:20 sofa 8 pneumonia yes pulmonary_ards yes immunosuppression no septic_shock no\n"
TAKEN = "device rr_total 01:05 03:00 22 22\ndevice rr_total 03:00 04:00 12 12\n"
SET = "{} rr {} spo2 97 hr 80 sbp 120 temp 37.0 acvpu alert\n"
WEANED = "12:00 ph 7.38 paco2 50 rr 20 spo2 90\nd1 02:00 ph 7.38 paco2 50 rr 20 spo2 90"
SPO2 = "device spo2 02:00 02:40 {0} {0}"
COPD_FOR_LUNG = ("indication pneumonia", "indication copd")


@dataclass(frozen=True)
class Row:
    """The truth table of one marker, as of a moment."""

    log: str
    edge: Change
    missing: Change
    stale: Change | None = None
    outside: Change | None = None
    as_of: str = "12:00"


ROWS = {
    # acidosis
    "ph_below_severe": Row(BASE + "02:00 ph 7.24 paco2 70", ("7.24", "7.25"), ("ph 7.24", "")),
    "venous_ph_below_severe": Row(BASE + "02:00 ph 7.24 paco2 70 site venous", ("7.24", "7.25"), ("ph 7.24", "")),
    "ph_below_715": Row(BASE + "02:00 ph 7.14 paco2 80", ("7.14", "7.15"), ("ph 7.14", ""), outside=OFF),
    "ph_below_715_before_support": Row(BASE + "00:40 ph 7.14 paco2 80", ("7.14", "7.15"), ("ph 7.14", "")),
    "ph_below_720_on_support": Row(BASE + "02:00 ph 7.19 paco2 80", ("7.19", "7.20"), ("ph 7.19", ""), outside=OFF),
    "ph_720_725_twice": Row(
        BASE + "02:00 ph 7.22 paco2 80\n03:00 ph 7.23 paco2 80",
        ("03:00", "02:59"),
        ("ph 7.23", ""),
        outside=OFF,
    ),
    "ph_not_better_severe": Row(
        COPD + BEFORE + LATER + "03:30 ph 7.249 paco2 70",
        ("7.249", "7.25"),
        ("ph 7.249", ""),
        ("02:20 mode", "02:31 mode"),
        (LATER, ""),
    ),
    "ph_not_better": Row(BASE + "02:00 ph 7.313 paco2 70", ("7.313", "7.314"), ("ph 7.313", ""), outside=OFF),
    "ph_not_better_settling": Row(
        BASE + "02:00 ph 7.30 paco2 66 gcs 15\n01:55 rr 12",
        ("rr 12", "rr 11"),
        ("rr 12", "hr 90"),
        ("01:55 rr", "01:29 rr"),
        OFF,
    ),
    "hdu_criterion": Row(BASE + "02:00 ph 7.299 paco2 70", ("7.299", "7.30"), ("ph 7.299", ""), outside=OFF),
    "paco2_rising": Row(
        COPD + START + "02:00 paco2 60\n04:00 paco2 64.9",
        ("64.9", "64.8"),
        ("02:00 paco2 60", ""),
        ("04:00", "08:01"),
    ),
    "no_gain_after_hours": Row(BASE + "05:00 ph 7.31 paco2 68", ("05:00", "04:59"), ("ph 7.31", "")),
    "too_little_support": Row(
        COPD + BEFORE + START.replace("ipap 20", "ipap 19") + "02:00 ph 7.34 paco2 60",
        ("ipap 19", "ipap 20"),
        ("02:00 ph 7.34", "02:00"),
        outside=("copd", "pneumonia"),
    ),
    "gain_lost": Row(
        BASE + "02:00 ph 7.36 paco2 55\n05:00 ph 7.32 paco2 62",
        ("7.32 paco2 62", "7.33 paco2 55"),
        ("02:00 ph 7.36 paco2 55", ""),
        outside=OFF,
    ),
    "oxygen_gain_lost": Row(
        LUNG_BASE + "02:00 ph 7.42 paco2 36 pao2 100 site arterial\n05:00 ph 7.42 paco2 36 pao2 85 site arterial",
        ("pao2 85", "pao2 87"),
        ("pao2 85", ""),
        outside=(MORE, ""),
    ),
    "late_failure": Row(
        BASE + "02:00 ph 7.36 paco2 55\nd2 03:00 ph 7.30 paco2 62",
        ("d2 03:00", "d2 02:00"),
        ("02:00 ph 7.36", "02:00"),
        outside=OFF,
        as_of="d3 00:00",
    ),
    "acidosis_off_support": Row(BASE + "02:00 mask_off\n02:20 ph 7.34 paco2 60", ("7.34", "7.35"), ("ph 7.34", "")),
    # oxygen
    "pao2_below_60": Row(BASE + "02:00 ph 7.40 pao2 59 site arterial", ("pao2 59", "pao2 60"), ("pao2 59", "")),
    "pao2_below_45": Row(BASE + "02:00 ph 7.40 pao2 44 site arterial", ("pao2 44", "pao2 45"), ("pao2 44", "")),
    "pao2_below_45_on_highest_oxygen": Row(
        BASE + "02:00 ph 7.40 pao2 44 site arterial gas_fio2 0.8",
        ("gas_fio2 0.8", "gas_fio2 0.79"),
        ("pao2 44", ""),
    ),
    "pf_low_at_1h": Row(
        LUNG_BASE + "02:00 ph 7.45 paco2 34 pao2 73 site arterial",
        ("pao2 73", "pao2 73.5"),
        ("02:00 ph", "01:30 o2_flow 10\n02:00 ph"),
        ("02:00 ph", "02:31 ph"),
        COPD_FOR_LUNG,
    ),
    "pf_below_150_ards": Row(
        LUNG.replace("pneumonia", "ards") + MORE + "02:00 ph 7.45 paco2 34 pao2 75 site arterial",
        ("pao2 75", "pao2 75.1"),
        ("pao2 75", ""),
        outside=("ards", "pneumonia"),
    ),
    "sf_below_985": Row(
        LUNG + LUNG_BEFORE + START.replace("fio2 30", "fio2 90") + "device spo2 01:20 01:25 88 88",
        ("88 88", "89 89"),
        ("fio2 90", ""),
        ("01:00 mode", "01:10 mode"),
        COPD_FOR_LUNG,
        "01:24",
    ),
    "spo2_deep": Row(
        BASE + "device spo2 02:00 02:02 83 83",
        ("02:02", "02:01"),
        ("device spo2 02:00 02:02 83 83", ""),
        as_of="02:02",
    ),
    "spo2_below_range": Row(
        BASE + "device spo2 02:00 02:15 87 87",
        ("02:15", "02:14"),
        ("device spo2 02:00 02:15 87 87", ""),
        as_of="02:15",
    ),
    "over_oxygenation": Row(
        BASE + SPO2.format(93),
        ("93 93", "92 92"),
        (SPO2.format(93), ""),
        outside=(BASE, LUNG + MORE),
        as_of="02:40",
    ),
    "over_oxygenation_far": Row(
        BASE + SPO2.format(97),
        ("97 97", "96 96"),
        (SPO2.format(97), ""),
        outside=(BASE, LUNG + MORE),
        as_of="02:40",
    ),
    "spo2_above_range": Row(LUNG + START + SPO2.format(99), ("99 99", "98 98"), (" fio2 30", ""), as_of="02:40"),
    "fio2_need_rising": Row(
        BASE + "device spo2 01:30 04:00 90 90\n03:00 fio2 40%",
        ("40%", "39%"),
        ("device spo2 01:30 04:00 90 90", ""),
        ("01:30 04:00", "01:30 02:20"),
        (START, "01:00 fio2 30\n"),
        "04:00",
    ),
    "hacor_above_5": Row(
        HACOR + "02:00 ph 7.42 paco2 36 pao2 70 site arterial\n01:55 rr 36 hr 110 gcs 15",
        ("rr 36", "rr 35"),
        (" rr 36", ""),
        ("01:55 rr", "01:29 rr"),
        COPD_FOR_LUNG,
    ),
    "hacor_above_5_later": Row(
        HACOR + "08:00 ph 7.42 paco2 36 pao2 70 site arterial\n07:55 rr 36 hr 110 gcs 15",
        ("rr 36", "rr 35"),
        (" rr 36", ""),
        ("07:55 rr", "07:29 rr"),
        COPD_FOR_LUNG,
    ),
    "hacor_8_or_more": Row(
        HACOR + HACOR_GAS, ("hr 125", "hr 120"), (" hr 125", ""), ("01:55 rr", "01:29 rr"), COPD_FOR_LUNG
    ),
    "hacor_updated_above_10_5": Row(
        RISK + HACOR + HACOR_GAS.replace("hr 125", "hr 110"),
        ("sofa 8 pneumonia yes pulmonary_ards yes", "sofa 0 pneumonia yes pulmonary_ards no"),
        ("sofa 8 pneumonia yes pulmonary_ards yes", "pneumonia yes"),
        outside=COPD_FOR_LUNG,
    ),
    # consciousness
    "gcs_below_8": Row(BASE + "02:00 gcs 7", ("gcs 7", "gcs 8"), ("gcs 7", "hr 90")),
    "gcs_below_11": Row(BASE + "02:00 gcs 10", ("gcs 10", "gcs 11"), ("gcs 10", "hr 90")),
    "gcs_fall": Row(
        BASE + "02:00 gcs 13",
        ("gcs 13", "gcs 14"),
        (" gcs 15", ""),
        ("02:00 gcs", "d1 00:31 gcs"),
        as_of="d1 12:00",
    ),
    "new_confusion": Row(
        BASE + "02:00 acvpu alert\n04:00 acvpu confusion",
        ("04:00 acvpu confusion", "04:00 acvpu alert"),
        ("02:00 acvpu alert", ""),
    ),
    "news2_rise": Row(
        LUNG + START + SET.format("02:00", 20) + SET.format("04:00", 22),
        ("rr 22", "rr 20"),
        ("rr 22 spo2 97", ""),
        ("04:00", "06:01"),
    ),
    # breathing
    "rate_falling_worse_gas": Row(
        COPD + START + "02:00 ph 7.32 paco2 60 rr 30\n04:00 ph 7.28 paco2 62 rr 23",
        ("rr 23", "rr 24"),
        ("rr 23", ""),
        ("04:00", "08:01"),
    ),
    "rate_falling_worse_gcs": Row(
        COPD + START + "02:00 rr 30 gcs 15\n03:00 rr 23 gcs 14",
        ("rr 23", "rr 24"),
        ("rr 23", ""),
        ("03:00", "08:01"),
    ),
    "rate_below_12_drowsy": Row(
        BASE + "02:00 acvpu voice\n02:30 rr 11",
        ("rr 11", "rr 12"),
        ("02:00 acvpu voice", ""),
        ("02:30", "02:31"),
    ),
    **{
        f"rr_above_{n}": Row(
            BASE + f"device rr_total 02:00 02:20 {first} {first}",
            (f"{first} {first}", f"{first - 1} {first - 1}"),
            (f"device rr_total 02:00 02:20 {first} {first}", f"02:00 rr {first}"),
            outside=OFF,
            as_of="02:30",
        )
        for n, first in ((25, 26), (30, 30), (35, 36))  # 30 counts itself (Confalonieri)
    },
    "backup_takeover": Row(
        COPD + START + TAKEN + "02:50 gcs 15\n03:20 gcs 14",
        ("gcs 14", "gcs 15"),
        ("03:20 gcs 14", ""),
        outside=("copd", "neuromuscular"),
        as_of="04:00",
    ),
    "vt_high_hypoxaemic": Row(
        MAN + "01:30 ph 7.42 paco2 36 pao2 100 site arterial\ndevice vte 02:00 02:30 680 680",
        ("pao2 100", "pao2 101"),
        ("height 175", ""),
        outside=COPD_FOR_LUNG,
        as_of="02:40",
    ),
    "apnoea": Row(BASE + "02:00 apnoea", ("02:00", "12:01"), ("02:00 apnoea", ""), outside=OFF),
    # circulation
    "sbp_below_90": Row(BASE + "02:00 sbp 89", ("sbp 89", "sbp 90"), ("02:00 sbp 89", "")),
    "lactate_above_2": Row(BASE + "02:00 ph 7.30 lactate 2.1", ("2.1", "2.0"), ("lactate 2.1", "")),
    "lactate_above_4": Row(BASE + "02:00 ph 7.30 lactate 4.1", ("4.1", "4.0"), ("lactate 4.1", "")),
    "lactate_rising": Row(BASE + "02:00 lactate 1.8\n04:00 lactate 2.3", ("1.8", "1.9"), ("02:00 lactate 1.8", "")),
    "arrest": Row(BASE + "02:00 arrest", ("02:00", "12:01"), ("02:00 arrest", "")),
    "spo2_fall_after_pressure": Row(
        BASE + "03:00 ipap 24\ndevice spo2 02:00 03:20 92 92\ndevice spo2 03:20 03:40 86 86",
        ("92 92", "90 90"),
        ("03:00 ipap 24", ""),
        ("03:00 ipap", "02:15 ipap"),
        (START, "01:00 fio2 30\n"),
        "03:40",
    ),
    "sbp_fall_after_pressure": Row(
        BASE + "03:00 ipap 24\n02:50 sbp 130\n03:30 sbp 100",
        ("sbp 100", "sbp 101"),
        ("02:50 sbp 130", ""),
        ("03:30", "04:01"),
        (START, "01:00 fio2 30\n"),
    ),
    # mask
    "leak_over_limit": Row(
        LEAK + "device leak 02:00 02:10 31 31",
        ("02:10", "02:09"),
        ("01:00 leak_definition unintentional\n", ""),
        outside=(START, ""),
        as_of="02:20",
    ),
    "leak_large": Row(
        LEAK + "device leak 02:00 02:30 61 61",
        ("61 61", "60 60"),
        ("01:00 leak_definition unintentional\n", ""),
        outside=(START, ""),
        as_of="02:30",
    ),
    "vt_not_trusted": Row(
        LEAK + "device vte 02:00 03:00 400 400\ndevice leak 02:00 03:00 31 31",
        ("31 31", "20 20"),
        ("01:00 leak_definition unintentional\n", ""),
        outside=(START, ""),
        as_of="03:00",
    ),
    "intolerance": Row(
        BASE + "02:00 mask_off\n02:16 mask_on", ("02:16", "02:15"), (BEFORE, ""), as_of="02:40", outside=OFF
    ),
    "not_tolerated": Row(
        BASE + "02:00 comfort 'not tolerated'",
        ("'not tolerated'", "poor"),
        ("02:00 comfort 'not tolerated'", ""),
        outside=OFF,
    ),
    # contraindication
    "vomiting": Row(BASE + "02:00 vomiting", ("02:00", "00:50"), ("02:00 vomiting", ""), outside=OFF),
    "agitation": Row(BASE + "02:00 agitation", ("02:00", "00:50"), ("02:00 agitation", ""), outside=OFF),
    "undrained_pneumothorax": Row(BASE + "02:00 pneumothorax yes", ("yes", "no"), ("02:00 pneumothorax yes", "")),
    # timing and weaning
    "gas_overdue": Row(BASE, ("12:00", "12:00"), (START, ""), as_of="03:01"),
    "skin_check_overdue": Row(BASE, ("12:00", "12:00"), (START, ""), outside=OFF, as_of="05:01"),
    "weaning_ready": Row(
        BASE + WEANED,
        ("d1 02:00 ph 7.38", "d1 02:00 ph 7.35"),
        ("rr 20", "hr 90"),
        ("d1 02:00", "d1 00:30"),
        OFF,
        "d1 12:00",
    ),
}
