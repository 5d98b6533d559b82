"""With text twice as large in a window of 1280 x 800 every dialog stays inside it, and nothing is cut sideways."""

import pytest
from PySide6.QtWidgets import QAbstractButton, QApplication, QDialog, QLabel, QScrollArea

from app.keeping.preferences import Preferences
from app.look.fitted import MARGIN
from tests.support.open_window import make_store, open_window, settled

DIALOGS = (
    "new_episode", "settings_form", "gas_form", "vitals_form", "facts_form", "end_episode", "correct", "settle_flag",
    "close_due", "table", "panels", "policy", "help", "about", "report_problem", "export_values", "taken",
    "closed_handovers", "close_handover",
)  # fmt: skip


@pytest.fixture
def window(qtbot, tmp_path):
    preferences = Preferences(text_scale=2.0, cautions_seen=True)
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark"), preferences=preferences) as made:
        made.resize(1280, 800)
        made.select("bed-7")
        settled(qtbot, made)
        yield made


@pytest.mark.parametrize("key", DIALOGS)
def test_it_stays_inside_its_window_and_rolls_up_and_down_alone(qtbot, window, key):
    window.actions_by_key[key].trigger()
    settled(qtbot, window)
    qtbot.wait(20)
    dialog = QApplication.activeModalWidget() or next(d for d in window.findChildren(QDialog) if d.isVisible())
    assert dialog.width() <= 1280 - MARGIN
    assert dialog.height() <= 800 - MARGIN
    for roll in dialog.findChildren(QScrollArea):
        if roll.isVisible():
            assert roll.horizontalScrollBar().maximum() == 0
            assert roll.widget().width() <= roll.viewport().width()
    cut = [w for w in (*dialog.findChildren(QAbstractButton), *dialog.findChildren(QLabel)) if is_cut(w, dialog)]
    assert [w.text() for w in cut] == []
    dialog.reject()


def is_cut(widget, dialog):
    """Cut at a side; what lies below the edge of a roll can be rolled to."""
    if not widget.isVisible() or not widget.text():
        return False
    left, right = widget.mapTo(dialog, widget.rect().topLeft()), widget.mapTo(dialog, widget.rect().topRight())
    if left.x() < 0 or right.x() > dialog.width():
        return True
    if isinstance(widget, QAbstractButton):
        return widget.width() < widget.minimumSizeHint().width()
    return widget.wordWrap() and widget.height() < widget.heightForWidth(widget.width()) - 2
