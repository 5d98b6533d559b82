"""Every dialog and page, control by control: each can be heard, shows the focus, and fits when text is large."""

import pkgutil
from importlib import import_module

import pytest
from PySide6.QtCore import QRect, Qt
from PySide6.QtWidgets import (
    QAbstractButton,
    QAbstractItemView,
    QAbstractScrollArea,
    QApplication,
    QComboBox,
    QDialog,
    QLabel,
    QLineEdit,
    QScrollArea,
    QWidget,
)

import app
from app.keeping.preferences import Preferences
from app.window.screen_dialogs import dialogs
from tests.app.test_accessible import PAGES, unspoken
from tests.support.open_window import make_store, open_window, settled

BASES = {"AskingDialog", "DraftedDialog", "FittedDialog", "SecretDialog", "FileWork", "PreviewedForm", "EntryForm"}
"""What dialogs are made from; none of them is shown by itself."""


def classes(base=QDialog):
    for module in pkgutil.walk_packages(app.__path__, "app."):
        if not module.name.startswith("app.commands"):
            import_module(module.name)
    found, left = set(), [base]
    while left:
        for child in left.pop().__subclasses__():
            left.append(child)
            if child.__module__.startswith("app."):
                found.add(child.__name__)
    return found


def opened(qtbot, tmp_path, scale=1.0):
    preferences = Preferences(text_scale=scale, cautions_seen=True)
    return open_window(qtbot, make_store(tmp_path / "ward.luffmark"), preferences=preferences)


def walked(qtbot, window, tmp_path):
    """Each dialog on show in turn, left again afterwards."""
    window.resize(1280, 800)
    window.open_episode("bed-7")
    settled(qtbot, window)
    for name, dialog in dialogs(window, tmp_path, lambda: settled(qtbot, window)):
        qtbot.waitUntil(lambda d=dialog: d.isVisible() and QApplication.activeWindow() in (d, None), timeout=5000)
        QApplication.processEvents()
        yield name, dialog
        dialog.reject()
        QApplication.processEvents()


def controls(root):
    """What Tab stops at, on show now."""
    return [
        w for w in root.findChildren(QWidget)
        if w.focusPolicy() & Qt.FocusPolicy.TabFocus and w.isEnabled() and w.isVisible() and w.focusProxy() is None
    ]  # fmt: skip


def told(widget):
    return f"{type(widget).__name__} '{widget.accessibleName() or getattr(widget, 'text', str)()}'"


def frame_of(widget):
    """The picture of a control's edge, or of all of it where it writes nothing of its own, a caret for one."""
    QApplication.processEvents()
    picture = widget.window().grab().toImage()
    whole = QRect(widget.mapTo(widget.window(), widget.rect().topLeft()), widget.size()).adjusted(-3, -3, 3, 3)
    image = picture.copy(whole)
    if isinstance(widget, QLineEdit | QAbstractScrollArea):
        edge = 6
        return [image.copy(0, 0, image.width(), edge), image.copy(0, 0, edge, image.height())]
    return [image]


def unseen(root):
    """Controls that look the same with the focus as without it."""
    dull = []
    rest = next((w for w in controls(root)), None)
    for widget in controls(root):
        other = next((w for w in controls(root) if w is not widget), rest)
        other.setFocus(Qt.FocusReason.TabFocusReason)
        roll_to(widget)
        away = frame_of(widget)
        widget.setFocus(Qt.FocusReason.TabFocusReason)
        if widget.hasFocus() and other is not widget and frame_of(widget) == away:
            dull.append(told(widget))
    return dull


def roll_to(widget):
    parent = widget.parentWidget()
    while parent is not None:
        if isinstance(parent, QScrollArea):
            parent.ensureWidgetVisible(widget)
        parent = parent.parentWidget()


def cut(root):
    """What is wider than there is room for: sideways rolling, buttons and labels that lose letters."""
    found = []
    for area in root.findChildren(QScrollArea):
        if area.isVisible() and area.widget() is not None and area.widget().width() > area.viewport().width() + 1:
            found.append(f"{told(area)} rolls sideways")
    for widget in root.findChildren(QWidget):
        if not widget.isVisible() or in_table(widget):
            continue
        if (
            isinstance(widget, QAbstractButton)
            and widget.text()
            and widget.width() < widget.minimumSizeHint().width()
        ):
            found.append(f"{told(widget)} is cut")
        if isinstance(widget, QLabel) and widget.text() and not widget.wordWrap() and label_is_cut(widget):
            found.append(f"label '{widget.text()}' is cut")
        if isinstance(widget, QLabel | QAbstractButton | QLineEdit | QComboBox):
            right = widget.mapTo(root, widget.rect().topRight()).x()
            if right > root.width() + 1:
                found.append(f"{told(widget)} stands outside")
    return found


def label_is_cut(label):
    plain = label.textFormat() is Qt.TextFormat.PlainText or "<" not in label.text()
    return plain and type(label) is QLabel and label.fontMetrics().horizontalAdvance(label.text()) > label.width() + 2


def in_table(widget):
    parent = widget.parentWidget()
    while parent is not None:
        if isinstance(parent, QAbstractItemView | QComboBox):
            return True
        parent = parent.parentWidget()
    return False


def test_no_dialog_of_the_program_is_left_out(qtbot, tmp_path):
    with opened(qtbot, tmp_path) as window:
        seen = {type(dialog).__name__ for _, dialog in walked(qtbot, window, tmp_path)}
    assert classes() - BASES - seen == set()


def test_every_control_of_every_dialog_has_a_name(qtbot, tmp_path):
    with opened(qtbot, tmp_path) as window:
        silent = {name: unspoken(dialog) for name, dialog in walked(qtbot, window, tmp_path) if unspoken(dialog)}
    assert silent == {}


def test_where_the_keys_go_is_seen_in_every_dialog(qtbot, tmp_path):
    with opened(qtbot, tmp_path) as window:
        dull = {name: found for name, dialog in walked(qtbot, window, tmp_path) if (found := unseen(dialog))}
    assert dull == {}


@pytest.mark.parametrize("page", PAGES)
def test_where_the_keys_go_is_seen_on_every_page(qtbot, tmp_path, page):
    with opened(qtbot, tmp_path) as window:
        window.select("bed-7")
        window.show_page(page)
        settled(qtbot, window)
        assert unseen(window.pages.page(page)) == []


@pytest.mark.parametrize("scale", [1.5, 2.0])
def test_no_dialog_is_cut_or_rolls_sideways_with_large_text(qtbot, tmp_path, scale):
    with opened(qtbot, tmp_path, scale) as window:
        wrong = {}
        for name, dialog in walked(qtbot, window, tmp_path):
            outgrows = dialog.width() > 1280 or dialog.height() > 800
            if found := [*cut(dialog), *([f"{dialog.size()}"] if outgrows else [])]:
                wrong[name] = found
    assert wrong == {}
