"""The figures as plain text: every group, each value with its age, each doubt marked, each gap with its reason."""

import pytest

from app.figures.groups import EXPECTED, figure_groups
from app.figures.plain import episode_text
from app.words import Reader
from core.judgement.shapes import EpisodeFigures
from tests.support.sample_ward import sample_ward

ZONE = "Europe/London"


@pytest.mark.parametrize("unit", ["mmHg", "kPa"])
def test_every_figure_stands_in_the_text(unit):
    reader = Reader(ZONE, unit)
    for f in sample_ward():
        text = episode_text(f, reader)
        for group in (g for g in figure_groups(f, reader) if g.key != EXPECTED):
            assert f"Figures: {group.title.lower()}" in text
            for row in group.rows:
                assert (f"{row.name}: {row.value}" if row.is_known else row.name) in text
                assert row.doubt in text


def test_the_unit_is_the_readers():
    f = sample_ward()[0]
    assert "A-a gradient, simple form: 62 mmHg (28-Mar-2026 04:18, 1 h 12 min ago)" in episode_text(f, Reader(ZONE))
    assert "A-a gradient, simple form: 8.2 kPa" in episode_text(f, Reader(ZONE, "kPa"))


def test_doubts_and_gaps_are_said():
    text = episode_text(sample_ward()[0], Reader(ZONE))
    assert "    ! Tidal volume doubtful: leak over 30 L/min" in text
    assert "No value (holds on room air only): A-a gradient expected for age" in text
    assert "COPD failure chart: risk class: between no axis adverse and the worst corner (missing: APACHE II)" in text


def test_nothing_expected_or_interpolated_is_in_text_that_people_paste():
    text = episode_text(sample_ward()[0], Reader(ZONE))
    assert "PaCO2 expected:" not in text
    assert "after it:" not in text


def test_what_nobody_logged_is_not_called_none():
    text = episode_text(EpisodeFigures("E", 1_774_670_400_000_000, label="Bed 9"), Reader(ZONE))
    found = dict(zip(text.splitlines(), text.splitlines()[1:], strict=False))
    assert found["Gases"] == found["Profile"] == "  none recorded"
    assert found["Flags"] == found["Due"] == "  none"


def test_a_star_in_the_text_has_its_meaning_at_the_end():
    starred = [episode_text(f, Reader(ZONE)) for f in sample_ward() if any(x.sure == "from memory" for x in f.flags)]
    assert starred
    assert all("*, since" in text for text in starred)
    assert all(text.splitlines()[-1].endswith("to be confirmed locally") for text in starred)


def test_what_never_was_acidotic_is_not_called_resolved():
    """Beside the newest gas too: its P/F first, where oxygen is what fails."""
    f = next(f for f in sample_ward() if f.label == "Bay A 1")
    text = episode_text(f, Reader(ZONE))
    assert "State: P/F 107 mmHg; not acidotic" in text.split("Figures: latest gas")[1]
    assert "resolved" not in text
