"""The registry is whole: every channel can be validated, shown and typed."""

import pytest

from core.record.channels import CHANNELS, Group, Kind, channel
from core.record.message import RecordError


@pytest.mark.parametrize("c", CHANNELS.values(), ids=lambda c: c.key)
def test_each_channel_can_be_validated_and_shown(c):
    assert c.name
    if c.kind is Kind.NUMBER:
        assert c.units, "a number needs a unit"
        assert c.hard is not None, "a number needs hard limits"
        assert c.hard[0] < c.hard[1]
        if c.soft is not None:
            assert c.hard[0] <= c.soft[0] < c.soft[1] <= c.hard[1]
    else:
        assert not c.units
        assert c.hard is None
    if c.kind is Kind.CHOICE:
        assert c.choices
        assert len({x.casefold() for x in c.choices}) == len(c.choices)


def test_no_two_channels_answer_to_one_word():
    seen = {}
    for c in CHANNELS.values():
        for word in (c.key, *c.short):
            assert seen.setdefault(word, c.key) == c.key, word


def test_every_group_has_channels():
    assert {c.group for c in CHANNELS.values()} == set(Group)


def test_an_unknown_channel_names_its_neighbours():
    with pytest.raises(RecordError) as refused:
        channel("ipapp")
    assert refused.value.message.key == "channel.unknown"
    assert "ipap" in refused.value.message.values["accepted"]
