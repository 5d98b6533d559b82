"""One caution everywhere: the window, the command line and every printed sheet say the same, and nothing less."""

import pytest
from PySide6.QtWidgets import QLabel

from app.cli import parser
from app.sheet.shapes import SheetContent
from app.telling.caution_texts import CAUTION, CAUTIONS, IN_SIGHT, REGULATION
from app.telling.cautions import caution_in_sight, cautions
from tests.support.open_window import make_store, open_window, settled


@pytest.mark.parametrize(
    "said",
    [
        "never replaces clinical judgement", "a qualified person decides", "no alarm and no monitor",
        "knows only what was logged", "Local policy", "from memory", "common practice", "confirmed locally",
    ],
)  # fmt: skip
def test_nothing_of_it_is_left_out(said):
    assert said in CAUTION


@pytest.mark.parametrize("page", ["ward", "episode", "map", "compare", "handover", "statistics"])
def test_no_page_of_the_window_is_without_it(qtbot, tmp_path, page):
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as window:
        settled(qtbot, window)
        window.show_page(page)
        settled(qtbot, window)
        said = window.findChild(QLabel, "caution")
        assert said.isVisible()
        assert said.text() == IN_SIGHT


def test_the_window_print_and_command_line_say_the_same():
    assert cautions() == (*CAUTIONS, REGULATION)
    assert " ".join(CAUTIONS) == CAUTION == SheetContent.__dataclass_fields__["caution"].default
    assert " ".join(CAUTION.split()) in " ".join(parser().format_help().split())
    assert caution_in_sight() == IN_SIGHT
