"""Where a hand goes at the window, and how it types and turns: what the steps of a random walk share."""

from __future__ import annotations

from random import Random
from typing import TYPE_CHECKING, TypeVar

from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtGui import QWheelEvent
from PySide6.QtTest import QTest
from PySide6.QtWidgets import QApplication, QWidget

from tests.support.walk_watch import front_dialog

if TYPE_CHECKING:
    from tests.support.random_walk import Walker

W = TypeVar("W", bound=QWidget)
Key = Qt.Key
PLAIN = Qt.KeyboardModifier.NoModifier


def front() -> QWidget | None:
    """What takes the keys: a popup, the dialog in front, else the window."""
    return QApplication.activePopupWidget() or front_dialog() or QApplication.activeWindow()


def parts(walker: Walker, kind: type[W]) -> list[W]:
    """What of a kind could be used now."""
    root = front_dialog() or walker.window
    found = [w for w in root.findChildren(kind) if w.isVisible() and w.isEnabled()]
    return [w for w in found if w.window() is root.window()]


def keys_go_to(walker: Walker) -> QWidget:
    """The widget that a key goes to."""
    popup = QApplication.activePopupWidget()
    root = popup or front_dialog() or walker.window
    focus = QApplication.focusWidget()
    if popup is None and focus is not None and focus.window() is root.window():
        return focus
    return root


def named(widget: QWidget) -> str:
    """A widget in a few words."""
    told = getattr(widget, "text", None)
    text = widget.accessibleName() or (told() if callable(told) and not isinstance(told, QWidget) else "")
    return f"{type(widget).__name__} '{text[:40]}'"


def write(field: QWidget, text: str, *, anew: bool) -> None:
    """As by hand; what stands outside ASCII is pasted."""
    field.setFocus()
    if anew:
        QTest.keyClick(field, Key.Key_A, Qt.KeyboardModifier.ControlModifier)
        QTest.keyClick(field, Key.Key_Delete)
    if text.isascii():
        QTest.keyClicks(field, text)
    else:
        QApplication.clipboard().setText(text)
        QTest.keyClick(field, Key.Key_V, Qt.KeyboardModifier.ControlModifier)


def turn(target: QWidget, at: QPoint, chance: Random) -> None:
    """The wheel, alone or with Ctrl or Shift."""
    held = chance.choice((PLAIN, Qt.KeyboardModifier.ControlModifier, Qt.KeyboardModifier.ShiftModifier))
    by = QPoint(0, chance.choice((-240, -120, 120, 240)))
    event = QWheelEvent(
        QPointF(at), QPointF(target.mapToGlobal(at)), QPoint(), by, Qt.MouseButton.NoButton, held,
        Qt.ScrollPhase.NoScrollPhase, False,
    )  # fmt: skip
    QApplication.sendEvent(target, event)
