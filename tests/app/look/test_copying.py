"""Every table of the window can be copied, by the key and by its menu, with its headings."""

import ast
from pathlib import Path

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication, QTableWidget, QTableWidgetItem, QTreeWidget, QTreeWidgetItem

from app.look.copying import TableCopy, can_be_copied

APP = Path(__file__).parents[3] / "app"
LISTS = {"action_finder.py"}
"""Lists to choose from, in the shape of a tree: no table."""


def table(qtbot):
    made = QTableWidget(3, 2)
    made.setHorizontalHeaderLabels(["When", "Value"])
    for r in range(3):
        made.setItem(r, 0, QTableWidgetItem(f"0{r}:00"))
        made.setItem(r, 1, QTableWidgetItem(f"line\tone\n{r}"))
    made.setSelectionBehavior(QTableWidget.SelectionBehavior.SelectRows)
    can_be_copied(made)
    qtbot.addWidget(made)
    made.show()
    return made


def test_all_rows_where_one_or_none_is_chosen_else_the_chosen(qtbot):
    made = table(qtbot)
    made.selectRow(1)
    qtbot.waitUntil(made.isActiveWindow)
    made.setFocus()
    qtbot.keyClick(made, Qt.Key.Key_C, Qt.KeyboardModifier.ControlModifier)
    assert QApplication.clipboard().text().splitlines() == [
        "When\tValue", "00:00\tline one 0", "01:00\tline one 1", "02:00\tline one 2",
    ]  # fmt: skip
    made.setRangeSelected(made.selectedRanges()[0], False)
    for r in (0, 2):
        made.selectionModel().select(
            made.model().index(r, 0),
            made.selectionModel().SelectionFlag.Select | made.selectionModel().SelectionFlag.Rows,
        )
    made.actions()[0].trigger()
    assert QApplication.clipboard().text().splitlines()[1:] == ["00:00\tline one 0", "02:00\tline one 2"]


def test_a_tree_is_copied_with_its_branches(qtbot):
    tree = QTreeWidget()
    tree.setHeaderLabels(["Rule", "Limit"])
    top = QTreeWidgetItem(["State", ""])
    top.addChild(QTreeWidgetItem(["severe below", "7.25"]))
    tree.addTopLevelItem(top)
    qtbot.addWidget(tree)
    assert TableCopy(tree).text().splitlines() == ["Rule\tLimit", "State\t", "severe below\t7.25"]


def test_no_module_makes_a_table_that_cannot_be_copied():
    without = []
    for path in APP.rglob("*.py"):
        tree = ast.parse(path.read_text("utf-8"))
        calls = {
            getattr(n.func, "id", getattr(n.func, "attr", "")) for n in ast.walk(tree) if isinstance(n, ast.Call)
        }
        bases = {getattr(b, "id", "") for n in ast.walk(tree) if isinstance(n, ast.ClassDef) for b in n.bases}
        tables = {"QTableWidget", "QTreeWidget", "QTableView", "QTreeView"}
        if (tables & (calls | bases)) and not {"can_be_copied", "TableCopy"} & calls and path.name not in LISTS:
            without.append(path.name)
    assert without == []
