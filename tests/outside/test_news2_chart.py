"""NEWS2 against its chart (Royal College of Physicians 2017) and five worked cases: every edge, both scales."""

import math

import pytest

from core.judgement import scores

CASES = [
    (26, 90, True, 118, 112, "alert", 37.4, 10, 7),
    (22, 95, True, 105, 95, "alert", 38.2, 8, 9),
    (18, 94, False, 130, 80, "alert", 36.8, 1, 0),
    (24, 86, True, 99, 131, "confusion", 35.0, 18, 16),
    (16, 97, True, 130, 80, "alert", 37.0, 2, 5),
]
NAMES = ("rr", "spo2", "on_oxygen", "sbp", "hr", "acvpu", "temp")


@pytest.mark.parametrize("case", CASES)
def test_worked_cases(case: tuple[object, ...]) -> None:
    seen = dict(zip(NAMES, case[:7], strict=True))
    assert scores.news2(**seen, scale=1).points == case[7]  # type: ignore[arg-type]
    assert scores.news2(**seen, scale=2).points == case[8]  # type: ignore[arg-type]


EDGES = {
    "rr": [(8, 3), (9, 1), (11, 1), (12, 0), (20, 0), (21, 2), (24, 2), (25, 3), (8.5, 1), (8.4, 3), (24.5, 3)],
    "sbp": [(90, 3), (91, 2), (100, 2), (101, 1), (110, 1), (111, 0), (219, 0), (220, 3), (90.5, 2), (219.5, 3)],
    "hr": [
        (40, 3), (41, 1), (50, 1), (51, 0), (90, 0), (91, 1), (110, 1), (111, 2), (130, 2), (131, 3), (130.5, 3),
    ],
    "temp": [
        (35.0, 3), (35.1, 1), (36.0, 1), (36.1, 0), (38.0, 0), (38.1, 1), (39.0, 1), (39.1, 2),
        (35.05, 1), (35.04, 3), (36.05, 0), (38.05, 1), (39.05, 2), (39.04, 1),
    ],
    "acvpu": [("alert", 0), ("confusion", 3), ("voice", 3), ("pain", 3), ("unresponsive", 3), ("Alert", 0)],
}  # fmt: skip
NORMAL = {"rr": 16, "spo2": 97, "on_oxygen": False, "sbp": 120, "hr": 70, "acvpu": "alert", "temp": 37.0}


@pytest.mark.parametrize(("name", "value", "points"), [(n, v, p) for n, pairs in EDGES.items() for v, p in pairs])
def test_every_edge(name: str, value: object, points: int) -> None:
    found = scores.news2(**{**NORMAL, name: value})  # type: ignore[arg-type]
    assert found.points == found.parts[name].points == points


@pytest.mark.parametrize(
    ("spo2", "points"),
    [(91, 3), (92, 2), (93, 2), (94, 1), (95, 1), (96, 0), (100, 0), (91.5, 2), (95.4, 1), (95.5, 0)],
)
def test_scale_1(spo2: float, points: int) -> None:
    for on_oxygen in (True, False):
        found = scores.news2(**{**NORMAL, "spo2": spo2, "on_oxygen": on_oxygen})  # type: ignore[arg-type]
        assert found.parts["spo2"].points == points


@pytest.mark.parametrize(
    ("spo2", "on_air", "on_oxygen"),
    [
        (83, 3, 3), (84, 2, 2), (85, 2, 2), (86, 1, 1), (87, 1, 1), (88, 0, 0), (92, 0, 0), (93, 0, 1),
        (94, 0, 1), (95, 0, 2), (96, 0, 2), (97, 0, 3), (100, 0, 3), (92.5, 0, 1), (92.4, 0, 0), (96.5, 0, 3),
    ],
)  # fmt: skip
def test_scale_2(spo2: float, on_air: int, on_oxygen: int) -> None:
    air = scores.news2(**{**NORMAL, "spo2": spo2, "on_oxygen": False}, scale=2)  # type: ignore[arg-type]
    oxygen = scores.news2(**{**NORMAL, "spo2": spo2, "on_oxygen": True}, scale=2)  # type: ignore[arg-type]
    unknown = scores.news2(**{**NORMAL, "spo2": spo2, "on_oxygen": None}, scale=2)  # type: ignore[arg-type]
    assert (air.points, oxygen.points) == (on_air, on_oxygen + 2)
    assert (unknown.points, unknown.lowest, unknown.highest) == (None, on_air, on_oxygen + 2)
    assert unknown.missing == ("on_oxygen",)


def test_missing_is_bounded_and_never_normal() -> None:
    worst = {"rr": 3, "spo2": 3, "on_oxygen": 2, "sbp": 3, "hr": 3, "acvpu": 3, "temp": 3}
    assert sum(worst.values()) == 20
    for name, most in worst.items():
        found = scores.news2(**{**NORMAL, name: None})  # type: ignore[arg-type]
        assert (found.points, found.lowest, found.highest, found.missing) == (None, 0, most, (name,))
    nothing = scores.news2(rr=math.nan)
    assert (nothing.points, nothing.lowest, nothing.highest) == (None, 0, 20)


@pytest.mark.parametrize(
    ("changed", "band"),
    [
        ({}, "none"), ({"hr": 91}, "low"), ({"hr": 111, "temp": 39.1}, "low"), ({"hr": 131}, "low_medium"),
        ({"hr": 131, "temp": 39.1}, "medium"), ({"hr": 131, "rr": 25}, "medium"),
        ({"hr": 131, "rr": 25, "temp": 38.1}, "high"),
    ],
)  # fmt: skip
def test_bands(changed: dict[str, object], band: str) -> None:
    """0; 1-4 low; one 3 low-medium; 5-6 medium; 7 and more high."""
    assert scores.news2_band(scores.news2(**{**NORMAL, **changed})).key == f"news2.{band}"  # type: ignore[arg-type]


def test_refusals() -> None:
    with pytest.raises(ValueError, match="scale 3"):
        scores.news2(scale=3)
    with pytest.raises(ValueError, match="drowsy"):
        scores.news2(acvpu="drowsy")


def test_oxygen() -> None:
    """Common practice, no source: mask support counts as oxygen where FiO2 is above 0.21; any flow counts."""
    assert scores.breathes_oxygen(0.21, None) is False
    assert scores.breathes_oxygen(0.22, 0) is True
    assert scores.breathes_oxygen(None, 1.0) is True
    assert scores.breathes_oxygen(0.21, 1.0) is True
    assert scores.breathes_oxygen(None, 0.0) is False
    assert scores.breathes_oxygen(math.nan, math.nan) is None
