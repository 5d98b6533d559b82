"""HACOR against its table and worked examples: Duan, Intensive Care Med 2017;43:192-199.

The table is from a secondary tabulation that agrees with memory. Updated HACOR (Duan, Crit Care 2022;26:196):
its added points are from memory.
"""

import math

import numpy as np
import pytest

from core.judgement import scores

WORKED = [
    (128, 7.28, 14, 140, 34, 11),
    (100, 7.36, 15, 190, 28, 2),
    (120, 7.35, 15, 201, 30, 0),
    (121, 7.34, 13, 200, 31, 8),
    (140, 7.20, 10, 90, 48, 25),
]


@pytest.mark.parametrize(("hr", "ph", "gcs", "pf", "rr", "points"), WORKED)
def test_worked(hr: float, ph: float, gcs: float, pf: float, rr: float, points: int) -> None:
    found = scores.hacor(hr=hr, ph=ph, gcs=gcs, pf=pf, rr=rr)
    assert (found.points, found.lowest, found.highest, found.missing) == (points, points, points, ())
    assert scores.hacor_points(hr, ph, gcs, pf, rr) == points


# Each printed edge, the value on either side, and the half between two whole bins (decimal half-up).
EDGES = {
    "hr": [(120, 0), (121, 1), (120.4, 0), (120.5, 1), (0, 0), (350, 1)],
    "ph": [
        (7.35, 0), (7.34, 2), (7.30, 2), (7.29, 3), (7.25, 3), (7.24, 4), (6.5, 4), (8.0, 0),
        (7.345, 0), (7.344, 2), (7.295, 2), (7.294, 3), (7.245, 3), (7.244, 4),
    ],
    "gcs": [(15, 0), (14, 2), (13, 2), (12, 5), (11, 5), (10, 10), (3, 10)],
    "pf": [
        (201, 0), (200, 2), (176, 2), (175, 3), (151, 3), (150, 4), (126, 4), (125, 5), (101, 5), (100, 6),
        (200.5, 0), (200.4, 2), (175.5, 2), (175.4, 3), (150.5, 3), (150.4, 4), (125.5, 4), (125.4, 5),
        (100.5, 5), (100.4, 6),
    ],
    "rr": [
        (30, 0), (31, 1), (35, 1), (36, 2), (40, 2), (41, 3), (45, 3), (46, 4), (0, 0), (120, 4),
        (30.5, 1), (30.4, 0), (35.5, 2), (40.5, 3), (45.5, 4),
    ],
}  # fmt: skip
ALL_EDGES = [(name, value, points) for name, pairs in EDGES.items() for value, points in pairs]


@pytest.mark.parametrize(("name", "value", "points"), ALL_EDGES)
def test_every_edge(name: str, value: float, points: int) -> None:
    best = {"hr": 80.0, "ph": 7.40, "gcs": 15.0, "pf": 300.0, "rr": 20.0}
    found = scores.hacor(**{**best, name: value})
    assert found.points == points
    assert found.parts[name].points == points
    assert scores.hacor_points(*({**best, name: value}).values()) == points


@pytest.mark.parametrize(
    ("name", "value", "text", "points"),
    [
        ("ph", 7.345, "7.345", 0),
        ("ph", 7.34499, None, 2),
        ("ph", 7.345, "7,345", 0),
        ("pf", 200.49, "200.49", 2),
    ],
)
def test_the_text_as_typed_decides(name: str, value: float, text: str | None, points: int) -> None:
    best = {"hr": 80.0, "ph": 7.40, "gcs": 15.0, "pf": 300.0, "rr": 20.0}
    assert scores.hacor(**{**best, name: value}, texts={name: text}).points == points


def test_the_dust_of_a_division_is_swept() -> None:
    """31.5 / 0.28 is 112.5 to whoever typed it, and 112.49999999999999 to the machine: it bins as 113."""
    assert 31.5 / 0.28 < 112.5
    assert scores.half_up(31.5 / 0.28, 0) == 113
    assert scores.ratio_text("31.5", "0.28") == "112.5"
    assert scores.half_up(112.49999, 0) == 112


