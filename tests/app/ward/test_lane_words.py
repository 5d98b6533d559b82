"""A lane says what the figures say: state, verdict, flags, due, every item in a whole sentence."""

from dataclasses import replace

import pytest

from app.chart.shapes import LaneKind
from app.look.theme import GasState, Tier, Verdict
from app.session.readers import reader_at
from app.telling.support_course import course_of
from app.ward.flag_column import short_flags
from app.ward.lane_words import LaneWords, OnWard, anchor_name
from core.judgement.response_shapes import ResponseFigure, Step
from core.judgement.shapes import NowFigure
from core.record.instant import HOUR
from tests.support.invented_ward import (
    NOW,
    ZONE,
    at,
    ended,
    failing,
    improving,
    leaking,
    on_cpap,
    record_of,
    ward,
)
from tests.support.sample_ward import sample_ward

WORDS = LaneWords(reader_at(ZONE, "mmHg", NOW), NOW)


def lane_of(bed, **values):
    return WORDS.lane(OnWard(bed.figures, course_of(bed.record, NOW)), first=values.pop("first", False), **values)


def items(lane, kind):
    return [i for i in lane.items if i.kind is kind]


def test_the_failing_lane():
    lane = lane_of(failing(), first=True)
    assert (lane.title, lane.state, lane.verdict, lane.tier) == (
        "Bed 7",
        GasState.SEVERE,
        Verdict.WORSE,
        Tier.ESCALATE,
    )
    assert lane.first_word
    assert lane.due_late
    assert "overdue 10 min" in lane.due_word
    assert [i.at for i in items(lane, LaneKind.GAS)] == [
        at("20:50"),
        at("22:10"),
        at("23:20"),
        at("00:40"),
        at("04:20"),
    ]
    assert [i.verdict for i in items(lane, LaneKind.GAS)][-1] is Verdict.WORSE
    assert items(lane, LaneKind.BREAK)[0].end == at("01:35")


def test_sentences_carry_values_units_and_times():
    lane = lane_of(failing())
    gas = items(lane, LaneKind.GAS)[-1].sentence
    assert "04:20" in gas
    assert "pH 7.22" in gas
    assert "74 mmHg" in gas
    assert "1 h 15 min after IPAP 18 to 20 cmH2O at 03:05" in gas
    change = items(lane, LaneKind.SETTING)[1].sentence
    assert change == "22:20 IPAP 12 to 16 cmH2O"
    assert "25 min" in items(lane, LaneKind.BREAK)[0].sentence


def test_weaker_flags_of_a_group_stay_under_the_strongest():
    lane = lane_of(failing())
    assert len(items(lane, LaneKind.FLAG)) == 2
    assert lane.flag_word.endswith("+1")


def test_in_kilopascal():
    words = LaneWords(reader_at(ZONE, "kPa", NOW), NOW)
    bed = failing()
    lane = words.lane(OnWard(bed.figures, course_of(bed.record, NOW)), first=False)
    assert "PaCO2 9.9 kPa" in items(lane, LaneKind.GAS)[-1].sentence
    assert "mmHg" not in lane.sentence


def test_an_open_window_is_drawn_and_a_judged_one_is_not():
    assert items(lane_of(on_cpap()), LaneKind.WINDOW)[0].end == at("06:05")
    assert items(lane_of(improving()), LaneKind.WINDOW) == []


def test_an_acidosis_stands_with_its_ph() -> None:
    bed = failing()
    gas = bed.figures.gases[-1]
    lane = WORDS.lane(OnWard(bed.figures, course_of(bed.record, NOW)), first=False)
    assert gas.state == "severe"
    assert lane.state_word == f"severe, pH {gas.ph:.2f}"
    calm = replace(bed.figures, gases=(replace(gas, state="resolved"),))
    assert "pH" not in WORDS.lane(OnWard(calm, course_of(bed.record, NOW)), first=False).state_word


