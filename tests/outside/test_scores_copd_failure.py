"""The COPD failure chart: Confalonieri, Eur Respir J 2005;25:348. Its axes are from memory; cells are not given."""

import itertools
import math

import pytest

from core.judgement.scores import Risk, copd_failure

STEPS = {
    "ph": [(7.30, 0), (7.29, 1), (7.25, 1), (7.24, 2), (7.295, 0), (7.294, 1), (7.245, 1), (7.244, 2)],
    "rr": [(29, 0), (30, 1), (34, 1), (35, 2), (29.5, 1), (34.5, 2), (34.4, 1)],
    "gcs": [(15, 0), (14, 1), (12, 1), (11, 2), (3, 2)],
    "apache": [(28, 0), (29, 1), (28.5, 1)],
}
BEST = {"ph": 7.36, "rr": 24.0, "gcs": 15.0, "apache": 15.0}
WORST = {"ph": 7.20, "rr": 36.0, "gcs": 10.0, "apache": 31.0}


@pytest.mark.parametrize(("name", "value", "step"), [(n, v, s) for n, pairs in STEPS.items() for v, s in pairs])
def test_every_edge_of_every_axis(name: str, value: float, step: int) -> None:
    assert copd_failure(**{**BEST, name: value}).steps[name] == step  # type: ignore[arg-type]


def test_the_worst_corner_alone_has_a_published_percentage() -> None:
    """Confirmed: above 70 % at admission, above 90 % with pH below 7.25 after 2 h."""
    for mixed in itertools.product(*({BEST[n], WORST[n]} for n in BEST)):
        given = dict(zip(BEST, mixed, strict=True))
        found = copd_failure(**given, copd=True)  # type: ignore[arg-type]
        corner = given == WORST
        assert found.risk is (
            Risk.WORST_CORNER if corner else Risk.NO_AXIS_ADVERSE if given == BEST else Risk.BETWEEN
        )
        assert found.published_above_percent == (70.0 if corner else None)
    assert copd_failure(**WORST, after_two_hours=True).published_above_percent == 90.0  # type: ignore[arg-type]


def test_missing_inputs_bound_the_class() -> None:
    assert copd_failure().lowest is Risk.NO_AXIS_ADVERSE
    assert copd_failure().highest is Risk.WORST_CORNER
    for name in BEST:
        found = copd_failure(**{**WORST, name: math.nan})  # type: ignore[arg-type]
        assert (found.risk, found.lowest, found.highest) == (None, Risk.BETWEEN, Risk.WORST_CORNER)
        assert found.missing == (name,)
        assert found.published_above_percent is None


def test_population_and_certainty() -> None:
    assert copd_failure(copd=True).population == "inside"
    assert copd_failure(copd=False).population == "outside"
    assert copd_failure(copd=None).population_reason is not None
    assert copd_failure().certainty == "from memory"
