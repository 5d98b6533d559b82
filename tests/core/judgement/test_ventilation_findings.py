"""Ventilation: what each figure is made from, and that the doubt of a tidal volume reaches every one of them."""

from dataclasses import fields

import numpy as np
import pytest

from core.figures.catalogue import CATALOGUE
from core.figures.episode_figures import judged
from core.judgement.derived import FigureInput
from core.judgement.policy import shipped_policy
from core.judgement.score_inputs import barriers
from core.judgement.tidal_volume import tidal_volume_trust_series
from core.judgement.ventilation_findings import needed_for, ventilation_figure
from core.physiology.tidal_volume_trust import Trust
from tests.support.log import device, episode, moment

PATIENT = "00:30 height 175\n00:30 sex male\n"
START = PATIENT + "00:50 rr 30\n01:00 mode bpap-st ipap 16 epap 6 fio2 40 ti 1.0 backup 14\n"
DEFINED = START + "01:00 leak_definition unintentional\n"


def context(log, *samples, as_of="03:00"):
    return judged(episode(log, samples=samples), moment(as_of), shipped_policy())


def figures(log, *samples, as_of="03:00"):
    ctx = context(log, *samples, as_of=as_of)
    return ventilation_figure(ctx, barriers(tuple(s.at for a in ctx.anchors for s in a.steps), ctx.support))


def breaths(leak, vte=400.0, rate=25.0, start="02:00", minutes=60):
    return (
        device("vte", start, [vte] * minutes), device("rr_total", start, [rate] * minutes),
        device("leak", start, [leak] * minutes),
    )  # fmt: skip


MADE_FROM_VOLUME = (
    "tidal_volume_mL", "tidal_volume_mL_per_kg", "minute_ventilation_L_per_min", "alveolar_ventilation_L_per_min",
    "rapid_shallow_breathing_index", "minute_ventilation_at_gas_L_per_min", "ventilatory_ratio",
    "minute_ventilation_for_usual_L_per_min",
)  # fmt: skip
GAS = "00:30 usual_paco2 50\n02:50 ph 7.30 paco2 60 site arterial\n"


def test_the_figures_of_400_mL_at_25_a_minute():
    """10 L/min; 2.2 mL/kg of dead space; ratio 2.27 at 60 mmHg and 70.57 kg (Sinha 2009); 12 L/min for 50."""
    v = figures(DEFINED + GAS, *breaths(10.0))
    assert v.predicted_body_weight_kg.value == pytest.approx(70.57, abs=0.006)
    assert v.tidal_volume_mL.value == 400.0
    assert v.tidal_volume_mL_per_kg.value == pytest.approx(400 / 70.566, abs=0.001)
    assert v.minute_ventilation_L_per_min.value == pytest.approx(10.0)
    assert v.alveolar_ventilation_L_per_min.value == pytest.approx((400 - 2.2 * 70.566) * 25 / 1000)
    assert v.rapid_shallow_breathing_index.value == pytest.approx(62.5)
    assert v.ventilatory_ratio.value == pytest.approx(2.27, abs=0.005)
    assert v.minute_ventilation_for_usual_L_per_min.value == pytest.approx(12.0)
    assert needed_for(v, FigureInput(40.0)).value == pytest.approx(15.0)
    assert v.tidal_volume_mL.at == moment("02:59")


@pytest.mark.parametrize(
    ("log", "leak", "key"),
    [
        (DEFINED, 10.0, None),
        (DEFINED, 30.0, "tidal_volume.leak_too_large"),
        (DEFINED.replace("ti 1.0", "ti 0.8"), 30.0, None),
        (DEFINED, 31.0, "tidal_volume.leak_too_large"),
        (START, 10.0, "tidal_volume.leak_not_known"),
        (START + "01:00 leak_definition total\n", 35.0, None),
        (START + "01:00 leak_definition total\n", 62.0, "tidal_volume.leak_too_large"),
    ],
)
def test_a_doubt_travels_with_every_figure_made_from_the_volume(log, leak, key):
    """30 L/min over 1 s is 500 mL, more than half of 400 + 500; over 0.8 s it is 400, just half.

    At 16/6, 1.0 s and 25/min the mean pressure is 10.2 cmH2O and the port's own leak 25.6 L/min.
    """
    v = figures(log + GAS, *breaths(leak, vte=401.0))
    for name in MADE_FROM_VOLUME:
        figure = getattr(v, name)
        assert figure.value is not None, name
        assert (figure.doubt.key if figure.doubt else None) == key, name
    assert v.predicted_body_weight_kg.doubt is None


def test_without_any_leak_logged_the_volume_is_doubtful():
    v = figures(DEFINED, *breaths(10.0)[:2])
    assert v.tidal_volume_mL.doubt.key == "tidal_volume.leak_not_known"


def test_the_majority_of_the_minutes_decides_the_doubt_of_a_median():
    some = device("leak", "02:00", [10.0] * 52 + [40.0] * 8)
    few = device("leak", "02:00", [10.0] * 54 + [40.0] * 6)
    vte, rate, _ = breaths(0.0)
    assert figures(DEFINED, vte, rate, some).tidal_volume_mL.doubt is not None
    assert figures(DEFINED, vte, rate, few).tidal_volume_mL.doubt is None


