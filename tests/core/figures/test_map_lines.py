"""The map's lines agree with the formulas and with the words of the classification."""

import numpy as np
import pytest
from hypothesis import given
from hypothesis import strategies as st

from core.figures.gas_path import gas_path
from core.figures.map_lines import HYPERCAPNIA_MMHG, map_lines
from core.judgement.shapes import EpisodeFigures, GasFigure
from core.physiology.acid_base import bicarbonate
from core.physiology.classification import Disturbance, Second, classify


def test_an_iso_line_holds_its_bicarbonate() -> None:
    for line in map_lines(15.0, 130.0).iso:
        possible = (line.ph > 6.6) & (line.ph < 7.9)  # a formula answers only for what can be
        again = bicarbonate(line.ph[possible], line.paco2_mmHg[possible])
        assert possible.sum() > 100
        assert np.allclose(again, line.hco3_mmol_L, atol=1e-9)


def test_bands_begin_at_hypercapnia_and_not_below() -> None:
    lines = map_lines(20.0, 100.0)
    assert all(band.paco2_mmHg[0] == HYPERCAPNIA_MMHG for band in lines.bands)
    assert not map_lines(20.0, 40.0).bands


def test_worked_points_of_the_reference() -> None:
    """Acute +1 and chronic +3.5 mmol/L per 10 mmHg from 40/24: at 60 mmHg pH 7.25 and 7.33 (textbook rules)."""
    acute, chronic = map_lines(60.0, 100.0).bands
    assert acute.ph_low[0] < 7.25 < acute.ph_high[0]
    assert chronic.ph_low[0] < 7.326 < chronic.ph_high[0]
    assert acute.ph_high[0] < 7.326


@pytest.mark.parametrize("bad", [(0.0, 50.0), (60.0, 60.0), (80.0, 20.0)])
def test_an_empty_range_is_refused(bad: tuple[float, float]) -> None:
    with pytest.raises(ValueError, match="accepted"):
        map_lines(*bad)


@given(st.floats(60.0, 120.0), st.floats(0.02, 0.98))
def test_a_gas_inside_the_acute_band_alone_is_called_acute(paco2: float, share: float) -> None:
    acute, _ = map_lines(paco2, paco2 + 1.0).bands
    ph = float(acute.ph_low[0] + share * (acute.ph_high[0] - acute.ph_low[0]))
    found = classify(ph, paco2)
    assert found.main is Disturbance.ACUTE_RESPIRATORY_ACIDOSIS
    assert found.second is Second.NONE


@given(st.floats(60.0, 120.0), st.floats(0.02, 0.98))
def test_a_gas_inside_the_chronic_band_is_called_chronic(paco2: float, share: float) -> None:
    _, chronic = map_lines(paco2, paco2 + 1.0).bands
    ph = float(chronic.ph_low[0] + share * (chronic.ph_high[0] - chronic.ph_low[0]))
    found = classify(ph, paco2)
    assert found.main in (Disturbance.CHRONIC_RESPIRATORY_ACIDOSIS, Disturbance.METABOLIC_ALKALOSIS)
    assert found.second in (Second.NONE, Second.RESPIRATORY_ACIDOSIS)
    if ph <= 7.45:
        assert found.main is Disturbance.CHRONIC_RESPIRATORY_ACIDOSIS


def test_a_venous_gas_is_numbered_but_not_on_the_path_and_a_bare_one_is_not_placed() -> None:
    gases = (GasFigure(1, "arterial", ph=7.25, paco2_mmHg=60.0), GasFigure(2, "venous", ph=7.22, paco2_mmHg=70.0),
             GasFigure(3, "arterial", ph=7.30), GasFigure(4, "capillary", ph=7.31, paco2_mmHg=55.0))  # fmt: skip
    path = gas_path(EpisodeFigures("E", 5, gases=gases))
    assert [(p.number, p.on_path) for p in path.gases] == [(1, True), (2, False), (4, True)]
    assert path.gases[1].reading.classification is None
    assert path.gases[1].reading.classification_reason is not None
    assert [p.number for p in path.not_placed] == [3]
