"""The judgement against a plain, slow telling of the same rules, on episodes thrown by dice.

`tests/support/plain_rules.py` and its neighbours say the rules as DEVELOPERS.md and the policy state them, in scalars
and loops, and share no code with the program. A difference names its seed: `thrown(seed)` gives the episode back.
"""

from __future__ import annotations

import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from core.judgement.response_shapes import JudgedGas, ResponseFigure
from core.judgement.shapes import EpisodeFigures, GasFigure
from tests.support import plain_due, plain_scores
from tests.support.plain_record import Gas, Log
from tests.support.plain_rules import Judged, Response, responses, since_start
from tests.support.random_rows import entries_of, figures_of, minute_of, thrown

SEEDS = st.integers(0, 10**9)
CLOSE = 1e-6


def both(seed: int) -> tuple[Log, EpisodeFigures]:
    rows, as_of = thrown(seed)
    return Log(rows, as_of), figures_of(entries_of(rows), as_of)


def near(value: float | None) -> object:
    return None if value is None else pytest.approx(value, abs=CLOSE)


def check_gas(plain: Gas, gas: GasFigure) -> None:
    assert (minute_of(gas.at), gas.site, gas.off_support) == (plain.at, plain.site, plain.off)
    assert (gas.state, gas.hypercapnic, gas.consistent) == (plain.state, plain.hypercapnic, plain.consistent)
    assert gas.hco3_calculated_mmol_L == near(plain.bicarbonate)
    assert gas.sbe_mmol_L == near(plain.sbe)
    assert (gas.fio2, gas.pf_mmHg) == (near(plain.fio2), near(plain.pf))
    assert gas.aa_gradient_mmHg == near(plain.gradient)


@settings(max_examples=40, deadline=None)
@given(SEEDS)
def test_gases_and_support(seed: int) -> None:
    log, figures = both(seed)
    assert len(figures.gases) == len(log.gases)
    for plain, gas in zip(log.gases, figures.gases, strict=True):
        check_gas(plain, gas)
    support = figures.support
    assert minute_of(support.since) == (log.start if log.start_seen else None)
    assert minute_of(support.ended_at) == log.end
    if log.start_seen:
        assert support.hours_on_mask == near(log.hours_on_mask())
        assert support.hours_on_mask_last_24h == near(log.hours_on_mask(log.as_of - 24 * 60))


def check_judged(plain: Judged, gas: JudgedGas, site: str) -> None:
    assert (minute_of(gas.at), gas.minutes, gas.timing) == (plain.at, plain.minutes, plain.timing)
    assert gas.attributable is plain.attributable
    if site != "venous":  # shown against venous ones alone
        assert (gas.co2_arm, gas.oxygen_arm, gas.verdict) == (plain.co2, plain.oxygen, plain.verdict)
    else:
        assert gas.verdict is None


def check_response(log: Log, plain: Response, found: ResponseFigure) -> None:
    anchor, base = plain.anchor, plain.base
    assert (found.anchor, minute_of(found.first_at), minute_of(found.anchor_at)) == (
        anchor.kind,
        anchor.first,
        anchor.at,
    )
    assert set(found.effects) == anchor.effects
    assert minute_of(found.baseline_at) == (None if base is None else base.at)
    assert found.baseline_early is plain.base_early
    assert found.co2_arm_active is (base is not None and base.acutely_hypercapnic)
    assert found.oxygen_arm_active is (base is not None and base.hypoxaemic)
    sites = {g.at: g.site for g in log.gases}
    assert len(found.gases) == len(plain.gases)
    for judged, gas in zip(plain.gases, found.gases, strict=True):
        check_judged(judged, gas, sites[judged.at])
    assert (found.headline, minute_of(found.headline_gas_at)) == (plain.headline, plain.headline_at)


@settings(max_examples=80, deadline=None)
@given(SEEDS)
def test_anchors_baselines_verdicts_and_headlines(seed: int) -> None:
    log, figures = both(seed)
    acting = [r for r in figures.responses if r.effects]
    plain = responses(log)
    assert len(acting) == len(plain)
    for one, found in zip(plain, acting, strict=True):
        check_response(log, one, found)


@settings(max_examples=40, deadline=None)
@given(SEEDS)
def test_every_gas_against_the_start(seed: int) -> None:
    log, figures = both(seed)
    found = {minute_of(g.at): g.since_start for r in figures.responses for g in r.gases}
    for plain in since_start(log):
        if plain.at in found:  # one that no anchor lists is shown nowhere
            assert (found[plain.at].verdict, found[plain.at].gain_lost) == (plain.verdict, plain.lost)


@settings(max_examples=40, deadline=None)
@given(SEEDS)
def test_scores_and_ratios(seed: int) -> None:
    log, figures = both(seed)
    for name, plain in (("hacor", plain_scores.hacor(log)), ("news2", plain_scores.news2(log))):
        found = figures.scores[name]
        if plain is None:
            assert found.points is None
            continue
        assert (minute_of(found.at), set(found.missing)) == (plain.at, plain.missing)
        assert (found.points, found.lowest, found.highest) == (plain.points, plain.lowest, plain.highest)
    for ratio, by_rule in (("pf", plain_scores.pf), ("sf", plain_scores.sf), ("rox", plain_scores.rox)):
        assert getattr(figures, ratio).latest == near(by_rule(log).latest)


@settings(max_examples=50, deadline=None)
@given(SEEDS)
def test_the_gas_that_is_due(seed: int) -> None:
    log, figures = both(seed)
    plain = plain_due.gas_due(log)
    found = [d for d in figures.due if d.what == "gas" and d.state != "done"]
    repeats = [d for d in figures.due if d.what == "repeat_gas" and d.state != "done"]
    if plain is not None and not found:
        until = minute_of(repeats[0].due_until)  # one gas serves both: the earlier is asked for
        assert until is not None
        assert until <= plain.until
        return
    told = [(minute_of(d.due_from), minute_of(d.due_until), d.state) for d in found]
    assert told == ([] if plain is None else [(plain.since, plain.until, plain.state)])
