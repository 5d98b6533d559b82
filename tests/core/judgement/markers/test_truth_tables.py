"""Every marker by one table: met, then not met at its edge, with an input missing, with one too old, and in another
population. The tests beside this one hold each marker's finer edges and its sources."""

import pytest

from core.judgement.flags import evaluate
from core.judgement.markers.registry import MARKERS
from core.judgement.policy import read_policy, shipped_policy, shipped_text
from tests.support.flag_cases import ctx, flags, met
from tests.support.log_cases import at
from tests.support.truth_table import ROWS

POLICY = shipped_policy()
ON = read_policy(shipped_text().replace("hacor_updated = false", "hacor_updated = true"))
"""Updated HACOR is shipped switched off: a ward switches it on."""
BY_CLOCK = {"gas_overdue": "03:00", "skin_check_overdue": "05:00"}
"""Markers that time alone brings, with the last moment at which they are not met."""


def said(marker, log, as_of=None):
    return met(marker, log, as_of or ROWS[marker].as_of, ON if marker.startswith("hacor_updated") else None)


def changed(marker, change):
    log, (old, new) = ROWS[marker].log, change
    assert old in log, (marker, old)
    return log.replace(old, new)


def test_every_marker_has_a_row_and_names_its_source():
    assert set(ROWS) == set(MARKERS)
    assert all(POLICY.markers[k].source.strip() and POLICY.markers[k].sure for k in MARKERS)


@pytest.mark.parametrize("marker", sorted(ROWS))
def test_met(marker):
    assert said(marker, ROWS[marker].log) != ""


@pytest.mark.parametrize("marker", sorted(set(ROWS) - set(BY_CLOCK)))
def test_not_met_at_its_edge(marker):
    assert said(marker, changed(marker, ROWS[marker].edge)) == ""


@pytest.mark.parametrize(("marker", "last"), sorted(BY_CLOCK.items()))
def test_what_time_brings_is_not_met_at_the_last_minute(marker, last):
    assert said(marker, ROWS[marker].log, last) == ""


@pytest.mark.parametrize("marker", sorted(ROWS))
def test_silent_where_an_input_is_missing(marker):
    assert said(marker, changed(marker, ROWS[marker].missing)) == ""


@pytest.mark.parametrize("marker", sorted(k for k, r in ROWS.items() if r.stale))
def test_silent_where_an_input_is_too_old(marker):
    assert said(marker, changed(marker, ROWS[marker].stale)) == ""


@pytest.mark.parametrize("marker", sorted(k for k, r in ROWS.items() if r.outside))
def test_silent_in_another_population(marker):
    assert said(marker, changed(marker, ROWS[marker].outside)) == ""


def test_every_population_is_left_by_its_row():
    """A marker for some has a row outside; one for everyone has none. What is only a remark outside is told so."""
    for key, row in ROWS.items():
        rule = POLICY.markers[key]
        if rule.population == "any" or rule.outside == "remark":
            continue
        assert row.outside is not None, key


@pytest.mark.parametrize("marker", sorted(ROWS))
def test_an_open_flag_that_nothing_new_bears_says_so(marker):
    """Days later without news: the flag has ended, or says that what it rests on is old."""
    row = ROWS[marker]
    late = "d9 00:00"
    found = [f for f in flags(row.log, late) if f.marker == marker and f.ended_at is None]
    timed = {"evidence.overdue"}
    for flag in found:
        keys = {m.key for m in flag.evidence}
        instants = [v for m in flag.evidence for k, v in m.values.items() if k in ("at", "second_at") and v]
        if not instants or keys & timed:
            continue
        assert max(instants) < at(late) - POLICY.markers[marker].stale_min * 60_000_000
        assert "evidence.stale" in keys


@pytest.mark.parametrize("marker", sorted(ROWS))
def test_switched_off_it_is_silent(marker):
    text = shipped_text().replace(f"[markers.{marker}]\n", f"[markers.{marker}]\non = false\n")
    assert marker not in {f.marker for f in evaluate(ctx(ROWS[marker].log, ROWS[marker].as_of, read_policy(text)))}
