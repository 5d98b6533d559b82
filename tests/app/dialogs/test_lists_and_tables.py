"""The list of actions, charts as tables, help and About."""

import pytest
from PySide6.QtCore import Qt
from PySide6.QtWidgets import QApplication

from app.dialogs.action_finder import ActionFinder
from app.dialogs.table import TableDialog
from app.look.theme import LIGHT
from tests.support.open_window import dialog_of, settled


def test_the_list_of_actions_finds_and_does(qtbot, window):
    finder = ActionFinder(window.actions_by_key, LIGHT, window)
    qtbot.addWidget(finder)
    finder.show()
    qtbot.keyClicks(finder.search, "compare")
    qtbot.keyClick(finder.search, Qt.Key.Key_Return)
    assert finder.chosen is window.actions_by_key["show_compare"]


@pytest.mark.parametrize("page", ["ward", "episode", "compare"])
def test_every_chart_is_a_table_that_can_be_copied(qtbot, window, page):
    window.select("bed-7")
    window.show_page(page)
    settled(qtbot, window)
    window.actions_by_key["table"].trigger()
    dialog = dialog_of(window, TableDialog)
    assert dialog.table.rowCount() > 0
    dialog.copy.click()
    lines = QApplication.clipboard().text().splitlines()
    assert len(lines) == dialog.table.rowCount() + 1
    assert all(line.count("\t") == lines[0].count("\t") for line in lines)
    dialog.copy_words.click()
    assert "Bed 7" in QApplication.clipboard().text()
    dialog.close()


def test_help_and_about_open_and_close(qtbot, window):
    from app.window.about import AboutDialog
    from app.window.help_dialog import HelpDialog

    qtbot.keyClick(window, Qt.Key.Key_F1)
    dialog = dialog_of(window, HelpDialog)
    assert "16/6 35" in dialog.text.toPlainText()
    dialog.close()
    window.actions_by_key["about"].trigger()
    dialog_of(window, AboutDialog).close()