def test_off_the_mask_stands_in_the_place_of_the_state_and_dims_the_settings():
    bed = failing()
    off = replace(bed.figures, now=NowFigure(off_mask_since=at("05:21")))
    lane = WORDS.lane(OnWard(off, course_of(bed.record, NOW)), first=False)
    assert lane.state_word == "mask off since 05:21; severe"
    calm = replace(off, gases=(replace(off.gases[-1], state="resolved"),))
    assert WORDS.lane(OnWard(calm, course_of(bed.record, NOW)), first=False).state_word == "mask off since 05:21"
    assert lane.off_mask
    assert lane.subtitle.endswith("mask off")
    assert "Mask off since 05:21 (before: BPAP-ST" in lane.sentence
    assert not lane_of(failing()).off_mask


def test_a_gain_that_was_lost_stands_beside_better_and_in_the_mark_of_its_gas():
    bed = next(f for f in sample_ward() if f.label == "Bed 5")
    lane = WORDS.lane(OnWard(bed, course_of(failing().record, NOW)), first=False)
    assert (lane.verdict_word, lane.verdict) == ("gain lost, still better", Verdict.MIXED)
    assert "Gain lost, still better. Since the start: better" in lane.sentence
    gas = items(lane, LaneKind.GAS)[-1]
    assert gas.verdict is Verdict.MIXED
    assert "Gain lost, still better, " in gas.sentence
    assert gas.sentence.endswith("since the start: better")


def test_an_ended_lane_is_closed_and_owes_nothing():
    lane = lane_of(ended())
    assert lane.closed
    assert lane.due_word == "ended 00:10, weaned"
    assert lane.flag_word == ""


def test_a_lane_whose_patient_relapsed_after_support_is_not_drawn_as_closed():
    bed = ended()
    flag = next(f for f in failing().figures.flags if f.tier == "escalate")
    lane = lane_of(replace(bed, figures=replace(bed.figures, flags=(flag,))))
    assert (lane.closed, lane.tier) == (False, Tier.ESCALATE)
    remark = replace(flag, tier="remark")
    assert lane_of(replace(bed, figures=replace(bed.figures, flags=(remark,)))).closed


def test_two_with_one_label_are_told_apart():
    assert "from 22:45, E1" in lane_of(leaking(2), apart="from 22:45, E1").subtitle


def test_an_episode_with_nothing_but_a_label_still_has_a_lane():
    from core.judgement.shapes import EpisodeFigures

    record = record_of("E", [("20:00", {"label": "Bed 1"})])
    lane = WORDS.lane(OnWard(EpisodeFigures("E", NOW, "Bed 1", ZONE), course_of(record, NOW)), first=False)
    assert lane.state is None
    assert lane.state_word == "no gas logged yet"
    assert lane.due_word == "nothing due"
    assert "Indication not recorded" in lane.subtitle


@pytest.mark.parametrize("bed", ward(), ids=lambda b: b.figures.label)
def test_every_item_is_a_sentence_of_its_own(bed):
    lane = lane_of(bed)
    assert lane.sentence.startswith(bed.figures.label)
    assert all(len(i.sentence) > 5 for i in lane.items)
    assert "nan" not in " ".join(i.sentence + i.word for i in lane.items).lower()
    assert "None" not in " ".join(i.sentence + i.word for i in lane.items)


@pytest.mark.parametrize(
    ("names", "told"),
    [
        ([], ""),
        (["A"], "A"),
        (["A" * 60, "B"], "A" * 60 + " +1"),
        (["pH below 7.30: a higher level", "GCS fallen"], "pH below 7.30; GCS fallen"),
        (["pH below 7.30: a higher level*", "GCS fallen*"], "pH below 7.30*; GCS fallen*"),
        (["A" * 20, "B" * 20, "C"], "A" * 20 + " +2"),
    ],
)
def test_short_flags_never_hide_that_there_are_more(names, told):
    assert short_flags(names) == told


