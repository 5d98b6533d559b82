"""As known at T equals a record that never saw what was recorded after T: the figures, not only the values."""

from hypothesis import given, settings
from hypothesis import strategies as st

from core.figures.episode_figures import episode_figures
from core.judgement.policy import shipped_policy
from core.record.entries import Entry
from core.record.episode import build_episode
from core.record.hindsight import Later, hindsight
from core.record.knowledge import head_known_at, standing
from tests.support.recorded_night import KEYS, Deed, ledger, nights

POLICY = shipped_policy()


def known(entries: list[Entry], head: int | None, key: str):
    return build_episode(key, standing(entries, head))


@settings(max_examples=60, deadline=None)
@given(nights(), st.data())
def test_figures_as_known_at_a_moment_are_those_of_a_record_that_saw_nothing_after(deeds: list[Deed], data) -> None:
    entries = ledger(deeds)
    moment = data.draw(st.sampled_from([e.recorded_at for e in entries]))
    never_saw = [e for e in entries if e.recorded_at <= moment]
    head = head_known_at(entries, moment)
    for key in KEYS:
        looked_back, lived = known(entries, head, key), known(never_saw, None, key)
        assert looked_back.standing == lived.standing
        assert episode_figures(looked_back, moment, POLICY) == episode_figures(lived, moment, POLICY)


@settings(max_examples=60, deadline=None)
@given(nights(), st.data())
def test_hindsight_names_every_value_that_differs_and_no_other(deeds: list[Deed], data) -> None:
    entries = ledger(deeds)
    moment = data.draw(st.sampled_from([e.recorded_at for e in entries]))
    head = head_known_at(entries, moment)
    for key in KEYS:
        then = {s.entry.id for s in known(entries, head, key).standing if s.entry.at <= moment}
        now = {s.entry.id for s in known(entries, None, key).standing if s.entry.at <= moment}
        told = hindsight(entries, key, head, moment)
        assert then - now == {h.then.id for h in told if h.then is not None} & then
        assert now - then == {h.now.id for h in told if h.now is not None} & now
        assert all(h.known_at > moment for h in told)
        assert {h.what for h in told if h.then is None} <= {Later.RECORDED}
        assert {h.what for h in told if h.now is None} <= {Later.WITHDRAWN, Later.MOVED_AWAY}


@given(nights())
def test_nothing_came_later_than_the_newest(deeds: list[Deed]) -> None:
    entries = ledger(deeds)
    assert not any(hindsight(entries, key, entries[-1].seq, entries[-1].recorded_at) for key in KEYS)
