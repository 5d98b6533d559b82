"""The sample night: escalation on every episode that fails and on no stable one. The truth is the simulation's, which
shares no code with the judgement."""

import json

import pytest

from core.judgement.flag_history import transitions
from core.judgement.markers.evidence import KEYS
from core.judgement.shapes import FlagFigure
from core.record.instant import HOUR, parse
from tests.support.night_check import END, night, said, truth

FAILING = sorted(k for k, e in truth().items() if e["failed"])
WELL = sorted(k for k, e in truth().items() if not e["failed"])


def escalated(key: str) -> list[FlagFigure]:
    """What the night would have escalated at any of its hours, ended flags included."""
    return [f for f in said(night()[key], END).flags if f.tier == "escalate"]


def test_the_night_holds_both():
    assert len(FAILING) == 2
    assert len(WELL) >= 7


@pytest.mark.parametrize("key", FAILING)
def test_those_that_fail_are_escalated(key):
    found = escalated(key)
    assert found, truth()[key]["finding"]
    assert any(f.ended_at is None for f in found)
    failed_at = parse(truth()[key]["failed_at"])
    assert min(f.since for f in found) - failed_at <= 2 * HOUR


@pytest.mark.parametrize("key", WELL)
def test_those_that_do_not_fail_are_not(key):
    assert [f.marker for f in escalated(key)] == [], truth()[key]["finding"]


@pytest.mark.parametrize("key", sorted(truth()))
def test_every_message_is_in_the_list_with_its_values(key):
    told = said(night()[key], END)
    messages = [m for f in told.flags for m in f.evidence] + [d.because for d in told.due]
    news = transitions(told.flags, (), key, told.ctx.policy.hash, END)
    assert {json.loads(n.raw)["flag_id"] for n in news} == {f.flag_id for f in told.flags}
    for message in messages:
        assert set(message.values) == set(KEYS[message.key]), message.key


def test_the_leak_and_the_overdue_gas_are_found():
    leak = next(k for k, e in truth().items() if e["kind"] == "large_leak")
    assert any(f.marker == "leak_over_limit" for f in said(night()[leak], END).flags)
    overdue = next(k for k, e in truth().items() if e["kind"] == "overdue_gas")
    assert any(f.marker == "gas_overdue" and f.ended_at is None for f in said(night()[overdue], END).flags)


@pytest.mark.parametrize("key", sorted(truth()))
def test_as_the_night_goes_on_no_flag_goes_in_silence(key):
    """Nothing is corrected here: what was flagged at any hour is still in the list at the end, with its beginning."""
    at_the_end = {(f.marker, f.since) for f in said(night()[key], END).flags}
    for hours in range(1, 10):
        then = said(night()[key], END - hours * HOUR).flags
        assert {(f.marker, f.since) for f in then} <= at_the_end
