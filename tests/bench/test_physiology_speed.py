"""Acid-base and oxygenation over 1,000,000 gases: at most 3 x the bare numpy expressions, in one run."""

from collections.abc import Callable
from statistics import median
from time import perf_counter

import numpy as np
import pytest
from numpy.typing import NDArray

from core.physiology import acid_base, oxygenation

GASES = 1_000_000
ROUNDS = 7
LIMIT = 3.0

Values = NDArray[np.float64]


def gases() -> dict[str, Values]:
    rng = np.random.default_rng(11)
    made = {
        "ph": rng.uniform(7.0, 7.6, GASES),
        "paco2": rng.uniform(25.0, 110.0, GASES),
        "pao2": rng.uniform(40.0, 150.0, GASES),
        "fio2": rng.uniform(0.21, 1.0, GASES),
        "spo2": rng.uniform(80.0, 97.0, GASES),
    }
    for values in made.values():
        values[rng.integers(0, GASES, GASES // 1000)] = np.nan  # some are missing, as in life
    return made


def bare_acid_base(g: dict[str, Values]) -> None:
    hco3 = 0.0307 * g["paco2"] * 10.0 ** (g["ph"] - 6.1)
    _ = 10.0 ** (9.0 - g["ph"])
    _ = hco3 - 24.8 + 16.2 * (g["ph"] - 7.40)


def our_acid_base(g: dict[str, Values]) -> None:
    hco3 = acid_base.bicarbonate(g["ph"], g["paco2"])
    acid_base.hydrogen_ion(g["ph"])
    acid_base.standard_base_excess(g["ph"], hco3)


def bare_oxygenation(g: dict[str, Values]) -> None:
    _ = g["fio2"] * (760.0 - 47.0) - g["paco2"] / 0.8
    _ = g["fio2"] * (760.0 - 47.0) - g["paco2"] * (g["fio2"] + (1.0 - g["fio2"]) / 0.8) - g["pao2"]
    _ = g["fio2"] * (760.0 - 47.0) - g["paco2"] / 0.8 - g["pao2"]
    _ = g["pao2"] / g["fio2"]
    _ = g["spo2"] / g["fio2"]


def our_oxygenation(g: dict[str, Values]) -> None:
    oxygenation.alveolar_po2(g["fio2"], g["paco2"])
    oxygenation.aa_gradient_full(g["pao2"], g["paco2"], g["fio2"])
    oxygenation.aa_gradient(g["pao2"], g["paco2"], g["fio2"])
    oxygenation.pf_ratio(g["pao2"], g["fio2"])
    oxygenation.sf_ratio(g["spo2"], g["fio2"])


def seconds(work: Callable[[dict[str, Values]], None], g: dict[str, Values]) -> float:
    start = perf_counter()
    work(g)
    return perf_counter() - start


@pytest.mark.bench
@pytest.mark.parametrize(("ours", "bare"), [(our_acid_base, bare_acid_base), (our_oxygenation, bare_oxygenation)])
def test_formulas_cost_at_most_three_times_the_bare_expressions(
    ours: Callable[[dict[str, Values]], None], bare: Callable[[dict[str, Values]], None]
) -> None:
    g = gases()
    pairs = [(seconds(ours, g), seconds(bare, g)) for _ in range(ROUNDS + 1)][1:]
    ratio = median(a for a, _ in pairs) / median(b for _, b in pairs)
    print(f"{ours.__name__}: {ratio:.2f} x the bare numpy expressions over {GASES} gases")
    assert ratio <= LIMIT
