"""Preferences come back as kept; a broken or foreign file never keeps the window from opening."""

from contextlib import suppress

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.keeping.preferences import TEXT_SCALES, Preferences, from_toml, load, save, to_toml


def test_kept_and_loaded(tmp_path):
    path = tmp_path / "deep" / "preferences.toml"
    wanted = Preferences(
        theme="dark",
        text_scale=1.5,
        gas_unit="kPa",
        recent_stores=("a", "b"),
        window=(1, 2, 1280, 800),
        person="AB",
    )
    assert save(path, wanted)
    assert load(path) == wanted


def test_no_file_and_a_broken_file_give_the_usual_ones(tmp_path):
    assert load(tmp_path / "none.toml") == Preferences()
    broken = tmp_path / "broken.toml"
    broken.write_bytes(b"\xff\xfe = [")
    assert load(broken) == Preferences()


def test_a_folder_that_cannot_be_written_to_is_no_error(tmp_path):
    (tmp_path / "file").write_text("")
    assert not save(tmp_path / "file" / "preferences.toml", Preferences())


@pytest.mark.parametrize(
    "line",
    [
        'theme = "pink"',
        "text_scale = 0.5",
        'gas_unit = "psi"',
        "window = [1, 2]",
        'shift_starts = ["25:00"]',
        "cautions_seen = 3",
        'unknown = "x"',
        "recent_stores = [1]",
    ],
)
def test_values_of_a_wrong_kind_are_passed_over(line):
    assert from_toml(line) == Preferences()


@given(st.text(max_size=80))
def test_any_text_is_read_or_refused(text):
    with suppress(ValueError):
        from_toml(text)


def test_nothing_of_a_patient_is_among_them():
    assert set(Preferences.__slots__) == {
        "theme",
        "text_scale",
        "gas_unit",
        "paper",
        "shift_starts",
        "cautions_seen",
        "recent_stores",
        "window",
        "person",
        "lock_minutes",
        "hide_minutes",
        "backup_folder",
        "witness_file",
    }


def test_text_scale_steps_and_stops():
    p = Preferences()
    for _ in range(20):
        p = p.with_scale_step(1)
    assert p.text_scale == TEXT_SCALES[-1] == 2.0
    assert p.with_scale_step(-99).text_scale == 1.0
    assert from_toml(to_toml(p)) == p


def test_the_newest_store_comes_first_and_once():
    p = Preferences().with_store("a").with_store("b").with_store("a")
    assert p.recent_stores == ("a", "b")
