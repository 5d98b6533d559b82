"""Whatever is missing, the bounds hold every value that it could have had, and are reached."""

import math

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.judgement import scores

VITALS = {
    "hr": st.floats(20, 250), "ph": st.floats(6.6, 7.8), "gcs": st.integers(3, 15).map(float),
    "pf": st.floats(30, 600), "rr": st.floats(1, 80),
}  # fmt: skip
NEWS2 = {
    "rr": st.floats(0, 80), "spo2": st.floats(40, 100), "on_oxygen": st.booleans(), "sbp": st.floats(40, 260),
    "hr": st.floats(20, 250), "acvpu": st.sampled_from(["alert", "confusion", "voice", "pain", "unresponsive"]),
    "temp": st.floats(30, 42),
}  # fmt: skip


@given(whole=st.fixed_dictionaries(VITALS), gone=st.sets(st.sampled_from(sorted(VITALS))))
def test_hacor_bounds_hold(whole: dict[str, float], gone: set[str]) -> None:
    full = scores.hacor(**whole)
    assert full.points is not None
    part = scores.hacor(**{k: None if k in gone else v for k, v in whole.items()})
    assert part.lowest is not None
    assert part.highest is not None
    assert part.lowest <= full.points <= part.highest
    assert set(part.missing) == gone
    assert (part.points is None) is bool(gone)


@given(
    whole=st.fixed_dictionaries(NEWS2),
    gone=st.sets(st.sampled_from(sorted(NEWS2))),
    scale=st.sampled_from([1, 2]),
)
def test_news2_bounds_hold(whole: dict[str, object], gone: set[str], scale: int) -> None:
    full = scores.news2(**whole, scale=scale)  # type: ignore[arg-type]
    assert full.points is not None
    part = scores.news2(**{k: None if k in gone else v for k, v in whole.items()}, scale=scale)  # type: ignore[arg-type]
    assert part.lowest is not None
    assert part.highest is not None
    assert 0 <= part.lowest <= full.points <= part.highest <= 20
    assert set(part.missing) == gone


@given(whole=st.fixed_dictionaries(VITALS))
def test_hacor_arrays_agree_with_scalars(whole: dict[str, float]) -> None:
    rounded = {k: round(v, 4) for k, v in whole.items()}
    points = scores.hacor_points(**{k: np.array([v, v]) for k, v in rounded.items()})
    assert points.tolist() == [scores.hacor(**rounded).points] * 2


def test_parts_say_what_was_binned() -> None:
    part = scores.hacor(ph=7.345).parts["ph"]
    assert (part.value, part.binned, part.points) == (7.345, 7.35, 0)


def test_a_child_is_outside_news2() -> None:
    found = scores.news2(age=12)
    assert found.population == "outside"
    assert found.population_reason is not None
    assert scores.news2(age=16).population == "inside"
    assert scores.news2(age=math.nan).population == "inside"


def test_bands_with_missing_inputs_are_at_least() -> None:
    found = scores.news2_band(scores.news2(rr=30, spo2=80, hr=140))
    assert found.key == "news2.high"
    assert found.values["at_least"] is True


def test_parts_cannot_be_changed() -> None:
    with pytest.raises(TypeError):
        scores.hacor().parts["hr"] = None  # type: ignore[index]
