"""A marker reads the channels it declares and no other: a record that holds only those gives the same spells.

The replay and every cache rest on it."""

import pytest

from core.figures.episode_figures import judged
from core.judgement.flags import spells_of
from core.judgement.markers.observed import Observed
from core.judgement.markers.registry import MARKERS
from core.judgement.policy import shipped_policy
from core.record.channels import CHANNELS
from core.record.episode import Episode, build_episode
from tests.support.night_check import END, device_samples, night, truth

POLICY = shipped_policy()


def only(key: str, channels: frozenset[str]) -> Episode:
    """The episode with nothing but some channels."""
    kept = (s for s in night()[key].standing if s.entry.channel in channels)
    return build_episode(key, kept, [b for b in device_samples(key) if b.channel in channels])


def spans(episode: Episode, marker: str):
    seen = Observed(judged(episode, END, POLICY))
    return [(s.since, s.until) for s in spells_of(seen, MARKERS[marker], POLICY.markers[marker])]


@pytest.mark.parametrize("key", sorted(truth()))
def test_a_marker_needs_no_channel_that_it_does_not_declare(key):
    whole = Observed(judged(night()[key], END, POLICY))
    for name, marker in MARKERS.items():
        full = [(s.since, s.until) for s in spells_of(whole, marker, POLICY.markers[name])]
        if full:  # what is met must be met by what is declared
            assert spans(only(key, marker.channels), name) == full, name


def test_every_declared_channel_exists():
    assert {c for m in MARKERS.values() for c in m.channels} <= set(CHANNELS)
