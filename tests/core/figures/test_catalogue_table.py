"""The table of figures in DEVELOPERS.md is the one that the catalogue makes."""

from pathlib import Path

import pytest

from core.figures.catalogue import CATALOGUE
from core.figures.catalogue_table import BEGIN, END, replaced, table

DEVELOPERS = Path(__file__).parents[3] / "DEVELOPERS.md"


def test_the_table_lists_every_figure() -> None:
    made = table()
    assert all(f"(`{key}`)" in made for key in CATALOGUE)
    rows = [line for line in made.splitlines() if line.startswith("| ")]
    assert {row.replace("\\|", "").count("|") for row in rows} == {9}


def test_replacing_twice_changes_nothing_more() -> None:
    once = replaced(f"# Title\n\n{BEGIN}\nold\n{END}\n\nafter\n")
    assert replaced(once) == once
    assert once.startswith("# Title\n\n")
    assert once.endswith(f"{END}\n\nafter\n")


@pytest.mark.parametrize("document", ["", BEGIN, f"{END}{BEGIN}", f"{BEGIN}{END}{BEGIN}"])
def test_a_document_without_markers_is_refused(document: str) -> None:
    with pytest.raises(ValueError, match="figures:begin"):
        replaced(document)


def test_developers_page_is_up_to_date() -> None:
    """Refresh it with `python -m core.figures.catalogue_table`, pasted between the markers."""
    if not DEVELOPERS.exists() or BEGIN not in DEVELOPERS.read_text(encoding="utf-8"):
        pytest.skip("DEVELOPERS.md has no table of figures yet")
    page = DEVELOPERS.read_text(encoding="utf-8")
    assert replaced(page) == page, "the table of figures is stale"
