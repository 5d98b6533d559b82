"""What is proposed for a table whose columns nobody has named yet."""

from pathlib import Path

import pytest

from storage.intake.proposals import propose, unit_of
from storage.intake.table import open_table

HEAD = "Zeit;Spitze (mbar);MinVol (l/min);Vte (ml)\n"


def table(path: Path, cells: str) -> Path:
    path.write_text(HEAD + "".join(f"27.03.2026 21:{m:02d};{cells}\n" for m in range(10, 40)))
    return path


@pytest.mark.parametrize(("cells", "mark"), [
    ("18,5;11,5;480", ","), ("18.5;11.5;480", "."), ("18;11;480", "."), ("18,5;11.5;480", ""),
])  # fmt: skip
def test_columns_that_are_still_to_be_named_show_the_decimal_mark(tmp_path: Path, cells: str, mark: str) -> None:
    mapping = propose(open_table(table(tmp_path / "a.csv", cells)), "UTC").mapping
    assert [c.channel for c in mapping.columns] == ["", "", "", "vte"], "two names say nothing to the program"
    assert mapping.decimal == mark


def test_columns_that_are_named_settle_the_mark_whatever_others_hold(tmp_path: Path) -> None:
    path = tmp_path / "a.csv"
    path.write_text("Time;Leak (L/min);Serial\n2026-03-27 21:00;11.5;1,5\n2026-03-27 21:01;12.5;1,5\n")
    assert propose(open_table(path), "UTC").mapping.decimal == "."


@pytest.mark.parametrize(("channel", "column", "values", "unit"), [
    ("pip", "Spitze (mbar)", ["18"], "hPa"), ("pip", "Spitze", ["18"], ""), ("mv", "MinVol (l/min)", ["8"], "L/min"),
    ("mv", "MinVol [mL/min]", ["8000"], "mL/min"), ("paco2", "Gas 2", ["6.1"], ""),
    ("paco2", "Gas 2 (kPa)", [], "kPa"),
    ("fio2", "O2", ["40", "45"], "%"), ("fio2", "O2", ["0.4"], "fraction"), ("rr", "AF", ["18"], "/min"),
])  # fmt: skip
def test_the_unit_of_a_column_by_its_name_or_its_values(
    channel: str, column: str, values: list[str], unit: str
) -> None:
    assert unit_of(channel, column, values) == unit
