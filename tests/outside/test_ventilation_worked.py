"""Worked ventilation numbers from the publications named in each test (computed apart from this code)."""

import numpy as np
import pytest

from core.physiology import co2_course, tidal_volume_trust, ventilation


def test_predicted_body_weight() -> None:
    """ARDSNet (Devine), secondary source: 175 cm male 70.57 kg, 160 cm female 52.42 kg; in inches 70.46."""
    male = ventilation.predicted_body_weight(175.0, ventilation.base_weight("male"))
    assert male == pytest.approx(70.57, abs=0.006)
    female = ventilation.predicted_body_weight(160.0, ventilation.base_weight("female"))
    assert female == pytest.approx(52.42, abs=0.006)
    assert male == pytest.approx(50.0 + 2.3 * (175.0 / 2.54 - 60.0), rel=0.002)
    assert ventilation.tidal_volume_per_kg(670.0, male) == pytest.approx(9.5, abs=0.01)


def test_alveolar_ventilation_equation() -> None:
    """0.863 x 200 / 4.3 = 40.1 mmHg (secondary source)."""
    assert ventilation.paco2_of_alveolar_ventilation(200.0, 4.3) == pytest.approx(40.1, abs=0.06)
    assert ventilation.alveolar_ventilation_for_paco2(200.0, 40.14) == pytest.approx(4.3, abs=0.001)
    assert co2_course.steady_paco2(200.0, 4.3) == pytest.approx(40.1, abs=0.06)


def test_minute_and_alveolar_ventilation() -> None:
    """By definition: 400 mL x 25 /min is 10 L/min; less 150 mL of dead space a breath, 6.25 (computed here)."""
    assert ventilation.minute_ventilation(400.0, 25.0) == pytest.approx(10.0)
    assert ventilation.alveolar_ventilation(400.0, 25.0, 150.0) == pytest.approx(6.25)


def test_ventilation_for_a_wished_paco2() -> None:
    """8 L/min at 60 mmHg: 9.6 for 50."""
    assert ventilation.minute_ventilation_for_paco2(8.0, 60.0, 50.0) == pytest.approx(9.6)


def test_ventilatory_ratio() -> None:
    """Sinha, Br J Anaesth 2009;102:692: 10 L/min, 60 mmHg, 70.57 kg give 2.27."""
    assert ventilation.ventilatory_ratio(10.0, 60.0, 70.57) == pytest.approx(2.27, abs=0.006)


@pytest.mark.parametrize(("rr", "vte", "index"), [(30.0, 400.0, 75), (35.0, 300.0, 117)])
def test_rapid_shallow_breathing_index(rr: float, vte: float, index: int) -> None:
    """Yang and Tobin 1991: 30/0.40 = 75, 35/0.30 = 117."""
    assert round(ventilation.rapid_shallow_breathing_index(rr, vte)) == index


@pytest.mark.parametrize(
    ("half_time", "percents"),
    [(3.0, (90, 97, 99.9, 100, 100)), (4.0, (82, 93, 99, 100, 100)), (16.0, (35, 48, 73, 93, 99))],
)
def test_share_of_a_step_that_is_done(half_time: float, percents: tuple[float, ...]) -> None:
    """Half-times 3 (from memory), 4 (Farhi and Rahn 1955) and 16 min (from memory) at 10, 15, 30, 60, 120 min."""
    done = np.asarray(co2_course.share_done(np.array([10.0, 15.0, 30.0, 60.0, 120.0]), np.full(5, half_time)))
    np.testing.assert_allclose(done * 100.0, percents, atol=0.7)


def test_a_fall_from_80_to_60() -> None:
    """At 30 min 60.0 (half-time 3) or 65.5 (16); at 60 min 61.5 (16)."""
    assert co2_course.paco2_after(80.0, 60.0, 30.0, 3.0) == pytest.approx(60.0, abs=0.06)
    assert co2_course.paco2_after(80.0, 60.0, 30.0, 16.0) == pytest.approx(65.5, abs=0.06)
    assert co2_course.paco2_after(80.0, 60.0, 60.0, 16.0) == pytest.approx(61.5, abs=0.06)


def test_the_closed_form_solves_the_mass_balance() -> None:
    """Against an integration of S dP/dt = VCO2 - P x VA / 0.863 by scipy."""
    from scipy.integrate import solve_ivp

    vco2, va, weight = 220.0, 4.0, 70.0
    store = co2_course.FARHI_STORE * weight
    minutes = np.linspace(0.0, 120.0, 25)
    found = solve_ivp(lambda _t, p: (vco2 - p * va / 0.863) / store, (0.0, 120.0), [80.0], t_eval=minutes, rtol=1e-9)
    half = co2_course.half_time_of_store(va, weight)
    closed = co2_course.paco2_after(
        np.full(25, 80.0), np.full(25, co2_course.steady_paco2(vco2, va)), minutes, np.full(25, half)
    )
    np.testing.assert_allclose(closed, found.y[0], rtol=1e-6)


@pytest.mark.parametrize(("pressure", "leak"), [(14.0, 30.0), (5.0, 17.9), (20.0, 35.9), (25.0, 40.1)])
def test_port_leak(pressure: float, leak: float) -> None:
    """Orifice model: 30 L/min at 14 cmH2O (Borel, Chest 2009;135:669, author from memory) gives k 8.02."""
    assert tidal_volume_trust.port_leak(pressure, 8.02) == pytest.approx(leak, abs=0.06)


def test_leaked_share() -> None:
    """By definition (computed here): 24 L/min over 1 s is 400 mL; beside 400 mL expired that is one half."""
    assert tidal_volume_trust.leaked_share(400.0, 24.0, 1.0) == pytest.approx(0.5)
