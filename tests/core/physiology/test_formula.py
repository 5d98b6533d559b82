"""The one mechanism: scalars and arrays alike, NaN where undefined, always a reason."""

import inspect
import math
from collections.abc import Callable
from importlib import import_module
from typing import Any

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.physiology.domains import DOMAINS
from core.physiology.formula import PLANS, Plan, formula, plan_of, reasoned, why_undefined
from core.physiology.oxygenation import aa_gradient, pf_ratio
from core.record.channels import CHANNELS

MODULES = (
    "acid_base", "compensation", "consistency", "oxygenation", "imputation", "saturation", "temperature",
    "oxygenation_index", "rox", "ventilation", "tidal_volume_trust", "co2_course",
)  # fmt: skip
for _module in MODULES:
    import_module(f"core.physiology.{_module}")
FORMULAS = sorted(PLANS)


def function(name: str) -> Callable[..., Any]:
    module, _, figure = name.partition(".")
    found: Callable[..., Any] = getattr(import_module(f"core.physiology.{module}"), figure)
    return found


def inside_hard_limits(name: str) -> st.SearchStrategy[float]:
    """Values of the channel's hard limits where the input is a channel, else of its own domain."""
    channel = CHANNELS.get(name)
    low, high = channel.hard if channel and channel.hard else (DOMAINS[name].low, DOMAINS[name].high)
    return st.floats(low, high) | st.sampled_from([low, high])


@pytest.mark.parametrize("name", FORMULAS)
@given(data=st.data())
@settings(max_examples=60)
def test_no_input_inside_hard_limits_raises_or_gives_an_unexplained_nan(name: str, data: st.DataObject) -> None:
    plan = PLANS[name]
    values = [data.draw(inside_hard_limits(p), label=p) for p, _ in plan.inputs]
    found = function(name)(*values)
    assert isinstance(found, float)
    assert not math.isinf(found)
    reason = why_undefined(function(name), *values)
    assert (reason is None) is not math.isnan(found)
    array = function(name)(*(np.full(3, v) for v in values))
    np.testing.assert_allclose(array, np.full(3, found), rtol=1e-12, atol=1e-12)


@pytest.mark.parametrize("name", FORMULAS)
def test_a_missing_input_is_named(name: str) -> None:
    plan = PLANS[name]
    middle = [math.sqrt(max(d.low, 0.01) * d.high) if d.low > 0 else d.high / 2 for _, d in plan.inputs]
    for i, (parameter, domain) in enumerate(plan.inputs):
        values: list[float | None] = [*middle]
        values[i] = None
        assert math.isnan(function(name)(*values))
        reason = why_undefined(function(name), *values)
        assert reason is not None
        assert (reason.key, reason.values["input"]) == (domain.missing, parameter)


@pytest.mark.parametrize("name", FORMULAS)
def test_every_formula_is_documented(name: str) -> None:
    found = function(name)
    assert ">>>" in (found.__doc__ or ""), "a public function has a runnable example"
    assert tuple(inspect.signature(found).parameters) == tuple(p for p, _ in PLANS[name].inputs)


def test_every_public_function_has_a_doctest() -> None:
    for module in (*MODULES, "classification", "specimen", "definitions", "pressure"):
        found = import_module(f"core.physiology.{module}")
        for key, value in vars(found).items():
            if inspect.isfunction(value) and not key.startswith("_") and value.__module__ == found.__name__:
                assert ">>>" in (value.__doc__ or ""), f"{module}.{key}"


def test_chunks_and_broadcasting_change_nothing() -> None:
    rng = np.random.default_rng(3)
    n = 40_001
    pao2, fio2 = rng.uniform(30, 120, n), rng.uniform(0.21, 1.0, n)
    fio2[::7], pao2[5], fio2[6] = np.nan, 1e9, 35.0
    found = pf_ratio(pao2, fio2)
    with np.errstate(invalid="ignore"):
        good = (pao2 <= 700) & (fio2 <= 1.0)
    np.testing.assert_array_equal(found, np.where(good, pao2 / fio2, np.nan))
    grid = aa_gradient(np.array([[60.0], [70.0]]), np.array([40.0, 50.0, 60.0]), 0.21)  # type: ignore[type-var]
    assert np.shape(grid) == (2, 3)
    assert pf_ratio(np.array([]), np.array([])).shape == (0,)
    assert pf_ratio(np.array([60, 80]), np.array([1, 1])).tolist() == [60.0, 80.0]


def test_wrong_use_is_refused_in_words() -> None:
    with pytest.raises(TypeError, match=r"oxygenation\.pf_ratio needs fio2"):
        pf_ratio(60.0)  # type: ignore[call-arg]
    with pytest.raises(TypeError, match="takes pao2, fio2"):
        pf_ratio(60.0, 0.5, 1.0)  # type: ignore[call-arg]
    with pytest.raises(TypeError, match="takes pao2, fio2"):
        pf_ratio(60.0, 0.5, fi02=0.5)  # type: ignore[call-arg]
    with pytest.raises(TypeError, match="not a formula"):
        plan_of(math.sqrt)
    with pytest.raises(KeyError, match="unheard_of"):

        @formula()
        def figure(unheard_of: float) -> float:
            return unheard_of


@pytest.mark.parametrize(
    ("values", "key"),
    [
        ((60.0, None), "undefined.fio2_unknown"), ((None, 0.5), "undefined.missing"),
        ((60.0, 35.0), "undefined.outside"), ((8.0, 0.5), "undefined.outside"),
        ((math.nan, math.nan), "undefined.missing"), ((60.0, math.inf), "undefined.outside"),
    ],
)  # fmt: skip
def test_reasons_of_pf(values: tuple[float | None, float | None], key: str) -> None:
    found = reasoned(pf_ratio, *values)
    assert math.isnan(found.value)
    assert found.reason is not None
    assert found.reason.key == key
    assert found.reason.values["figure"] == "oxygenation.pf_ratio"


def test_a_result_outside_its_domain_says_so() -> None:
    found = reasoned(function("oxygenation.alveolar_po2"), 0.21, 200.0)
    assert found.reason is not None
    assert found.reason.key == "undefined.alveolar_not_positive"
    longer = why_undefined(function("oxygenation_index.mean_airway_pressure"), 18.0, 6.0, 3.0, 30.0)
    assert longer is not None
    assert longer.key == "undefined.breath_longer_than_cycle"


def test_a_plan_is_registered_once_per_name() -> None:
    assert all(isinstance(plan, Plan) and plan.name == name for name, plan in PLANS.items())
