"""Whatever moves with the clock is noted when it is read, also where it was read on the way to something else."""

from dataclasses import fields, replace

import pytest

from core.figures.episode_figures import judged
from core.figures.stage_cache import StageCache
from core.judgement.context import Context
from core.judgement.markers.observed import Observed
from core.judgement.policy import shipped_policy
from core.judgement.watched_context import MOVING, stands_with, watched
from core.record.instant import SECOND
from tests.support.flag_cases import ctx
from tests.support.long_episode import END, long_episode

LOG = "00:45 ph 7.24 paco2 78 pao2 55 site arterial\n01:00 mode bpap-st ipap 14 epap 5 fio2 28"
STANDING = [f.name for f in fields(Context) if f.name not in MOVING]


@pytest.fixture
def seen() -> Observed:
    return Observed(ctx(LOG, "02:00"))


@pytest.mark.parametrize("name", MOVING)
def test_reading_what_moves_is_noted(name):
    plain = ctx(LOG, "02:00")
    found = watched(plain)
    assert getattr(found, name) is getattr(plain, name)
    assert found.moved


@pytest.mark.parametrize("name", STANDING)
def test_reading_what_stands_is_not(name):
    found = watched(ctx(LOG, "02:00"))
    getattr(found, name)
    assert not found.moved


def test_nothing_else_is_made_anew_from_one_moment_to_the_next():
    record, kept, policy = long_episode(6), StageCache(), shipped_policy()
    one, other = (judged(record, END + n * SECOND, policy, kept) for n in (0, 1))
    assert {f.name for f in fields(Context) if getattr(one, f.name) is not getattr(other, f.name)} <= set(MOVING)
    assert stands_with(other, one)
    assert not stands_with(other, replace(one, gases=one.gases[:1]))


def test_what_rests_on_a_moving_finding_moves_too(seen):
    def clock(s):
        return s.as_of

    assert seen.once(clock) == seen.as_of
    assert seen.once(lambda s: s.once(clock) + 1, "second") == seen.as_of + 1
    assert seen.has_moved("second")
    assert seen.once(lambda s: len(s.gases), "third") == 1
    assert not seen.has_moved("third")


def test_a_later_moment_takes_over_what_stands_and_nothing_else():
    given = ctx(LOG, "02:00")
    seen = Observed(given)
    seen.once(lambda s: s.as_of, "moving")
    seen.once(lambda s: len(s.gases), "standing")
    later = seen.later(replace(given, as_of=given.as_of + SECOND))
    assert later.once(lambda _: "anew", "standing") == 1
    assert later.once(lambda _: "anew", "moving") == "anew"


def test_of_another_record_nothing_is_taken_over(seen):
    seen.once(lambda s: len(s.gases), "standing")
    assert seen.later(ctx(LOG, "02:00")).once(lambda _: "anew", "standing") == "anew"
