"""Whose values are: chosen by what the ward calls an episode, never by guess between two of one name."""

import pytest
from PySide6.QtWidgets import QComboBox

from app.intake_window.episode_choices import choices, chosen_or_typed

LABELS = {"T-01": "Bed 21", "T-02": "Bed 2", "T-03": "Bed 7", "T-04": "Bed 7", "bed-9": "bed-9"}


@pytest.fixture
def box(qtbot):
    made = QComboBox()
    qtbot.addWidget(made)
    made.setEditable(True)
    for word, key in (("", ""), *choices(LABELS)):
        made.addItem(word, key)
    return made


def test_a_label_stands_with_its_key(box):
    assert [box.itemText(i) for i in range(box.count())] == [
        "", "Bed 21 (T-01)", "Bed 2 (T-02)", "Bed 7 (T-03)", "Bed 7 (T-04)", "bed-9"]  # fmt: skip


@pytest.mark.parametrize(("typed", "key"), [
    ("Bed 21 (T-01)", "T-01"), ("Bed 21", "T-01"), ("bed 2", "T-02"), ("t-02", "T-02"), ("Bed 7", ""),
    ("Bed 7 (T-04)", "T-04"), ("bed-9", "bed-9"), ("New bed", "New bed"), ("", ""), ("Bed", "Bed"),
])  # fmt: skip
def test_what_is_typed_means_one_episode_or_none(box, typed, key):
    box.setEditText(typed)
    assert chosen_or_typed(box) == key


def test_what_is_chosen_counts(box):
    box.setCurrentIndex(4)
    assert chosen_or_typed(box) == "T-04"
