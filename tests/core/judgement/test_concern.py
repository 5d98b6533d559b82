"""Whom to see first: rank by what is open, order by the state of the last gas; comfort lowers, nothing hides."""

import pytest

from core.judgement.concern import concern
from core.judgement.due import due_items
from core.judgement.flags import evaluate
from tests.support.flag_cases import BEFORE, COPD, START, ctx

BASE = COPD + BEFORE + START


WELL = COPD + BEFORE.replace("ph 7.28 paco2 70", "ph 7.36 paco2 52") + START


def ranked(log, as_of):
    context = ctx(log, as_of)
    flags = evaluate(context)
    return concern(context, flags, due_items(context, flags))


@pytest.mark.parametrize(
    ("log", "as_of", "rank", "key"),
    [
        (BASE + "02:00 ph 7.24 paco2 76", "02:10", 0, "concern.flag"),
        (BASE + "02:00 ph 7.28 paco2 68", "02:10", 1, "concern.flag"),
        (BASE + "01:20 rr 24\n02:00 ph 7.36 paco2 52", "01:10", 2, "concern.state"),
        (BASE + "01:20 rr 24", "02:50", 2, "concern.state"),
        (WELL + "01:20 rr 24", "01:10", 5, None),
        (WELL + "01:20 rr 24", "02:50", 4, "concern.due_soon"),
        (BASE, "02:10", 2, "concern.overdue"),  # nobody has looked since the start
        (BASE + "02:00 stopped", "03:00", 6, "concern.ended"),
        (BASE + "02:00 ph 7.24 paco2 76\n02:05 stopped", "03:00", 6, "concern.ended"),  # it was so before the end
        (BASE + "02:00 stopped\n02:30 ph 7.24 paco2 76", "03:00", 1, "concern.flag"),
        (BASE + "02:00 stopped\n02:30 ph 7.24 paco2 76\n02:50 ph 7.36 paco2 52", "03:00", 6, "concern.ended"),
        (BASE + "02:00 intubated\n02:30 ph 7.24 paco2 76", "03:00", 6, "concern.ended"),
        (BASE + "02:00 rr 22\n02:00 ph 7.36 paco2 52 pao2 58 site arterial", "02:10", 3, "concern.flag"),
    ],
)
def test_rank_and_why(log, as_of, rank, key):
    found = ranked(log, as_of)
    assert (found.rank, found.why.key if found.why else None) == (rank, key)


def test_an_overdue_gas_is_a_concern_of_its_own():
    found = ranked(BASE + "01:20 rr 24", "03:10")
    assert (found.rank, found.why.values["marker"]) == (1, "gas_overdue")


def test_a_skin_check_alone_brings_nobody_to_the_top():
    log = BASE + "02:00 ph 7.36 paco2 52 rr 22\n04:40 rr 20"
    assert ranked(log, "05:30").rank == 3


def test_severe_before_acidotic_before_resolved():
    severe = ranked(BASE + "02:00 ph 7.24 paco2 76", "02:10")
    twice = ranked(BASE + "02:00 ph 7.22 paco2 76\n04:00 ph 7.25 paco2 76", "04:10")
    assert severe.rank == twice.rank == 0
    assert severe.order < twice.order


def test_comfort_lowers_the_rank_and_says_the_same():
    log = BASE + "02:00 ph 7.24 paco2 76"
    plain, comfort = ranked(log, "02:10"), ranked(log + "\n02:05 ceiling_of_care comfort", "02:10")
    assert comfort.rank > plain.rank
    assert comfort.why.values["marker"] == plain.why.values["marker"]


def test_why_counts_the_other_groups_of_open_flags():
    context = ctx(BASE + "02:00 ph 7.24 paco2 76", "02:10")
    flags = evaluate(context)
    why = concern(context, flags, ()).why
    assert why.values["more"] == sum(f.ended_at is None and f.strongest for f in flags) - 1
    assert why.values["more"] < sum(f.ended_at is None for f in flags) - 1
    assert (why.values["tier"], why.values["state"]) == ("escalate", "severe")


def test_a_new_acidosis_without_a_mask_stands_above_what_is_resolved():
    """A patient just begun: nothing is due and no flag is open, the patient is acidotic and nothing treats it."""
    untreated = ranked(
        "02:00 ph 7.25 paco2 75 pao2 60 gas_fio2 0.35 site arterial ceiling_of_care full indication copd\n"
        "02:01 mode BPAP-ST rr 30\n02:02 mask_off",
        "02:05",
    )
    assert (untreated.rank, untreated.why.key) == (2, "concern.state")
    assert untreated.why.values["support"] == "not on support"
    resolved = ranked(WELL + "02:00 rr 22\n02:00 ph 7.38 paco2 52 pao2 58 site arterial", "02:10")  # a remark
    overdue = ranked(WELL, "02:10")
    on_support = ranked(BASE + "01:20 rr 24", "01:30")
    places = [(c.rank, c.order) for c in (untreated, on_support, overdue, resolved)]
    assert places == sorted(places)


def test_severe_stands_with_the_concerns_though_its_flags_are_settled():
    log = COPD + BEFORE.replace("7.28", "7.20") + START
    context = ctx(log, "01:10")
    found = concern(context, (), ())
    assert (found.rank, found.why.values["state"]) == (1, "severe")
    acidotic = concern(ctx(BASE, "01:10"), (), ())
    assert (found.rank, found.order) < (acidotic.rank, acidotic.order)