def test_the_trust_of_every_minute_for_a_chart():
    leak = device("leak", "02:00", [10.0, 31.0, 10.0, 130.0])
    vte = device("vte", "02:00", [400.0, 400.0, 0.0, 400.0, 400.0, 400.0, 400.0])
    t, codes = tidal_volume_trust_series(context(DEFINED, vte, leak))
    assert t.tolist() == vte.t.tolist()
    told = [Trust(c) for c in codes]
    assert told == [
        Trust.TRUSTED,
        Trust.DOUBTFUL,
        Trust.VOID,
        Trust.VOID,
        Trust.VOID,
        Trust.VOID,
        Trust.NOT_KNOWN,
    ]


def test_leak_is_read_by_what_it_meant_then():
    """40 L/min in all is 14 unintentional beside the port; 40 unintentional is too much."""
    vte, rate, leak = breaths(40.0)
    log = START + "01:00 leak_definition total\n02:30 leak_definition unintentional\n02:30 device another\n"
    t, codes = tidal_volume_trust_series(context(log, vte, rate, leak))
    before = t < moment("02:30")
    assert set(codes[before].tolist()) == {Trust.TRUSTED}
    assert set(codes[~before].tolist()) == {Trust.DOUBTFUL}


def test_the_leak_of_a_break_voids_and_a_minute_without_breath_is_no_volume():
    vte = device("vte", "02:00", [400.0] * 50 + [0.0] * 10)
    rate = device("rr_total", "02:00", [25.0] * 60)
    v = figures(DEFINED, vte, rate, device("leak", "02:00", [10.0] * 60))
    assert v.tidal_volume_mL.value == 400.0
    assert v.tidal_volume_mL.at == moment("02:49")


def test_a_median_reaches_back_across_no_change():
    vte = device("vte", "02:00", [300.0] * 50 + [500.0] * 10)
    v = figures(DEFINED + "02:49 ipap 20\n", vte, *breaths(10.0)[1:])
    assert v.tidal_volume_mL.value == 500.0


def test_a_newer_logged_volume_beats_an_older_median():
    v = figures(DEFINED + "02:59 vte 520 leak 12 rr 22\n", *breaths(10.0, minutes=55))
    assert (v.tidal_volume_mL.value, v.tidal_volume_mL.at) == (520.0, moment("02:59"))
    assert v.tidal_volume_mL.doubt is None
    assert v.rapid_shallow_breathing_index.value == pytest.approx(22 / 0.52)


def test_the_devices_minute_volume_is_taken_where_it_gives_one():
    v = figures(DEFINED, *breaths(10.0), device("mv", "02:00", [11.0] * 60))
    assert v.minute_ventilation_L_per_min.value == 11.0
    assert v.alveolar_ventilation_L_per_min.inputs["vte"].value == pytest.approx(440.0)
    assert v.minute_ventilation_L_per_min.doubt is None


def test_a_counted_rate_beats_the_device():
    v = figures(DEFINED + "02:50 rr 32\n", *breaths(10.0))
    assert v.rapid_shallow_breathing_index.value == pytest.approx(80.0)


def test_the_ratio_is_taken_at_the_gas_with_the_ventilation_before_it():
    vte = device("vte", "02:00", [400.0] * 30 + [600.0] * 30)
    log = DEFINED + "02:29 ph 7.30 paco2 60 site arterial\n"
    v = figures(log, vte, *breaths(10.0)[1:])
    assert v.minute_ventilation_at_gas_L_per_min.value == pytest.approx(10.0)
    assert v.minute_ventilation_L_per_min.value == pytest.approx(15.0)
    assert v.ventilatory_ratio.value == pytest.approx(2.27, abs=0.005)


@pytest.mark.parametrize(
    "gas", ["02:50 ph 7.30 paco2 60 site venous\n", "00:55 ph 7.30 paco2 60 site arterial\n", "02:50 ph 7.30\n",
            "02:30 break_start\n02:45 break_end\n02:50 ph 7.30 paco2 60 site arterial\n"],
)  # fmt: skip
def test_no_ratio_from_a_venous_gas_or_one_off_support(gas):
    v = figures(DEFINED + gas, *breaths(10.0))
    assert v.ventilatory_ratio.value is None
    assert v.ventilatory_ratio.reason.key == "ventilation.no_gas_on_support"


def test_what_is_not_known_has_its_reason():
    bare = figures("00:50 rr 30\n01:00 mode bpap-st ipap 16 epap 6\n")
    for f in fields(bare):
        figure = getattr(bare, f.name)
        if f.name == "typed_doubts":
            assert figure == ()
            continue
        assert figure.key in CATALOGUE
        assert figure.value is None
        assert figure.reason is not None
    assert bare.predicted_body_weight_kg.reason.key in ("undefined.missing", "undefined.sex_unknown")
    assert figures("00:30 height 175\n").predicted_body_weight_kg.reason.key == "undefined.sex_unknown"
    no_rate = figures(DEFINED, *breaths(10.0)[::2])
    assert no_rate.alveolar_ventilation_L_per_min.value is None
    assert no_rate.minute_ventilation_L_per_min.reason.values["input"] == "rr"


def test_trust_codes_keep_the_shape_of_the_channel():
    t, codes = tidal_volume_trust_series(context(DEFINED))
    assert t.shape == codes.shape == (0,)
    assert codes.dtype == np.int8
