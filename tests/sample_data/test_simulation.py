"""The whole model: it starts where the patient was seen, and settings act in the direction they must."""

from dataclasses import fields, replace

import numpy as np
import pytest

from sample_data.case import bilevel, copd_patient, opened
from sample_data.cohort import SCENARIOS, simulate, simulate_many
from sample_data.dice import Dice
from sample_data.gas_exchange import steady_paco2
from sample_data.patient import together
from sample_data.script import Script, inputs_of, side_by_side
from sample_data.simulation import Trajectory, simulate_course

START = 45


def course(script: Script, seed: int = 3, **changes: float) -> Trajectory:
    """One COPD patient under a script, without any wander of the leak."""
    patient = replace(copd_patient(Dice("test", seed, "case")), **changes)
    inputs = side_by_side([inputs_of(script)])
    whole = simulate_course(together([patient]), inputs, np.ones((inputs.minutes, 1)))
    return Trajectory(**{f.name: getattr(whole, f.name)[:, 0] for f in fields(Trajectory)})


def supported(ipap: float = 18, epap: float = 5, fio2: float = 0.28, leak: float = 10, rate: float = 14) -> Script:
    return opened(300, "KT", before={"fio2": 0.28}, start=bilevel(ipap, epap, fio2, rate=rate), fit_leak=leak)


def test_it_starts_at_what_was_seen_before_support() -> None:
    patient = copd_patient(Dice("test", 3, "case"))
    true = course(supported())
    assert true.paco2[0] == pytest.approx(patient.paco2, abs=0.5)
    assert true.ph[0] == pytest.approx(patient.ph, abs=0.005)
    assert true.rate[0] == pytest.approx(patient.rr, abs=0.7)
    assert true.tidal_ml[0] == pytest.approx(patient.tidal_ml, rel=0.03)
    assert 100 * true.saturation[0] == pytest.approx(patient.spo2, abs=0.6)


def test_the_end_of_a_long_course_obeys_the_alveolar_ventilation_equation() -> None:
    script = supported()
    script.last = 2000
    true = course(script, course_h=1e6, tires=0.0)
    patient = copd_patient(Dice("test", 3, "case"))
    low, high = (float(steady_paco2(np.array(patient.vco2 * k), np.array(true.va[-1]))) for k in (1.0, 1.19))
    assert low <= true.paco2[-1] <= high
    assert abs(true.paco2[-1] - true.paco2[-120]) < 0.2


@pytest.mark.parametrize("minute", [30, 60, 120])
def test_more_pressure_support_lowers_paco2(minute: int) -> None:
    found = [course(supported(ipap=ipap)).paco2[START + minute] for ipap in (10, 14, 18, 22)]
    assert found == sorted(found, reverse=True)
    assert found[0] - found[-1] > 5.0


def test_an_epap_raised_alone_lowers_support_and_so_raises_paco2() -> None:
    low, high = (course(supported(ipap=16, epap=epap)).paco2[START + 90] for epap in (5, 11))
    assert high > low + 2.0


def test_a_large_leak_lowers_ventilation_and_keeps_paco2_high() -> None:
    tight, leaky = course(supported(leak=8)), course(supported(leak=90))
    assert leaky.va[START + 20] < tight.va[START + 20] - 0.2
    assert leaky.paco2[START + 90] > tight.paco2[START + 90] + 4.0


def test_a_backup_rate_below_the_patients_own_does_nothing() -> None:
    slow, slower = (course(supported(rate=rate)).paco2[START + 10 : START + 30] for rate in (8, 12))
    assert slow == pytest.approx(slower, abs=1e-9)


def test_too_much_oxygen_raises_paco2_in_copd() -> None:
    right, much = (course(supported(fio2=fio2)) for fio2 in (0.26, 0.6))
    assert much.saturation[START + 60] > 0.95
    assert much.paco2[START + 60] > right.paco2[START + 60] + 3.0


def test_stiffer_lungs_get_less_from_the_same_pressure() -> None:
    soft, stiff = (course(supported(), compliance=c).tidal_ml[START + 60] for c in (0.06, 0.04))
    assert stiff < soft


def test_narcosis_follows_a_high_paco2() -> None:
    awake, asleep = (course(supported(ipap=10), tolerance=t).gcs[START + 30] for t in (60.0, 20.0))
    assert awake > 14.5
    assert asleep < 14.0


def test_off_the_mask_the_gain_is_lost_again() -> None:
    script = supported(ipap=20)
    script.event(150, "break_start", "KT")
    true = course(script)
    assert true.paco2[START + 210] > true.paco2[START + 149] + 3.0
    assert true.attained_ipap[START + 160] == 0.0


@pytest.mark.parametrize("kind", list(SCENARIOS))
def test_every_truth_stays_within_what_a_body_and_the_log_can_hold(kind: str) -> None:
    limits = {
        "paco2": (15, 220), "ph": (6.8, 7.7), "hco3": (3, 60), "pao2": (15, 350), "saturation": (0.05, 1.0),
        "fio2": (0.21, 1.0), "rate": (5, 45), "tidal_ml": (80, 1400), "gcs": (3, 15), "leak": (0, 120),
        "fatigue": (0, 1), "unmet": (0, 1), "triggered": (0, 100), "lactate": (0.2, 10),
    }  # fmt: skip
    for episode in simulate_many(kind, range(40)):
        for name, (low, high) in limits.items():
            values = getattr(episode.true, name)
            assert np.all(np.isfinite(values)), name
            assert low <= values.min(), name
            assert values.max() <= high, name


def test_one_episode_is_the_same_alone_and_in_a_cohort() -> None:
    alone = simulate("slow_responder", 17)
    among = simulate_many("slow_responder", range(10, 20))[7]
    assert alone.typed() == among.typed()
    assert alone.device() == among.device()
    assert alone.truth == among.truth


def test_seeds_differ_and_repeat() -> None:
    first, again, other = (simulate("stable", seed).true.paco2 for seed in (1, 1, 2))
    assert np.array_equal(first, again)
    assert not np.allclose(first, other)


def test_an_impossible_presentation_is_refused() -> None:
    with pytest.raises(ValueError, match="dead space share"):
        course(supported(), tidal_ml=120.0)
