"""Panels: every change makes a whole set; a refused one names what is accepted; kept sets come back unchanged."""

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.episode.feed import shipped_titles
from app.episode.panels import (
    MOST_PANELS,
    Panel,
    PanelSet,
    can_be_drawn,
    drawable,
    family_of,
    from_json,
    from_toml,
    shipped,
    to_json,
    to_toml,
    units_of,
)
from core.record.message import RecordError

TITLES = shipped_titles()


def the_set():
    return shipped("usual", TITLES)


def key_of(error):
    return error.value.message.key


@pytest.mark.parametrize("family", ["usual", "hypoxaemic"])
def test_shipped_panels_hold_channels_of_one_or_two_units(family):
    made = shipped(family, TITLES)
    for panel in made.panels:
        assert 1 <= len(units_of(panel.channels)) <= 2
        assert all(can_be_drawn(c) for c in panel.channels)


def test_the_indication_chooses_the_family():
    assert family_of("pneumonia") == "hypoxaemic"
    assert family_of("copd") == "usual"
    assert family_of(None) == "usual"


def test_profile_facts_and_words_cannot_be_drawn():
    assert not can_be_drawn("age")
    assert not can_be_drawn("note")
    assert "spo2" in drawable()
    assert "pf" in drawable()


def test_added_changed_moved_duplicated_removed():
    made = the_set().added("Circulation", ("hr",))
    new = made.panels[-1].key
    made = made.changed(new, channels=("hr", "sbp"), low=40.0, high=140.0)
    assert made.get(new).channels == ("hr", "sbp")
    made = made.moved(new, -99)
    assert made.panels[0].key == new
    made = made.duplicated(new, "Circulation, copy")
    assert [p.title for p in made.panels[:2]] == ["Circulation", "Circulation, copy"]
    assert made.panels[1].key != new
    made = made.removed(new)
    assert made.index(made.panels[0].key) == 0
    with pytest.raises(RecordError) as error:
        made.get(new)
    assert key_of(error) == "panel.unknown"


@pytest.mark.parametrize(
    ("values", "key"),
    [
        ({"title": "  "}, "panel.no_name"),
        ({"channels": ()}, "panel.empty"),
        ({"channels": ("note",)}, "panel.channel_unknown"),
        ({"channels": ("ph", "spo2", "leak")}, "panel.too_many_units"),
        (
            {"channels": ("ipap", "epap", "cpap", "pip", "pressure_support", "rate_set")},
            "panel.too_many_channels",
        ),
        ({"low": 10.0, "high": 5.0}, "panel.axis_upside_down"),
    ],
)
def test_a_refused_change_leaves_the_set_as_it_was(values, key):
    before = the_set()
    with pytest.raises(RecordError) as error:
        before.changed("gas", **values)
    assert key_of(error) == key
    assert before == the_set()


def test_the_last_panel_stays_and_a_dozen_is_enough():
    one = PanelSet((Panel("a", "A", ("ph",)),))
    with pytest.raises(RecordError) as error:
        one.removed("a")
    assert key_of(error) == "panel.last"
    full = one
    while len(full.panels) < MOST_PANELS:
        full = full.added("B", ("rr",))
    with pytest.raises(RecordError) as error:
        full.added("C", ("rr",))
    assert key_of(error) == "panel.too_many"


names = st.text(st.characters(codec="utf-8", exclude_categories=("Cs", "Cc")), min_size=1, max_size=20).filter(
    str.strip
)
panels = st.builds(
    Panel,
    key=st.uuids().map(str),
    title=names.map(str.strip),
    channels=st.sampled_from([("ph",), ("spo2", "rr"), ("leak",)]),
    height=st.floats(0.5, 3.0),
    low=st.none() | st.floats(0, 5),
    high=st.none() | st.floats(6, 90),
    bands=st.booleans(),
    second_low=st.none() | st.floats(0, 5),
    second_high=st.none() | st.floats(6, 90),
)


@given(st.lists(panels, min_size=1, max_size=6).map(lambda p: PanelSet(tuple(p))))
def test_a_kept_set_comes_back_unchanged(made):
    assert from_json(to_json(made)) == made
    assert from_toml(to_toml(made)) == made


@pytest.mark.parametrize(
    ("text", "key"),
    [
        ("not json", "panel.unreadable"),
        ("[]", "panel.unreadable"),
        ('{"format": 99, "panels": []}', "panel.format_newer"),
        ('{"format": 1, "panels": []}', "panel.last"),
        (
            '{"format": 2, "panels": [{"key": "a", "title": "A", "channels": ["ph"], "low": NaN}]}',
            "panel.axis_unreadable",
        ),
        (
            '{"format": 2, "panels": [{"key": "a", "title": "A", "channels": ["ph"], "second_high": Infinity}]}',
            "panel.axis_unreadable",
        ),
        (
            '{"format": 1, "panels": [{"key": "a", "title": "A", "channels": ["ph"], "colour": 3}]}',
            "panel.unreadable",
        ),
        ('{"format": 1, "panels": [{"key": "a", "title": "A", "channels": ["x"]}]}', "panel.channel_unknown"),
    ],
)
def test_a_set_that_cannot_be_read_is_refused_in_words(text, key):
    with pytest.raises(RecordError) as error:
        from_json(text)
    assert key_of(error) == key


def test_a_set_of_the_first_format_is_still_read():
    text = '{"format": 1, "panels": [{"key": "a", "title": "A", "channels": ["ph"], "low": 7.0, "high": 7.6}]}'
    assert from_json(text).panels == (Panel("a", "A", ("ph",), low=7.0, high=7.6),)
