"""The door: `simulate(kind, seed)` for one invented episode, `simulate_many` for a cohort in one sweep."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping, Sequence
from dataclasses import dataclass, fields
from types import MappingProxyType

import numpy as np

from sample_data import scenarios_co2, scenarios_oxygen
from sample_data.bedside import Row, device_readings, device_rows, typed_rows
from sample_data.case import Case
from sample_data.dice import Dice
from sample_data.patient import together
from sample_data.saturation import Values
from sample_data.script import Inputs, inputs_of, side_by_side
from sample_data.simulation import Trajectory, simulate_course
from sample_data.truth import Truth, truth_of

LAST_MINUTE = 600

SCENARIOS: Mapping[str, Callable[[int, int], Case]] = MappingProxyType(
    {
        f.__name__: f
        for f in (
            scenarios_co2.prompt_responder, scenarios_co2.slow_responder, scenarios_co2.non_responder,
            scenarios_co2.large_leak, scenarios_oxygen.hypoxaemic_failure, scenarios_oxygen.pulmonary_oedema,
            scenarios_co2.obesity_hypoventilation, scenarios_co2.weaning, scenarios_co2.overdue_gas,
            scenarios_co2.kpa_ward, scenarios_co2.already_running, scenarios_co2.stable,
        )
    }
)  # fmt: skip

FINDINGS: Mapping[str, str] = MappingProxyType(
    {
        "prompt_responder": "Better within two hours; nothing to do.",
        "slow_responder": "Too little support at first; each step helps; out of acidosis only after four hours.",
        "non_responder": "Not better at one to two hours on raised support, then worse: escalate.",
        "large_leak": "Better, then leak takes the gain: fix the mask before raising pressure.",
        "hypoxaemic_failure": "P/F falls on support while rate stays high: escalate.",
        "pulmonary_oedema": "Better within the hour on CPAP; oxygen was brought down.",
        "obesity_hypoventilation": "Acidotic for hours without failing; better once EPAP and IPAP were raised.",
        "weaning": "Breaks get longer; the last one costs some CO2; no failure.",
        "overdue_gas": "Support and oxygen were raised on a bad gas and no gas followed.",
        "kpa_ward": "Better; logged in kPa, FiO2 not known under an oxygen flow.",
        "already_running": "On support before logging began; steady.",
        "stable": "Steady; a short time off the mask was not written down.",
    }
)


def run_cases(cases: Sequence[Case]) -> list[Trajectory]:
    """Simulate cases of equal length together; each trajectory has shape (minutes,)."""
    inputs = side_by_side([inputs_of(c.script) for c in cases])
    wobble = np.stack([_wobble(c, inputs.minutes) for c in cases], axis=1)
    whole = simulate_course(together([c.patient for c in cases]), inputs, wobble)
    names = [f.name for f in fields(Trajectory)]
    return [Trajectory(**{n: getattr(whole, n)[:, i] for n in names}) for i in range(len(cases))]


def _wobble(case: Case, minutes: int) -> Values:
    return np.exp(Dice(case.kind, case.seed, "leak").wander(minutes, 0.16, 0.93))


@dataclass(frozen=True)
class SimulatedEpisode:
    """One invented episode. Minute 0 is the start of support; index i of every array is minute `first + i`."""

    case: Case
    true: Trajectory
    inputs: Inputs
    truth: Truth

    @property
    def first(self) -> int:
        """The minute of index 0."""
        return self.case.script.first

    def typed(self) -> list[Row]:
        """What people logged, the profile not included."""
        return list(typed_rows(self.case, self.true))

    def device(self) -> list[Row]:
        """What machines wrote."""
        return list(device_rows(self.case, self.true, self.inputs))

    def readings(self) -> dict[str, Values]:
        """Device readings as arrays by minute, shape (minutes,), NaN where silent."""
        return device_readings(self.case, self.true, self.inputs)


def simulate_many(kind: str, seeds: Iterable[int], last: int = LAST_MINUTE) -> list[SimulatedEpisode]:
    """Simulate one kind of episode for many seeds in one sweep (500 in about a second).

    Raises:
        KeyError: an unknown kind; `SCENARIOS` names those that are known.
    """
    return simulate_cases([SCENARIOS[kind](seed, last) for seed in seeds])


def simulate(kind: str, seed: int, last: int = LAST_MINUTE) -> SimulatedEpisode:
    """Simulate one episode.

    >>> simulate("prompt_responder", 1).truth.responded
    True
    """
    return simulate_many(kind, [seed], last)[0]


def simulate_cases(cases: Sequence[Case]) -> list[SimulatedEpisode]:
    """Simulate cases of equal length."""
    made = []
    for case, true in zip(cases, run_cases(cases), strict=True):
        hypoxaemic = case.person.indication in ("pneumonia", "cardiogenic pulmonary oedema")
        truth = truth_of(true, -case.script.first, hypoxaemic, FINDINGS[case.kind])
        made.append(SimulatedEpisode(case, true, inputs_of(case.script), truth))
    return made
