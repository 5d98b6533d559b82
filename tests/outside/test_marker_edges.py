"""Every marker with a published limit, at that limit itself: whether it counts there is as its source words it.

"Below 7.25" leaves 7.25 out, "30 or more" takes 30 in. The wording stands beside each row; `from memory` and
`secondary` where the source's own text was not read.
"""

from __future__ import annotations

import pytest

from tests.support.flag_cases import BEFORE, COPD, LUNG, START, met
from tests.support.truth_table import HACOR, LUNG_BASE, MAN, MORE, SPO2, WEANED

BASE = COPD + BEFORE + START
ARDS = LUNG.replace("pneumonia", "ards") + MORE
GAS = "02:00 ph 7.45 paco2 34 pao2 {} site arterial"
RATE = BASE + "device rr_total 02:00 02:20 {0} {0}"
VOLUMES = MAN + "01:30 ph 7.42 paco2 36 pao2 100 site arterial\ndevice vte 02:00 02:30 {0} {0}"
STIFF = MAN + "01:30 ph 7.42 paco2 36 pao2 {} site arterial\ndevice vte 02:00 02:30 680 680"
POINTS = HACOR + "02:00 ph 7.42 paco2 36 pao2 {} site arterial\n01:55 rr {} hr {} gcs 15"
LATE = BASE + "02:00 ph 7.36 paco2 55\nd2 {} ph 7.30 paco2 62"

CASES = [
    # marker, log, as of, the source's wording, the limit itself, just past it, whether the limit itself counts
    ("ph_below_severe", BASE + "02:00 ph {} paco2 70", "12:00", "Confalonieri 2005: pH < 7.25", "7.25", "7.24",
     False),
    ("ph_below_715", BASE + "02:00 ph {} paco2 80", "12:00", "BTS/ICS 2016 (from memory): pH < 7.15", "7.15", "7.14",
     False),
    ("ph_below_715_before_support", BASE + "00:40 ph {} paco2 80", "12:00", "BTS/ICS 2016 (secondary): pH < 7.15",
     "7.15", "7.14", False),
    ("ph_below_720_on_support", BASE + "02:00 ph {} paco2 80", "12:00", "after Plant: pH < 7.20", "7.20", "7.19",
     False),
    ("ph_720_725_twice", BASE + "02:00 ph 7.22 paco2 80\n03:00 ph {} paco2 80", "12:00", "after Plant: pH 7.20-7.25",
     "7.25", "7.24", True),
    ("hdu_criterion", BASE + "02:00 ph {} paco2 70", "12:00", "BTS 2002: pH < 7.30", "7.30", "7.29", False),
    ("pf_low_at_1h", LUNG_BASE + GAS, "12:00", "Antonelli 2001: P/F <= 146 mmHg", "73", "72.9", True),
    ("pf_below_150_ards", ARDS + GAS, "12:00", "Thille 2013: parts P/F > 150 from the rest", "75", "74.9", True),
    ("pao2_below_45", BASE + "02:00 ph 7.40 pao2 {} site arterial", "12:00", "after Plant: PaO2 < 6 kPa (45 mmHg)",
     "45", "44", False),
    ("sf_below_985", LUNG_BASE.replace("fio2 50", "fio2 80") + "device spo2 01:20 01:25 {0} {0}", "01:24",
     "Spada 2011: S/F < 98.5", "78.8", "78", False),
    ("hacor_above_5", POINTS, "12:00", "Duan 2017: HACOR > 5", ("70", "35", "110"), ("70", "36", "110"), False),
    ("rr_above_25", RATE, "02:30", "BTS/ICS 2016 (from memory): RR > 25", "25", "26", False),
    ("rr_above_30", RATE, "02:30", "Confalonieri 2005: RR >= 30", "30", "31", True),
    ("rr_above_35", RATE, "02:30", "consensus (from memory): RR > 35", "35", "36", False),
    ("gcs_below_8", BASE + "02:00 gcs {}", "12:00", "BTS/ICS 2016 (from memory): GCS < 8", "8", "7", False),
    ("gcs_below_11", BASE + "02:00 gcs {}", "12:00", "Confalonieri 2005: GCS < 11", "11", "10", False),
    ("sbp_below_90", BASE + "02:00 sbp {}", "12:00", "trial criteria (secondary): SBP < 90", "90", "89", False),
    ("over_oxygenation", BASE + SPO2, "02:40",
     "Echevarria 2021: above 92 %", "92", "93", False),
    ("vt_high_hypoxaemic", VOLUMES, "02:40", "Carteaux 2016 (from memory): > 9.5 mL/kg (70.57 kg: 670.4 mL)", "670",
     "671", False),
    ("vt_high_hypoxaemic", STIFF, "02:40", "Carteaux 2016 (from memory): P/F <= 200", "100", "99", True),
    ("too_little_support", COPD + BEFORE + START.replace("ipap 20", "ipap {}") + "02:00 ph 7.34 paco2 60", "12:00",
     "BTS/ICS 2016 (from memory): to 20-30 cmH2O", "20", "19", False),
    ("late_failure", LATE, "d3 00:00", "Ozyilmaz 2014: > 48 h after success", "02:00", "02:01", False),
    ("no_gain_after_hours", BASE + "{} ph 7.31 paco2 68", "12:00", "BTS 2002 (from memory): after 4-6 h", "05:00",
     "05:01", True),
    ("weaning_ready", BASE + WEANED.replace("d1 02:00 ph 7.38", "d1 02:00 ph {}"), "d1 12:00",
     "Sellares 2017 (from memory): pH > 7.35", "7.35", "7.36", False),
    ("weaning_ready", BASE + "12:00 ph 7.38 paco2 50 rr 20 spo2 90\nd1 02:00 ph 7.38 paco2 50 rr {} spo2 90",
     "d1 12:00", "Sellares 2017 (from memory): RR < 25", "25", "24", False),
]  # fmt: skip


def filled(log: str, value: str | tuple[str, ...]) -> str:
    """A log with a value, or several, where it leaves room."""
    return log.format(*value) if isinstance(value, tuple) else log.format(value)


@pytest.mark.parametrize(("marker", "log", "as_of", "wording", "limit", "past", "counts"), CASES)
def test_a_marker_counts_its_limit_as_its_source_words_it(
    marker: str, log: str, as_of: str, wording: str, limit: str, past: str, counts: bool
) -> None:
    assert bool(met(marker, filled(log, limit), as_of)) is counts, wording
    assert met(marker, filled(log, past), as_of), f"{wording}: not met past its limit"


@pytest.mark.parametrize(("pao2", "fio2"), [("42.34", "0.29"), ("68.62", "0.47"), ("84.68", "0.58")])
def test_a_quotient_that_a_float_cannot_say_counts_as_what_it_is(pao2: str, fio2: str) -> None:
    """P/F 146 on these oxygens is 146.00000000000003 to a float: at its limit all the same."""
    log = LUNG_BASE + f"02:00 ph 7.45 paco2 34 pao2 {pao2} site arterial gas_fio2 {fio2}"
    assert met("pf_low_at_1h", log) == "02:00-"
