"""Mechanics, leak and oxygen: limits, inverses, directions."""

import numpy as np
import pytest

from sample_data.device import CEILING_L_PER_MIN, delivered, port_flow, shown_tidal_ml
from sample_data.mechanics import (
    filling,
    flowing_pressure,
    needed_pressure,
    tidal_for,
    useful_tidal,
)
from sample_data.oxygen import admixture, alveolar_po2, arterial_po2, entrained_fio2, recruitment
from sample_data.saturation import content, pressure_of_content, saturation


def one(*values: float) -> list[np.ndarray]:
    return [np.array([v]) for v in values]


def test_a_stiff_fast_lung_breathes_all_of_compliance_times_pressure() -> None:
    whole = filling(*one(12.0, 1.0, 0.1))
    assert whole.gain == pytest.approx(1.0, abs=1e-3)
    assert whole.trapped == pytest.approx(0.0, abs=1e-3)


def test_breath_by_breath_integration_agrees_with_the_closed_form() -> None:
    """Fill and empty a lung of RC 0.9 s by small steps until the rhythm is steady."""
    rate, ti, rc, pressure, dt = 28.0, 0.8, 0.9, 15.0, 1e-4
    volume, high, low = 0.0, 0.0, 0.0
    for _ in range(30):
        for push, seconds in ((pressure, ti), (0.0, 60.0 / rate - ti)):
            for _ in range(round(seconds / dt)):
                volume += (push - volume) / rc * dt
            high, low = (volume, low) if push else (high, volume)
    whole = filling(*one(rate, ti, rc))
    assert (high - low) / pressure == pytest.approx(float(whole.gain[0]), rel=2e-3)
    assert low / pressure == pytest.approx(float(whole.trapped[0]), rel=5e-3)


def test_faster_breathing_in_obstruction_costs_volume_and_traps() -> None:
    slow, fast = filling(*one(18.0, 0.9, 0.9)), filling(*one(34.0, 0.9, 0.9))
    assert fast.gain < slow.gain
    assert fast.trapped > slow.trapped


@pytest.mark.parametrize("flowing", [2.0, 9.0, 25.0])
@pytest.mark.parametrize("epap", [0.0, 4.0, 10.0])
def test_needed_pressure_inverts_flowing_pressure(flowing: float, epap: float) -> None:
    need = needed_pressure(*one(flowing, 0.3, epap))
    assert flowing_pressure(need, *one(0.3, epap)) == pytest.approx(flowing)


def test_epap_gives_back_what_trapping_takes_and_no_more() -> None:
    without, some, much = (float(flowing_pressure(*one(15.0, 0.3, e))[0]) for e in (0.0, 4.0, 20.0))
    assert without < some <= much <= 15.0


@pytest.mark.parametrize("useful", [0.2, 0.4, 0.7])
def test_tidal_for_inverts_useful_tidal(useful: float) -> None:
    assert useful_tidal(tidal_for(*one(useful, 0.35)), np.array([0.35])) == pytest.approx(useful)


def test_leak_costs_pressure_and_efforts_and_hides_volume() -> None:
    small, large = (delivered(*one(20.0, 5.0, leak, 1.0, 0.05)) for leak in (10.0, 80.0))
    assert large.leak > small.leak
    assert small.ipap == pytest.approx(20.0)
    assert large.ipap < 17.5
    assert large.missed > small.missed + 0.3
    assert shown_tidal_ml(*one(0.5, 80.0)) < shown_tidal_ml(*one(0.5, 10.0)) < 500.0


def test_a_mask_off_shows_the_ceiling_and_no_volume() -> None:
    off = delivered(*one(16.0, 5.0, 900.0, 1.0, 0.05))
    assert off.leak == pytest.approx(CEILING_L_PER_MIN)
    assert shown_tidal_ml(np.array([0.5]), off.leak) < 30.0


def test_the_port_leaks_thirty_at_fourteen() -> None:
    """Reference: 7 masks, 30 to 45 L/min at IPAP 14 (Borel, Chest 2009;135:669)."""
    assert float(port_flow(np.array(14.0))) == pytest.approx(29.9, abs=0.1)


def test_content_and_pressure_are_inverse_over_the_clinical_range() -> None:
    po2 = np.arange(25.0, 150.0, 5.0)
    for ph in (7.1, 7.25, 7.4, 7.5):
        level = np.full(po2.shape, ph)
        assert pressure_of_content(content(po2, level), level) == pytest.approx(po2, rel=0.005, abs=0.1)


def test_acid_lowers_saturation() -> None:
    assert saturation(*one(60.0, 7.2)) < saturation(*one(60.0, 7.4))


def test_more_oxygen_more_pressure_less_shunt_all_raise_pao2() -> None:
    def pao2(fio2: float, shunt: float, epap: float) -> float:
        share = admixture(*one(shunt, 0.1, fio2), recruitment(*one(epap, 0.3)))
        return float(arterial_po2(alveolar_po2(*one(fio2, 45.0)), share, np.array([7.38]))[0])

    assert pao2(0.5, 0.2, 5.0) > pao2(0.4, 0.2, 5.0)
    assert pao2(0.4, 0.2, 10.0) > pao2(0.4, 0.2, 0.0)
    assert pao2(0.4, 0.1, 5.0) > pao2(0.4, 0.3, 5.0)


def test_a_leak_dilutes_an_oxygen_flow() -> None:
    assert entrained_fio2(*one(4.0, 80.0)) < entrained_fio2(*one(4.0, 30.0))
