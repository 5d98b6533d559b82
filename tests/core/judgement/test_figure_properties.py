"""What must hold of the figures of any episode: nothing later, no order, no unit and no clock decides them."""

from __future__ import annotations

from dataclasses import fields, is_dataclass
from math import isnan
from random import Random
from typing import Any

from hypothesis import assume, given, settings
from hypothesis import strategies as st

from core.figures.json_form import to_json
from core.judgement.shapes import EpisodeFigures
from core.record.instant import MINUTE
from tests.support.random_rows import (
    PACO2,
    ZERO,
    Row,
    entries_of,
    entry_of,
    figures_of,
    thrown,
    withdrawal,
)

SEEDS = st.integers(0, 10**9)
FEW = settings(max_examples=25, deadline=None)
SHIFTED = 777


@FEW
@given(SEEDS, st.integers(-60, 400))
def test_what_comes_later_changes_no_figure_of_before(seed: int, cut: int) -> None:
    rows, _ = thrown(seed)
    before = [r for r in rows if r[0] <= cut]
    assume(before)
    whole = entries_of(rows)
    known = [e for e in whole if e.at <= ZERO + cut * MINUTE]
    assert to_json(figures_of(whole, cut)) == to_json(figures_of(known, cut))


@FEW
@given(SEEDS)
def test_the_order_of_recording_changes_nothing(seed: int) -> None:
    rows, as_of = thrown(seed)
    other = list(rows)
    Random(seed + 1).shuffle(other)
    assert shown(figures_of(entries_of(rows), as_of)) == shown(figures_of(entries_of(other), as_of))


def shown(figures: EpisodeFigures) -> dict[str, Any]:
    """The figures as JSON, but for which of a gas's entries stands for it: its first in the ledger."""
    told = to_json(figures)
    return {**told, "due": [{k: v for k, v in d.items() if k != "done_by"} for d in told["due"]]}


@FEW
@given(SEEDS)
def test_what_was_withdrawn_might_never_have_been(seed: int) -> None:
    rows, as_of = thrown(seed)
    extra, _ = thrown(seed + 1)
    taken = {(minute, key) for minute, key, _ in rows}
    more = [r for r in extra if (r[0], r[1]) not in taken]
    entries = entries_of([*rows, *more])
    gone = [withdrawal(e, len(entries) + i) for i, e in enumerate(entries[len(rows) :], 1)]
    assert to_json(figures_of([*entries, *gone], as_of)) == to_json(figures_of(entries_of(rows), as_of))


def told(figures: EpisodeFigures) -> object:
    """Everything that judges: verdicts, states, flags, what is due, the order of concern."""
    return (
        [(g.at, g.state, g.hypercapnic, g.off_support) for g in figures.gases],
        [(r.anchor, r.anchor_at, r.headline, r.headline_gas_at, r.baseline_at, r.gain_lost,
          [(g.at, g.verdict, g.co2_arm, g.oxygen_arm, g.since_start.verdict) for g in r.gases])
         for r in figures.responses],
        [(f.marker, f.tier, f.since, f.ended_at, f.state) for f in figures.flags],
        [(d.what, d.due_from, d.due_until, d.state) for d in figures.due],
        [(k, s.points, s.lowest, s.highest) for k, s in figures.scores.items() if k != "rox"],
        figures.concern.rank,
    )  # fmt: skip


@FEW
@given(SEEDS)
def test_the_unit_of_gas_pressures_decides_nothing(seed: int) -> None:
    rows, as_of = thrown(seed)
    assert told(figures_of(entries_of(rows), as_of)) == told(figures_of(entries_of(rows, kpa=True), as_of))


def moved(value: Any, by: int) -> Any:
    """The same figures with every instant moved."""
    if isinstance(value, bool | str | float | None):
        return value
    if isinstance(value, int):
        return value + by if value > 10**14 else value
    if is_dataclass(value):
        parts = {f.name: getattr(value, f.name) for f in fields(value)}
        return type(value).__name__, {
            k: moved(v, by) for k, v in parts.items() if k not in ("ids", "flag_id", "done_by")
        }
    if isinstance(value, dict):
        return {k: moved(v, by) for k, v in value.items()}
    return [moved(v, by) for v in value]


