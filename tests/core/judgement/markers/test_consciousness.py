"""GCS, new confusion, a slow rate in a drowsy patient.

Sources: Confalonieri, ERJ 2005;25:348 (GCS below 11); BTS/ICS 2016 (below 8, deteriorating consciousness; from
memory).
"""

import pytest

from tests.support.flag_cases import COPD, START, met

BASE = COPD + START


@pytest.mark.parametrize(
    ("marker", "log", "expected"),
    [
        ("gcs_below_11", "02:00 gcs 11", ""),
        ("gcs_below_11", "02:00 gcs 10\n04:00 gcs 11", "02:00-04:00"),
        ("gcs_below_8", "02:00 gcs 8", ""),
        ("gcs_below_8", "02:00 gcs 7", "02:00-"),
        ("gcs_fall", "02:00 gcs 15\n04:00 gcs 14", ""),
        ("gcs_fall", "02:00 gcs 15\n04:00 gcs 13", "04:00-"),
        ("gcs_fall", "02:00 gcs 15\n03:00 gcs 14\n04:00 gcs 13", "04:00-"),
        ("gcs_fall", "02:00 gcs 13", ""),  # nothing to fall from
        ("gcs_fall", "02:00 gcs 15\n04:00 gcs 13\n06:00 gcs 14", "04:00-06:00"),
        ("gcs_fall", "02:00 gcs 15\nd1 02:01 gcs 13", ""),  # the best is more than 24 h old
        ("gcs_fall", "02:00 gcs 15\nd1 02:00 gcs 13", "d1 02:00-"),
        ("new_confusion", "02:00 acvpu alert\n04:00 acvpu confusion", "04:00-"),
        ("new_confusion", "02:00 acvpu confusion", ""),  # not known to be new
        ("new_confusion", "02:00 acvpu confusion\n04:00 acvpu voice", "04:00-"),  # worse
        ("new_confusion", "02:00 acvpu voice\n04:00 acvpu confusion", ""),  # better
        ("new_confusion", "02:00 acvpu alert\n04:00 acvpu voice\n05:00 acvpu alert", "04:00-05:00"),
        ("rate_below_12_drowsy", "02:00 rr 11 acvpu voice", "02:00-"),
        ("rate_below_12_drowsy", "02:00 rr 12 acvpu voice", ""),
        ("rate_below_12_drowsy", "02:00 rr 11 acvpu alert gcs 15", ""),
        ("rate_below_12_drowsy", "02:00 rr 11 gcs 13", "02:00-"),
        ("rate_below_12_drowsy", "02:00 rr 11 gcs 14", ""),
        ("rate_below_12_drowsy", "02:00 rr 11", ""),  # nobody looked
        ("rate_below_12_drowsy", "02:00 acvpu voice\n02:31 rr 11", ""),  # stale: 31 min
        ("rate_below_12_drowsy", "02:00 acvpu voice\n02:30 rr 11", "02:30-"),
        ("rate_below_12_drowsy", "02:00 rr 11 acvpu voice\n03:00 rr 14 acvpu voice", "02:00-03:00"),
    ],
)
def test_consciousness_at_its_edges(marker, log, expected):
    assert met(marker, BASE + log, "d2 00:00") == expected
