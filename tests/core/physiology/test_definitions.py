"""The global definition of 2023/24 for patients who are not intubated (Matthay, AJRCCM 2024;209:37)."""

import math

import pytest

from core.physiology.definitions import Band, global_not_intubated

NAN = math.nan


@pytest.mark.parametrize(
    ("pf", "sf", "spo2", "peep", "flow", "band"),
    [
        (300, NAN, NAN, 5, NAN, Band.MET_UNGRADED), (301, NAN, NAN, 5, NAN, Band.NOT_MET),
        (NAN, 315, 97, 5, NAN, Band.MET_UNGRADED), (NAN, 316, 97, 5, NAN, Band.NOT_MET),
        (NAN, 300, 98, 5, NAN, Band.NOT_KNOWN), (350, 310, 96, 5, NAN, Band.MET_UNGRADED),
        (50, NAN, NAN, 5, NAN, Band.MET_UNGRADED), (200, NAN, NAN, 4.9, NAN, Band.NOT_MET),
        (200, NAN, NAN, NAN, 30, Band.MET_UNGRADED), (200, NAN, NAN, NAN, 29, Band.NOT_MET),
        (200, NAN, NAN, NAN, NAN, Band.NOT_KNOWN), (NAN, NAN, NAN, 6, NAN, Band.NOT_KNOWN),
    ],
)  # fmt: skip
def test_edges(pf: float, sf: float, spo2: float, peep: float, flow: float, band: Band) -> None:
    assert global_not_intubated(pf, sf, spo2, peep, flow) == band
