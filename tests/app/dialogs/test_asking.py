"""A small form on its way in and out."""

import shiboken6
from PySide6.QtWidgets import QApplication

from app.dialogs.asking import AskingDialog
from app.look.theme import THEMES


def test_a_form_that_is_thrown_away_at_once_is_not_asked_for_its_height_any_more(qtbot):
    """It grows once more when the event loop comes round; by then a store may have been closed, and it with it."""
    dialog = AskingDialog("Change person", "Log", THEMES["light"])
    dialog.show()
    shiboken6.delete(dialog)
    QApplication.processEvents()  # what is raised in a slot fails the test
