"""Scores take the nearest fresh value, never across a change or a break, and say what is missing."""

import re

import numpy as np
import pytest

from core.figures.episode_figures import gas_stage, record_stage
from core.judgement.policy import read_policy, shipped_policy, shipped_text
from core.judgement.score_inputs import barriers, hacor_at, nearest, nearest_word, news2_latest, rate_at
from core.record.message import Message
from tests.support.log import device, episode, moment

NO_WALLS = np.empty(0, np.int64)


def context(log, at="06:00", samples=()):
    return gas_stage(record_stage(episode(log, samples=samples), moment(at), shipped_policy()))


def test_the_nearest_value_inside_the_span_is_taken():
    e = episode("01:40 hr 100\n02:10 hr 110\n02:31 hr 120")
    assert nearest(e, "hr", moment("02:00"), 30, NO_WALLS).value == 110.0
    assert nearest(e, "hr", moment("03:30"), 30, NO_WALLS).value is None


def test_a_value_beyond_a_change_is_not_taken():
    e = episode("01:50 hr 100\n02:20 hr 120")
    walls = np.array([moment("01:55")])
    assert nearest(e, "hr", moment("02:00"), 30, walls).value == 120.0
    assert nearest(e, "hr", moment("01:52"), 30, walls).value == 100.0


def test_a_value_at_the_minute_of_a_change_belongs_before_it():
    e = episode("02:00 hr 100")
    walls = np.array([moment("02:00")])
    assert nearest(e, "hr", moment("01:55"), 30, walls).value == 100.0
    assert nearest(e, "hr", moment("02:10"), 30, walls).value is None


def test_a_counted_rate_beats_the_machines_and_the_machines_is_a_median():
    machine = [device("rr_total", "01:50", [20] * 10 + [60] + [20] * 9)]
    assert rate_at(context("01:55 rr 28", samples=machine), moment("02:00"), NO_WALLS).value == 28.0
    assert rate_at(context("01:00 hr 90", samples=machine), moment("02:00"), NO_WALLS).value == 20.0


def test_words_are_taken_from_before_only():
    e = episode("01:00 acvpu voice\n02:10 acvpu alert")
    assert nearest_word(e, "acvpu", moment("02:00"), 240, NO_WALLS).value == "voice"
    assert nearest_word(e, "acvpu", moment("05:30"), 60, NO_WALLS).value is None


def test_no_word_and_no_number_is_taken_across_a_change_and_the_reason_is_said():
    """One rule for every input of every score: 4 h are as long as nothing changed in between."""
    log = (
        "01:00 mode bpap-st ipap 14 epap 6 fio2 50\n02:10 rr 30 spo2 90 bp 118/70 hr 110 gcs 14 acvpu voice temp 37\n"
    )
    log += "02:43 ipap 18\n02:50 rr 28 spo2 91 hr 108\n02:58 ph 7.38 paco2 38 pao2 70 site arterial"
    ctx = context(log)
    walls = np.array([moment("01:00"), moment("02:43")])
    early, late = news2_latest(ctx, walls), hacor_at(ctx, ctx.gases[0], walls)
    assert set(early.missing) == {"sbp", "temp", "acvpu"}
    assert set(late.missing) == {"gcs"}
    for part in (early.inputs["acvpu"], late.inputs["gcs"]):
        assert part.reason is not None
        assert part.reason.key == "score.input_before_change"
        assert (part.reason.values["at"], part.reason.values["changed_at"]) == (moment("02:10"), moment("02:43"))
    assert early.inputs["sbp"].reason.key == "score.input_too_old"  # 40 min are too long anyway
    assert early.inputs["rr"].reason is None
    assert set(news2_latest(context(log.replace("02:43 ipap 18\n", "")), walls[:1]).missing) == {"sbp", "temp"}


HYPOXAEMIC = "01:00 mode bpap-st ipap 14 epap 6 fio2 50\n01:58 hr 128 rr 34 gcs 14\n"


def test_hacor_is_taken_at_the_gas():
    ctx = context(HYPOXAEMIC + "02:00 ph 7.38 paco2 38 pao2 70 site arterial")
    score = hacor_at(ctx, ctx.gases[0], NO_WALLS)
    assert score.points == 1 + 0 + 2 + 4 + 1
    assert score.population == "inside"
    assert score.inputs["hr"].at == moment("01:58")


def test_a_missing_input_bounds_the_score_and_is_named():
    ctx = context("01:00 mode bpap-st ipap 14 epap 6 fio2 50\n02:00 ph 7.38 paco2 38 pao2 70 site arterial")
    score = hacor_at(ctx, ctx.gases[0], NO_WALLS)
    assert score.points is None
    assert (score.lowest, score.highest) == (4, 4 + 1 + 10 + 4)
    assert set(score.missing) == {"hr", "gcs", "rr"}


def test_an_unknown_fio2_leaves_a_range():
    ctx = context(
        "01:00 mode bpap-st ipap 14 epap 6 o2 flow 6\n01:58 hr 128 rr 34 gcs 14\n02:00 ph 7.38 paco2 38 pao2 70"
    )
    score = hacor_at(ctx, ctx.gases[0], NO_WALLS)
    assert score.points is None
    assert score.missing == ("pf",)
    assert score.population == "outside"