def test_missing_is_bounded_and_never_normal() -> None:
    worst = {"hr": 1, "ph": 4, "gcs": 10, "pf": 6, "rr": 4}
    best = {"hr": 80.0, "ph": 7.40, "gcs": 15.0, "pf": 300.0, "rr": 20.0}
    for name, most in worst.items():
        for gone in (None, math.nan):
            found = scores.hacor(**{**best, name: gone})
            assert (found.points, found.lowest, found.highest, found.missing) == (None, 0, most, (name,))
    nothing = scores.hacor()
    assert (nothing.points, nothing.lowest, nothing.highest) == (None, 0, 25)
    assert np.isnan(scores.hacor_points(math.nan, 7.4, 15, 300, 20))


def test_failure_by_points() -> None:
    """Secondary source: 0-1 8 %; 2-3 17; 4-5 32; 6-7 74; 8-9 91; 10-11 96; >= 12 100."""
    printed = [8, 8, 17, 17, 32, 32, 74, 74, 91, 91, 96, 96, 100, 100]
    assert [scores.failure_percent(p) for p in range(14)] == printed
    assert scores.failure_percent(25) == 100
    assert math.isnan(scores.failure_percent(26))


@pytest.mark.parametrize(
    ("pf", "ph", "paco2", "on_mask", "where"),
    [
        (150, 7.40, 38, True, "inside"), (300, 7.40, 38, True, "inside"), (301, 7.40, 38, True, "outside"),
        (150, 7.34, 46, True, "outside"), (150, 7.34, 45, True, "inside"), (150, 7.35, 60, True, "inside"),
        (150, 7.40, 38, False, "outside"), (None, 7.40, 38, True, "outside"), (150, 7.30, None, True, "outside"),
        (150, None, 38, True, "inside"), (150, None, None, True, "outside"), (150, 7.4, 38, None, "outside"),
    ],
)  # fmt: skip
def test_population(
    pf: float | None, ph: float | None, paco2: float | None, on_mask: bool | None, where: str
) -> None:
    found = scores.hacor(pf=pf, ph=ph, paco2=paco2, on_mask=on_mask)
    assert found.population == where
    assert (found.population_reason is None) is (where == "inside")


UPDATED = [
    ((128, 7.28, 14, 140, 34), 6, {"pneumonia", "pulmonary_ards"}, 19.5),
    ((100, 7.36, 15, 190, 28), 2, {"cardiogenic_oedema"}, -1.0),
]
FACTS = ("pneumonia", "cardiogenic_oedema", "pulmonary_ards", "immunosuppression", "septic_shock")


@pytest.mark.parametrize(("seen", "sofa", "present", "points"), UPDATED)
def test_updated_worked(seen: tuple[float, ...], sofa: float, present: set[str], points: float) -> None:
    """Added points from memory."""
    vitals = dict(zip(("hr", "ph", "gcs", "pf", "rr"), seen, strict=True))
    facts = {fact: fact in present for fact in FACTS}
    found = scores.hacor_updated(enabled=True, sofa=sofa, **vitals, **facts)
    assert found.points == points
    assert found.certainty == "from memory"
    assert any(note.key == "caveat.points_from_memory" for note in found.notes)
    off = scores.hacor_updated(enabled=False, sofa=sofa, **vitals, **facts)
    assert (off.points, off.lowest, off.highest) == (None, None, None)
    assert off.notes[0].key == "score.switched_off"


def test_updated_bounds() -> None:
    """Nothing known: -4 (oedema alone) to 25 + 12 + 2.5 + 3 + 1.5 + 2.5."""
    found = scores.hacor_updated(enabled=True)
    assert (found.points, found.lowest, found.highest) == (None, -4.0, 46.5)
    assert set(found.missing) == {"hr", "ph", "gcs", "pf", "rr", "sofa", *FACTS}


@pytest.mark.parametrize(("points", "band"), [(7, 0), (7.5, 1), (10.5, 1), (11, 2), (14, 2), (14.5, 3), (-4, 0)])
def test_updated_bands(points: float, band: int) -> None:
    """Confirmed in the abstract: <= 7, 7.5-10.5, 11-14, > 14."""
    assert scores.updated_band(points).values["band"] == band
