"""A verdict never depends on the order of entries, on the unit they were typed in, or on the zone of the clock."""

from __future__ import annotations

from dataclasses import replace

from hypothesis import given, settings
from hypothesis import strategies as st

from core.figures.episode_figures import gas_stage, record_stage
from core.judgement.anchors import find_anchors
from core.judgement.policy import shipped_policy
from core.judgement.response import judge_responses
from core.record.channels import channel
from core.record.entries import Entry, NewEntry, recorded
from core.record.episode import build_episode
from core.record.instant import MINUTE, parse
from core.record.knowledge import standing
from core.record.reading import read_value
from core.record.units import MMHG_PER_KPA

T0 = parse("2026-03-28T20:00:00+00:00")
POLICY = shipped_policy()

Row = tuple[int, str, str, str]


@st.composite
def records(draw: st.DrawFn) -> list[Row]:
    """An episode: a gas and a start, then changes and gases at drawn minutes; one value per channel and minute."""
    rows: dict[tuple[int, str], Row] = {}

    def put(minute: int, key: str, value: str, unit: str = "") -> None:
        rows[minute, key] = (minute, key, value, unit)

    put(-30, "indication", draw(st.sampled_from(["copd", "pneumonia"])))
    for minute in (-20, *draw(st.lists(st.integers(1, 600), min_size=1, max_size=6, unique=True))):
        put(minute, "ph", f"{draw(st.integers(700, 755)) / 100:.2f}")
        put(minute, "paco2", str(draw(st.integers(30, 110))), "mmHg")
        put(minute, "pao2", str(draw(st.integers(45, 110))), "mmHg")
        put(minute, "site", draw(st.sampled_from(["arterial", "arterial", "capillary", "venous"])))
    put(0, "mode", "BPAP-ST")
    put(0, "ipap", "12")
    put(0, "epap", "5")
    put(0, "fio2", "30", "%")
    for minute in draw(st.lists(st.integers(1, 600), max_size=6, unique=True)):
        key = draw(st.sampled_from(["ipap", "fio2", "epap", "o2_flow"]))
        low, high = {"ipap": (14, 30), "fio2": (24, 80), "epap": (3, 9), "o2_flow": (0, 10)}[key]
        put(minute, key, str(draw(st.integers(low, high))), "%" if key == "fio2" else "")
    for minute in draw(st.lists(st.integers(-30, 600), max_size=8, unique=True)):
        put(minute, "rr", str(draw(st.integers(10, 44))))
        put(minute, "spo2", str(draw(st.integers(78, 99))))
    return list(rows.values())


def entries(rows: list[Row], zone: str = "UTC") -> list[Entry]:
    made = []
    for seq, (minute, key, value, unit) in enumerate(rows, 1):
        r = read_value(channel(key), value, unit)
        at = T0 + minute * MINUTE
        new = NewEntry("E", key, at, r.number, r.words, r.raw, r.raw_unit, r.decimals, zone)
        made.append(recorded(new, seq, f"e{seq}", T0 + 700 * MINUTE))
    return made


def judged(made: list[Entry]) -> object:
    ctx = gas_stage(record_stage(build_episode("E", standing(made)), T0 + 700 * MINUTE, POLICY))
    anchors = find_anchors(ctx.episode, ctx.settings, ctx.support, POLICY)
    return [
        (r.anchor, r.anchor_at, r.headline, r.state, r.baseline_at, r.co2_arm_active, r.oxygen_arm_active,
         [(g.at, g.timing, g.verdict, g.co2_arm, g.oxygen_arm, g.since_start.verdict, g.since_start.gain_lost)
          for g in r.gases], [m.key for m in r.why])
        for r in judge_responses(ctx, anchors)
    ]  # fmt: skip


@settings(max_examples=80, deadline=None)
@given(records(), st.randoms(use_true_random=False))
def test_the_order_of_entries_does_not_matter(rows: list[Row], random: object) -> None:
    shuffled = list(rows)
    random.shuffle(shuffled)  # type: ignore[attr-defined]
    assert judged(entries(rows)) == judged(entries(shuffled))


@settings(max_examples=80, deadline=None)
@given(records())
def test_exact_conversion_to_kpa_changes_no_verdict(rows: list[Row]) -> None:
    def in_kpa(row: Row) -> Row:
        minute, key, value, unit = row
        return (minute, key, repr(float(value) / MMHG_PER_KPA), "kPa") if unit == "mmHg" else row

    assert judged(entries(rows)) == judged(entries([in_kpa(r) for r in rows]))


@settings(max_examples=40, deadline=None)
@given(records(), st.sampled_from(["Europe/Berlin", "Asia/Kathmandu", "America/St_Johns"]))
def test_the_zone_changes_no_verdict(rows: list[Row], zone: str) -> None:
    assert judged(entries(rows)) == judged(entries(rows, zone))


@settings(max_examples=40, deadline=None)
@given(records(), st.integers(0, 600))
def test_what_comes_later_changes_nothing_as_of_a_moment(rows: list[Row], cut: int) -> None:
    episode = build_episode("E", standing(entries(rows)))
    earlier = build_episode("E", standing(entries([r for r in rows if r[0] <= cut])))
    as_of = T0 + cut * MINUTE
    found = []
    for one in (episode, replace(earlier, standing=episode.standing)):
        ctx = gas_stage(record_stage(one, as_of, POLICY))
        found.append(judge_responses(ctx, find_anchors(ctx.episode, ctx.settings, ctx.support, POLICY)))
    strip = [[(r.anchor_at, r.headline, [(g.at, g.verdict) for g in r.gases]) for r in part] for part in found]
    assert strip[0] == strip[1]


@settings(max_examples=60, deadline=None)
@given(records())
def test_a_gas_gives_the_headline_of_one_anchor_at_most(rows: list[Row]) -> None:
    ctx = gas_stage(record_stage(build_episode("E", standing(entries(rows))), T0 + 700 * MINUTE, POLICY))
    found = judge_responses(ctx, find_anchors(ctx.episode, ctx.settings, ctx.support, POLICY))
    headlines = [r.headline_gas_at for r in found if r.headline_gas_at is not None]
    assert len(headlines) == len(set(headlines))
    for r in found:
        for g in r.gases:
            assert g.attributable or g.verdict is None
            assert g.timing != "early" or r.headline_gas_at != g.at
