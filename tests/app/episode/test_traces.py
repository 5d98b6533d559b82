"""Traces hold every value that was logged, with its doubt, and nothing that was not."""

from dataclasses import replace

import numpy as np
import pytest

from app.chart.shapes import Drawn, Look
from app.episode.traces import TraceMaker, runs_above, shown_as
from app.telling.support_course import course_of
from core.figures.episode_figures import episode_figures
from core.judgement.policy import shipped_policy
from core.record.entries import Action, recorded
from core.record.episode import build_episode
from core.record.instant import MINUTE
from core.record.knowledge import standing
from core.record.message import Message
from tests.support.invented_ward import NOW, at, failing, leaking
from tests.support.log_cases import at as moment
from tests.support.log_cases import episode


def maker(bed=None, gas_unit="mmHg", record=None):
    bed = bed or failing()
    record = record or bed.record
    return TraceMaker(record, bed.figures, course_of(record, NOW), gas_unit, 30.0)


def test_device_values_are_a_line_and_hand_values_spots():
    line, spots = maker().traces("spo2", 0)
    assert (line.drawn, spots.drawn) == (Drawn.LINE, Drawn.SPOTS)
    assert line.t.size == (NOW - at("21:05")) // MINUTE
    assert spots.v.tolist() == [87, 89, 88, 88, 86]
    assert line.gap == 5 * MINUTE


def test_a_typed_reading_that_no_figure_takes_looks_so_and_says_why():
    """With the mask off, or a volume whose leak is not known: the line over the charts says what figures say."""
    log = "00:30 rr 20\n01:00 mode BPAP-ST ipap 20 epap 5\n01:30 vte 500\n02:10 mask_off\n02:16 vte 420 leak 22"
    record = episode(log)
    f = episode_figures(record, moment("03:00"), shipped_policy())
    made = TraceMaker(record, f, course_of(record, moment("03:00")), "mmHg", 30.0)
    (volume,), (leak,) = made.traces("vte", 0), made.traces("leak", 0)
    assert [s.word for s in volume.doubts] == [
        "tidal volume doubtful: leak not known", "logged while the mask was off: not judged",
    ]  # fmt: skip
    assert volume.looks.tolist() == [Look.DOUBTFUL, Look.DOUBTFUL]
    assert [(s.start, s.word) for s in leak.doubts] == [
        (moment("02:16"), "logged while the mask was off: not judged")
    ]


def test_gas_pressures_follow_the_unit():
    mmhg, kpa = maker().traces("paco2", 0)[0], maker(gas_unit="kPa").traces("paco2", 0)[0]
    assert mmhg.unit == "mmHg"
    assert kpa.unit == "kPa"
    assert kpa.v == pytest.approx(mmhg.v / 7.50062)
    assert maker(gas_unit="kPa").traces("pf", 0)[0].unit == "kPa"


def test_fractions_are_shown_in_per_cent():
    fio2 = maker().traces("fio2", 0)[0]
    assert fio2.unit == "%"
    assert fio2.v == pytest.approx([28, 35, 35])
    assert fio2.drawn is Drawn.STEPS
    assert fio2.t[-1] == NOW


def test_an_oxygen_flow_without_fio2_ends_the_known_fio2():
    fio2 = maker(leaking(2)).traces("fio2", 0)[0]
    assert np.isnan(fio2.v).all()


def test_a_corrected_value_and_a_doubtful_one_look_so():
    bed = failing()
    entries = [s.entry for s in bed.record.standing]
    first = next(e for e in entries if e.channel == "ph")
    fixed = recorded(
        replace(first, number=7.21, raw="7.21", action=Action.CORRECT, replaces=first.id), 9001, "fix", NOW
    )
    doubtful = recorded(
        replace(first, number=7.65, raw="7.65", at=at("05:00"), doubt="doubt.unusual"), 9002, "odd", NOW
    )
    record = build_episode("E-7", standing([*entries, fixed, doubtful]))
    trace = maker(bed, record=record).traces("ph", 0)[0]
    assert Look(trace.looks[0]) is Look.CORRECTED
    assert trace.v[0] == 7.21
    assert Look(trace.looks[-1]) is Look.DOUBTFUL
    assert Look(trace.looks[1]) is Look.FRESH


def test_a_tidal_volume_is_uncertain_where_leak_is_high_or_the_mask_off():
    vte = maker(leaking(2)).traces("vte", 0)[0]
    assert any("leak above 30" in d.word for d in vte.doubts)
    assert any(d.word == "mask off" for d in maker().traces("vte", 0)[0].doubts)
    assert maker().traces("rr_total", 0)[0].doubts == ()


def test_a_channel_without_values_draws_nothing():
    assert maker().traces("hr", 0) == ()
    assert maker().traces("lactate", 0) == ()


def test_venous_gases_are_a_trace_of_their_own():
    bed = failing()
    gases = tuple(replace(g, site="venous") if g.at == at("04:20") else g for g in bed.figures.gases)
    bed = replace(bed, figures=replace(bed.figures, gases=gases))
    usual, venous = maker(bed).traces("ph", 0)
    assert usual.v.size == 4
    assert venous.v.tolist() == [7.22]
    assert "venous" in venous.name


def test_runs_above():
    t = np.arange(6, dtype=np.int64) * MINUTE
    v = np.array([10, 40, 50, 10, np.nan, 45.0])
    assert runs_above(t, v, 30) == [(MINUTE, 3 * MINUTE), (5 * MINUTE, 6 * MINUTE)]
    assert runs_above(t[:0], v[:0], 30) == []


def test_every_drawable_channel_has_a_unit():
    from app.episode.panels import drawable

    assert all(shown_as(c, "kPa").unit for c in drawable())


def test_values_that_hardly_belong_together_are_both_marked():
    bed = failing()
    odd = replace(bed.figures.gases[-1], doubt=True, implausible=Message("gas.implausible", {}))
    bed = replace(bed, figures=replace(bed.figures, gases=(*bed.figures.gases[:-1], odd)))
    for channel in ("ph", "paco2"):
        (trace,) = maker(bed).traces(channel, 0)
        assert [t for t, look in zip(trace.t, trace.looks, strict=True) if look == Look.DOUBTFUL] == [odd.at]