def test_a_change_is_named_from_what_to_what_as_it_stands_in_a_sentence():
    steps = (Step(1, "ipap", 18.0, 20.0), Step(2, "ipap", 20.0, 24.0), Step(2, "rate_set", 14.0, 16.0),
             Step(2, "fio2", None, 0.35))  # fmt: skip
    told = anchor_name(ResponseFigure(2, "change", 1, steps=steps))
    assert told == "IPAP 18 to 24 cmH2O, FiO2 35 %, backup rate 14 to 16/min"
    assert anchor_name(ResponseFigure(2, "change", 1)) == "a change of settings"


def test_a_doubtful_gas_is_told_and_ringed_at_the_end_of_its_lane():
    bed = failing()
    odd = replace(bed.figures.gases[-1], doubt=True, unconfirmed=True)
    doubtful = replace(bed, figures=replace(bed.figures, gases=(*bed.figures.gases[:-1], odd)))
    lane, sure = lane_of(doubtful), lane_of(bed)
    assert lane.doubtful
    assert lane.state_word == f"doubtful: {sure.state_word}"
    assert not sure.doubtful
    assert "(doubtful: " in lane.sentence


def test_a_state_too_long_for_its_place_keeps_oxygen_and_ph_whole():
    bed = failing()
    now = replace(bed.figures.now, oxygen_failure=True, pf_mmHg=236.0, pf_at=bed.figures.gases[-1].at)
    lane = lane_of(replace(bed, figures=replace(bed.figures, now=now)))
    gas = bed.figures.gases[-1]
    assert lane.state_word == f"P/F 236 mmHg; severe, pH {gas.ph_text}"
    assert lane.state_shorter == (f"P/F 236 mmHg, pH {gas.ph_text}",)


def test_a_shorter_state_loses_neither_that_its_gas_was_off_support_nor_the_oxygen_that_fails():
    bed = failing()
    gas = replace(bed.figures.gases[-1], off_support=True)
    now = replace(bed.figures.now, oxygen_failure=True, pf_mmHg=218.0, pf_at=at("00:40"))

    def told(last):
        lane = lane_of(replace(bed, figures=replace(bed.figures, now=now, gases=(last,))))
        return lane.state_word, lane.state_shorter

    whole, shorter = told(gas)
    assert whole == "P/F 218 mmHg at 00:40; severe, last gas with mask off"
    assert shorter[0] == "P/F 218 mmHg at 00:40; off support: severe"
    assert shorter[-1] == f"P/F 218 mmHg; off support: pH {gas.ph_text}"
    whole, shorter = told(replace(gas, ph=None, ph_text=None, state="unknown"))
    assert whole == "P/F 218 mmHg at 00:40; state not known, last gas with mask off"
    assert shorter[-1] == "P/F 218 mmHg; off support: pH not known"
    assert all("off support" in form and "P/F 218 mmHg" in form for form in shorter)


def test_a_mask_that_is_off_stays_in_the_shortest_form():
    off = replace(failing().figures, now=NowFigure(off_mask_since=at("05:21")))
    lane = WORDS.lane(OnWard(off, course_of(failing().record, NOW)), first=False)
    assert lane.state_shorter == ("mask off; severe",)


def test_a_silence_stands_first_under_the_name():
    bed = failing()
    silent = replace(bed.figures.support, silent_since=NOW - 16 * HOUR)
    lane = lane_of(replace(bed, figures=replace(bed.figures, support=silent)))
    assert lane.subtitle == "nothing logged for 16 h; COPD"


def test_a_moment_of_another_day_carries_its_date():
    bed = failing()
    words = LaneWords(reader_at(ZONE, "mmHg", NOW + 24 * HOUR), NOW + 24 * HOUR)
    lane = words.lane(OnWard(bed.figures, course_of(bed.record, NOW)), first=False)
    assert all("-Mar-2026 " in i.sentence for i in items(lane, LaneKind.GAS))
