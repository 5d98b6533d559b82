"""What a sample may stand for."""

import math

import pytest

from core.physiology.specimen import (
    PUBLISHED_DIFFERENCES,
    rules_out_hypercapnia,
    venous_rule_out,
    why_not_arterial,
)


@pytest.mark.parametrize(
    ("site", "channel", "stands"),
    [
        ("arterial", "pao2", True), ("capillary", "ph", True), ("capillary", "paco2", True),
        ("capillary", "pao2", False), ("capillary", "sao2", False), ("venous", "ph", False),
        ("venous", "paco2", False), ("venous", "pao2", False),
    ],
)  # fmt: skip
def test_what_stands_for_arterial(site: str, channel: str, stands: bool) -> None:
    assert (why_not_arterial(site, channel) is None) is stands


def test_an_unknown_site_is_refused() -> None:
    with pytest.raises(ValueError, match="arterial, capillary, venous"):
        why_not_arterial("umbilical", "ph")


def test_the_rule_out_is_below_45_and_6_0_alike() -> None:
    """Below 45 mmHg (6.0 kPa): sensitivity and NPV 100 %, n = 529. On the limit it rules out nothing."""
    assert rules_out_hypercapnia([44.0, 45.0, 5.9 * 7.50062, 6.0 * 7.50062]).tolist() == [
        True,
        False,
        True,
        False,
    ]
    assert not rules_out_hypercapnia(math.nan)


def test_shock_and_the_unknown_are_said() -> None:
    assert venous_rule_out(40.0).values["shock_known"] is False
    assert venous_rule_out(40.0, shock=False).values["shock_known"] is True
    assert venous_rule_out(40.0, shock=True).key == "specimen.no_rule_out_in_shock"
    assert venous_rule_out(math.nan).key == "specimen.pco2_unknown"


def test_published_differences_are_for_show() -> None:
    """Kelly, Byrne, Lou, Chung: as printed."""
    assert [d.ph_arterial_minus_venous for d in PUBLISHED_DIFFERENCES] == [0.034, 0.03, 0.02, 0.017]
