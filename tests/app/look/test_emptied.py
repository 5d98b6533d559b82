"""A layout that is filled anew keeps nothing of what stood in it."""

from PySide6.QtCore import QCoreApplication, QEvent
from PySide6.QtWidgets import QGridLayout, QHBoxLayout, QLabel, QWidget
from pytestqt.qtbot import QtBot

from app.look.emptied import emptied


def test_everything_goes_at_once_and_for_good(qtbot: QtBot) -> None:
    page = QWidget()
    qtbot.addWidget(page)
    grid, row = QGridLayout(page), QHBoxLayout()
    outer, inner = QLabel("outer"), QLabel("inner")
    grid.addWidget(outer, 0, 0)
    row.addWidget(inner)
    grid.addLayout(row, 1, 0)
    page.show()
    assert outer.isVisible()
    assert inner.isVisible()
    emptied(grid)
    assert grid.count() == 0
    assert not outer.isVisible()
    assert not inner.isVisible()
    QCoreApplication.sendPostedEvents(None, QEvent.Type.DeferredDelete)
    assert not page.findChildren(QLabel)
