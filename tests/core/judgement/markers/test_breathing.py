"""Rates that stay high, the backup rate taking over, tidal volume.

Sources: BTS/ICS 2016 (rate above 25, from memory); Confalonieri, ERJ 2005;25:348 (30); Carteaux, CCM 2016;44:282
(9.5 mL/kg with P/F at most 200, threshold from memory). Counts of minutes are common practice, no source.
"""

import pytest

from tests.support.flag_cases import COPD, LUNG, START, met, told

BASE = COPD + START


@pytest.mark.parametrize(
    ("log", "expected"),
    [
        ("device rr_total 02:00 02:20 26 26", "02:00-"),
        ("device rr_total 02:00 02:19 26 26", ""),
        ("device rr_total 02:00 03:00 25 25", ""),
        ("device rr_total 01:00 02:00 30 30", ""),  # the first hour is treatment
        ("device rr_total 01:00 02:20 30 30", "02:00-"),
        ("02:00 rr 30", ""),
        ("02:00 rr 30\n02:30 rr 28", "02:30-"),
        ("02:00 rr 30\n02:30 rr 25\n03:00 rr 28", ""),
        ("02:00 rr 30\n02:30 rr 28\n04:00 rr 24", "02:30-04:00"),
        ("device rr_total 02:00 02:40 27 27\n02:00 rr 22", "02:31-"),  # a fresh count beats the machine
        ("02:00 mask_off\ndevice rr_total 02:00 02:40 40 40", ""),  # not on the patient
    ],
)
def test_rate_above_25_sustained(log, expected):
    found = met("rr_above_25", BASE + log, "04:30")
    if expected == "02:31-":
        assert found == ""  # nine minutes without a count are not twenty
    else:
        assert found == expected


@pytest.mark.parametrize(
    ("log", "expected"),
    [
        ("device rr_total 02:00 02:20 30 30", "02:00-"),  # Confalonieri: 30 or more
        ("device rr_total 02:00 03:00 29 29", ""),
        ("02:00 rr 30\n02:30 rr 30", "02:30-"),
        ("02:00 rr 30\n02:30 rr 29", ""),
        ("02:00 rr 30\n02:30 rr 31\n04:00 rr 29", "02:30-04:00"),
        ("02:00 rr 30\ndevice rr_total 02:00 02:20 31 31", "02:00-"),  # a count of 30 does not say that it is lower
        ("02:00 rr 29\ndevice rr_total 02:00 02:20 31 31", ""),
    ],
)
def test_a_rate_of_30_counts_itself(log, expected):
    assert met("rr_above_30", BASE + log, "04:30" if "04:00" in log else "02:30") == expected


def test_each_limit_has_its_own_marker():
    log = BASE + "device rr_total 02:00 02:30 33 33"
    assert [met(f"rr_above_{n}", log) for n in (25, 30, 35)] == ["02:00-", "02:00-", ""]


TAKEN = "device rr_total 01:05 03:00 22 22\ndevice rr_total 03:00 04:00 12 12\n"


@pytest.mark.parametrize(
    ("log", "expected"),
    [
        (BASE + TAKEN, ""),  # GCS and PaCO2 not known to be worse
        (BASE + TAKEN + "02:50 gcs 15\n03:20 gcs 14", "03:20-"),
        (BASE + TAKEN + "02:50 gcs 15\n03:20 gcs 15", ""),
        (BASE + TAKEN + "02:50 gcs 15 rr 30\n03:20 gcs 14 rr 30\n03:45 rr 30", ""),  # a count beats the machine
        (BASE + TAKEN + "02:50 paco2 60\n03:30 paco2 65", "03:30-"),
        (BASE + TAKEN + "02:50 paco2 60\n03:30 paco2 64", ""),  # inside noise
        (BASE.replace("BPAP-ST", "BPAP-T") + TAKEN + "02:50 gcs 15\n03:20 gcs 14", ""),
        (BASE.replace("copd", "'obesity hypoventilation'") + TAKEN + "02:50 gcs 15\n03:20 gcs 14", ""),
        (BASE.replace("copd", "neuromuscular") + TAKEN + "02:50 gcs 15\n03:20 gcs 14", ""),
        (BASE + "00:50 gcs 15\ndevice rr_total 01:05 04:00 12 12\n03:20 gcs 14", ""),  # not new
        (BASE + TAKEN + "device spont_percent 03:00 04:00 90 90\n02:50 gcs 15\n03:20 gcs 14", ""),  # own breaths
    ],
)
def test_backup_rate_taking_over(log, expected):
    assert met("backup_takeover", log, "04:00") == expected


# 70.57 kg predicted: 9.5 mL/kg is 670 mL (ARDSNet)
MAN = LUNG.replace("indication", "sex male height 175 indication") + START.replace("fio2 30", "fio2 50")
POOR = "01:30 ph 7.42 paco2 36 pao2 100 site arterial\n"  # P/F 200


@pytest.mark.parametrize(
    ("log", "expected"),
    [
        (MAN + POOR + "device vte 02:00 02:30 680 680", "02:30-"),  # two quarters of an hour
        (MAN + POOR + "device vte 02:00 02:15 680 680", ""),
        (MAN + POOR + "device vte 02:00 03:00 670 670", ""),  # 9.49
        (MAN + POOR.replace("100", "101") + "device vte 02:00 03:00 680 680", ""),  # P/F 202
        (MAN.replace("sex male ", "") + POOR + "device vte 02:00 03:00 680 680", ""),  # no predicted weight
        (MAN.replace("pneumonia", "copd") + POOR + "device vte 02:00 03:00 680 680", ""),
        (MAN + "01:00 leak_definition unintentional\n" + POOR
         + "device leak 02:00 03:00 40 40\ndevice vte 02:00 03:00 680 680", ""),  # leak makes it doubtful
        (MAN + POOR + "device vte 08:00 09:00 680 680", ""),  # the gas is stale, and the first hours are over
        (MAN + POOR + "device vte 04:30 05:20 680 680", "05:00-"),  # 4 h on the mask
        (MAN + POOR + "device vte 04:45 05:30 680 680", ""),  # later than it was validated
    ],
)  # fmt: skip
def test_tidal_volume_above_9_5_in_hypoxaemic_failure(log, expected):
    as_of = "09:00" if "08:00" in log else "05:20" if "05:20" in log else "05:30" if "05:30" in log else "02:40"
    assert met("vt_high_hypoxaemic", log, as_of) == expected


def test_a_leak_nobody_defined_is_said_beside_the_volume():
    said = told("vt_high_hypoxaemic", MAN + POOR + "device vte 02:00 02:30 680 680", "02:40")
    assert said["evidence.unknown"].values["quantity"] == "leak"