@FEW
@given(SEEDS)
def test_another_day_changes_nothing_but_the_times(seed: int) -> None:
    rows, as_of = thrown(seed)
    here = figures_of(entries_of(rows), as_of)
    there = figures_of(entries_of(rows, SHIFTED * 15), as_of, SHIFTED * 15)
    assert moved(here, SHIFTED * 15 * MINUTE) == moved(there, 0)


def open_escalations(figures: EpisodeFigures) -> set[str]:
    return {f.marker for f in figures.flags if f.tier == "escalate" and f.ended_at is None}


@FEW
@given(SEEDS, st.sampled_from(["hco3", "lactate", "paco2"]))
def test_a_gas_that_holds_next_to_nothing_ends_no_escalation_and_makes_nobody_better(seed: int, key: str) -> None:
    rows, _ = thrown(seed)
    last = max(minute for minute, _, _ in rows)
    value = {"hco3": "28", "lactate": "1.0", "paco2": Random(seed).choice(PACO2)}[key]
    after: list[Row] = [*rows, (last + 40, key, value)]
    before, then = (figures_of(entries_of(some), last + 40) for some in (rows, after))
    assert open_escalations(before) <= open_escalations(then)
    better = {r.anchor_at for r in before.responses if r.headline == "better"}
    assert {r.anchor_at for r in then.responses if r.headline == "better"} <= better


@FEW
@given(SEEDS, st.sampled_from(["ph", "paco2"]))
def test_a_verdict_on_co2_is_never_better_for_what_the_gas_lacks(seed: int, key: str) -> None:
    rows, as_of = thrown(seed)
    whole = figures_of(entries_of(rows), as_of)
    for response in whole.responses:
        at = response.headline_gas_at
        if at is None or not response.co2_arm_active or response.headline == "better":
            continue
        less = [r for r in rows if not (r[1] == key and ZERO + r[0] * MINUTE == at)]
        found = figures_of(entries_of(less), as_of).responses
        same = [r for r in found if r.anchor_at == response.anchor_at and r.baseline_at == response.baseline_at]
        assert all(r.headline != "better" or r.headline_gas_at != at for r in same)


REASONED = {
    "GasFigure": ("hco3_calculated_mmol_L", "sbe_mmol_L", "pf_mmHg", "aa_gradient_mmHg", "consistent", "state"),
    "RatioFigure": ("slope_per_h",),
    "LeakFigure": ("median_L_per_min",),
    "SupportFigure": ("hours_on_mask", "pressure_support_cmH2O"),
}
"""Figures whose absence has a reason beside it under its own name."""


def walk(value: Any, path: str = "") -> list[str]:
    """What is wrong: a NaN anywhere, or a figure that is absent and does not say why."""
    if isinstance(value, float):
        return [f"{path} is NaN"] if isnan(value) else []
    if is_dataclass(value):
        names = [f.name for f in fields(value)]
        found = [w for n in names for w in walk(getattr(value, n), f"{path}.{n}")]
        for name in REASONED.get(type(value).__name__, ()):
            if getattr(value, name) is None and name not in value.reasons:
                found.append(f"{path}.{name} is absent without a reason")
        return found
    if isinstance(value, dict):
        return [w for k, v in value.items() for w in walk(v, f"{path}.{k}")]
    if isinstance(value, list | tuple):
        return [w for i, v in enumerate(value) for w in walk(v, f"{path}[{i}]")]
    return []


@FEW
@given(SEEDS)
def test_what_is_absent_says_why_and_no_nan_leaves_core(seed: int) -> None:
    rows, as_of = thrown(seed)
    figures = figures_of(entries_of(rows), as_of)
    assert walk(figures) == []
    for score in figures.scores.values():
        assert score.points is not None or "points" in score.reasons
    for response in figures.responses:
        assert response.headline != "not judged" or response.why
        for gas in response.gases:
            assert gas.verdict is not None or gas.why


def test_the_entry_of_a_row_keeps_its_name_wherever_it_stands_in_the_ledger() -> None:
    assert entry_of((0, "ph", "7.30"), 1).id == entry_of((0, "ph", "7.30"), 9).id