@pytest.mark.parametrize(("scale", "points"), [("", 10), ("spo2_scale 2", 7)])
def test_news2_uses_scale_two_only_where_a_clinician_recorded_it(scale, points):
    log = "01:00 mode bpap-st ipap 14 epap 5 fio2 35\n" + (f"01:01 {scale}\n" if scale else "")
    ctx = context(log + "02:00 rr 26 spo2 90 bp 118/70 hr 112 acvpu alert temp 37.4")
    assert news2_latest(ctx, NO_WALLS).points == points


@pytest.mark.parametrize(
    ("target", "scale", "said"),
    [
        ("target_spo2_low 88 target_spo2_high 92", "", {"scale": 1, "low": 88.0, "high": 92.0}),
        ("target_spo2_low 88 target_spo2_high 92", "spo2_scale 2", {"scale": 2}),
        ("target_spo2_low 94 target_spo2_high 98", "", {"scale": 1}),
    ],
)
def test_news2_on_scale_one_says_a_target_that_calls_for_scale_two(target, scale, said):
    ctx = context(f"01:00 {target} {scale}\n05:00 rr 20 spo2 90 hr 90 sbp 120 temp 37 acvpu alert")
    caveat = news2_latest(ctx, NO_WALLS).caveat
    assert (caveat.key, dict(caveat.values)) == ("news2.scale", said)


def test_news2_of_a_child_says_so_first():
    ctx = context("01:00 age 12 target_spo2_low 88 target_spo2_high 92\n05:00 rr 20 spo2 90 hr 90")
    assert news2_latest(ctx, NO_WALLS).caveat.key == "population.below_16"


def test_news2_counts_an_oxygen_flow_as_oxygen():
    ctx = context(
        "01:00 mode bpap-st ipap 14 epap 5 o2 flow 3\n02:00 rr 18 spo2 97 bp 130/80 hr 80 acvpu alert temp 37"
    )
    assert news2_latest(ctx, NO_WALLS).inputs["on_oxygen"].points == 2


VITALS = "rr 20 spo2 90 hr 90 sbp 120 temp 37 acvpu alert"


def test_off_the_mask_oxygen_nobody_logged_makes_news2_a_range():
    ctx = context(f"01:00 mode bpap-st ipap 20 epap 5 fio2 28\n02:10 mask off\n02:15 {VITALS}")
    score = news2_latest(ctx, NO_WALLS)
    assert (score.points, score.lowest, score.highest, score.missing) == (None, 3, 5, ("on_oxygen",))
    oxygen = score.inputs["on_oxygen"]
    assert (oxygen.value, oxygen.reason) == (None, Message("score.oxygen_off_mask", {"at": moment("02:10")}))


@pytest.mark.parametrize(("oxygen", "points"), [("flow 2", 5), ("flow 0", 3), ("fio2 28", 5)])
def test_oxygen_logged_since_the_mask_came_off_counts(oxygen, points):
    ctx = context(f"01:00 mode bpap-st ipap 20 epap 5 fio2 28\n02:10 mask off\n02:12 {oxygen}\n02:15 {VITALS}")
    score = news2_latest(ctx, NO_WALLS)
    assert score.points == points
    assert score.inputs["on_oxygen"].at == moment("02:12"), "when it was logged, not when the vitals were"


def test_the_mask_on_again_breathes_what_the_device_gives_and_a_stop_does_not():
    log = "01:00 mode bpap-st ipap 20 epap 5 fio2 28\n02:10 mask off\n02:30 mask on\n"
    assert news2_latest(context(f"{log}02:31 {VITALS}"), NO_WALLS).points == 5
    assert news2_latest(context(f"{log}03:00 stopped\n03:05 {VITALS}"), NO_WALLS).points is None


def test_walls_are_anchors_and_the_edges_of_breaks():
    ctx = context("00:50 rr 20\n01:00 mode bpap-st ipap 14 epap 5\n02:00 mask off\n02:20 mask on")
    assert barriers((moment("01:00"),), ctx.support).tolist() == [moment(t) for t in ("01:00", "02:00", "02:20")]


@pytest.mark.parametrize(
    ("channel", "typed", "score"),
    [("hr", "hr 128", "hacor"), ("rr", "rr 34", "hacor"), ("gcs", "gcs 14", "hacor"), ("sbp", "bp 118/70", "news2"),
     ("temp", "temp 37.4", "news2"), ("acvpu", "acvpu alert", "news2"), ("spo2", "spo2 91", "news2")],
)  # fmt: skip
def test_each_input_has_a_freshness_of_its_own(channel, typed, score):
    """Shortening one input's limit drops that input and no other."""
    vitals = "01:40 hr 128 rr 34 gcs 14 spo2 91 bp 118/70 temp 37.4 acvpu alert\n".replace(typed, "")
    log = f"01:00 mode bpap-st ipap 14 epap 6 fio2 50\n{vitals}"
    log += f"01:30 {typed}\n02:00 ph 7.38 paco2 38 pao2 70 site arterial"
    shorter, n = re.subn(
        rf"^{channel}_min = {{ value = \d+", f"{channel}_min = {{ value = 5", shipped_text(), flags=re.M
    )
    assert n == 1

    def missing(policy):
        ctx = gas_stage(record_stage(episode(log), moment("02:00"), policy))
        scored = hacor_at(ctx, ctx.gases[0], NO_WALLS) if score == "hacor" else news2_latest(ctx, NO_WALLS)
        return set(scored.missing)

    assert missing(read_policy(shorter)) - missing(shipped_policy()) == {channel}
