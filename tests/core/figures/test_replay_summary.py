"""What a replay comes to: hours, spans, markers side by side, escalation against the outcome."""

from dataclasses import replace

import pytest

from core.figures.replay import PastEpisode
from core.figures.replay_summary import (
    ReplayStoppedError,
    Span,
    by_marker,
    by_outcome,
    first_escalation,
    known_at_once,
    load_of,
    replayed,
)
from core.judgement.policy import shipped_policy
from core.record.entries import Action
from core.record.instant import DAY
from tests.support.flag_cases import BEFORE, COPD, START, with_rule
from tests.support.log_cases import at, build, device, entries

POLICY = shipped_policy()
STRICTER = with_rule("ph_below_severe", limits={"ph": 7.2})
LOG = COPD + BEFORE + START + "02:00 ph 7.19 paco2 82\n03:30 rr 24\n05:00 intubated"


def past(log=LOG, key="E"):
    return PastEpisode(key, tuple(entries(log, key)), tuple(device(log, key)))


def test_hours_run_from_the_first_entry_to_the_end_of_support():
    found = replayed(past(), [POLICY])
    assert (found.begun, found.until, found.ended_at) == (build(entries(LOG)).first_at, at("05:00"), at("05:00"))
    assert found.hours == pytest.approx((at("05:00") - found.begun) / 3_600_000_000)
    assert (found.label, found.outcome, found.late) == ("E", "intubated", 0.0)


def test_a_span_counts_what_is_raised_inside_and_knows_nothing_later():
    whole = replayed(past(), [POLICY])
    early = replayed(past(), [POLICY], Span(None, at("02:00")))
    late = replayed(past(), [POLICY], Span(at("02:00"), None))
    assert "ph_below_720_on_support" not in {f.marker for f in early.flags[0]}
    assert {f.flag_id for f in early.flags[0]} | {f.flag_id for f in late.flags[0]} == {
        f.flag_id for f in whole.flags[0]
    }
    assert early.hours + late.hours == pytest.approx(whole.hours)
    assert early.outcome == "intubated"
    assert replayed(past(), [POLICY], Span(at("d1 00:00"), None)) is None
    samples = past(COPD + BEFORE + START + "device spo2 02:00 04:00 80 80")
    cut = replayed(samples, [POLICY], Span(None, at("02:00")))
    assert "spo2_deep" not in {f.marker for f in cut.flags[0]}


def test_two_policies_side_by_side():
    milder = past(LOG.replace("7.19", "7.22"), "F")
    found = [replayed(one, [POLICY, STRICTER]) for one in (past(), milder)]
    row = next(r for r in by_marker(found, 2) if r.marker == "ph_below_severe")
    ours, theirs = row.counts
    assert (ours.raised, ours.episodes, theirs.raised) == (2, 2, 1)
    gone = next(r for r in by_marker(found[1:], 2) if r.marker == "ph_below_severe")
    assert gone.counts[1] is None
    a, b = load_of(found, 0), load_of(found, 1)
    assert a.raised - b.raised == 1
    assert a.per_hour == pytest.approx(a.raised / sum(e.hours for e in found))
    assert sum(n for _, n in a.by_tier) == a.raised
    assert load_of([], 0).per_hour is None


def test_escalation_stands_against_the_outcome():
    failed = replayed(past(), [POLICY])
    well = replayed(past(COPD + BEFORE + START + "02:00 ph 7.36 paco2 50"), [POLICY])
    assert first_escalation(failed, 0) == at("02:00")
    assert first_escalation(well, 0) is None
    rows = {r.outcome: r for r in by_outcome([failed, well], 1)}
    assert (rows["intubated"].escalated, rows["intubated"].lead_h) == ((1,), (3.0,))
    assert (rows["not recorded"].escalated, rows["not recorded"].lead_h) == ((0,), (None,))


def test_an_escalation_after_the_end_is_none_before_it():
    made = [replace(e, recorded_at=at("06:00")) if e.channel in ("ph", "paco2") and e.at == at("02:00") else e
            for e in entries(LOG)]  # fmt: skip
    made = [replace(e, seq=i) for i, e in enumerate(sorted(made, key=lambda e: e.recorded_at), 1)]
    found = replayed(PastEpisode("E", tuple(made)), [POLICY])
    assert any(f.tier == "escalate" and f.raised_at == at("06:00") for f in found.flags[0])
    assert first_escalation(found, 0) is None


def test_records_typed_in_long_after_are_said_and_can_be_read_as_if_at_once():
    months_later = at("05:00") + 90 * DAY
    typed = tuple(replace(e, recorded_at=months_later) for e in entries(LOG))
    lost = replayed(PastEpisode("E", typed), [POLICY])
    assert lost.late == 1.0
    assert lost.hours == pytest.approx(replayed(past(), [POLICY]).hours)
    assert {f.raised_at for f in lost.flags[0]} == {months_later}
    again = replayed(known_at_once(PastEpisode("E", typed)), [POLICY])
    assert again.late == 0.0
    assert [(f.marker, f.raised_at) for f in again.flags[0]] == [
        (f.marker, f.raised_at) for f in replayed(past(), [POLICY]).flags[0]
    ]


def test_a_correction_is_known_no_sooner_than_what_it_corrects():
    made = entries(LOG)
    wrong = next(e for e in made if e.channel == "ph" and e.at == at("02:00"))
    fix = replace(wrong, action=Action.CORRECT, number=7.36, at=at("01:00"), replaces=wrong.id, id="fix",
                  seq=len(made) + 1, recorded_at=at("06:00"))  # fmt: skip
    known = {e.id: e for e in known_at_once(PastEpisode("E", (*made, fix))).entries}
    assert known["fix"].recorded_at == known[wrong.id].recorded_at == at("02:00")
    assert known["fix"].seq > known[wrong.id].seq


def test_it_stops_when_told():
    with pytest.raises(ReplayStoppedError):
        replayed(past(), [POLICY], alive=lambda: False)
