"""The keys of the panels: arrows pan (Shift: half a window), + and - zoom, Home start, End now, 0 all; Ctrl with an
arrow moves the crosshair, Enter opens the bracket or tick under it, Esc takes it away."""

from collections.abc import Callable
from typing import Protocol

from PySide6.QtCore import Qt
from PySide6.QtGui import QKeyEvent

from app.chart.shapes import MICROSECONDS

_CROSSHAIR_STEPS = 100
"""Steps of the crosshair from one end of the window to the other."""


class MovedByKeys(Protocol):
    """What the keys move: a window of time, and a crosshair in it."""

    instant: int | None
    """Where the crosshair stands."""

    @property
    def in_view(self) -> tuple[int, int]: ...
    def pan_seconds(self, seconds: float) -> None: ...
    def zoom(self, factor: float) -> None: ...
    def go_home(self) -> None: ...
    def go_now(self) -> None: ...
    def show_all(self) -> None: ...
    def point_at(self, instant: int | None) -> None: ...
    def open_at_crosshair(self) -> None: ...


def moves_crosshair(event: QKeyEvent) -> bool:
    """Ctrl with an arrow, and no other modifier (an arrow of the number pad counts)."""
    held = event.modifiers() & ~Qt.KeyboardModifier.KeypadModifier
    return held == Qt.KeyboardModifier.ControlModifier and event.key() in (Qt.Key.Key_Left, Qt.Key.Key_Right)


def key_pressed(stack: MovedByKeys, event: QKeyEvent) -> bool:
    """Do what a key stands for; whether it stands for anything here."""
    return _of_crosshair(stack, event) or _of_window(stack, event)


def _of_window(stack: MovedByKeys, event: QKeyEvent) -> bool:
    keys, (start, end) = Qt.Key, stack.in_view
    step = (end - start) / MICROSECONDS / (2 if event.modifiers() & Qt.KeyboardModifier.ShiftModifier else 8)
    deeds: dict[int, Callable[[], None]] = {
        keys.Key_Left: lambda: stack.pan_seconds(-step),
        keys.Key_Right: lambda: stack.pan_seconds(step),
        keys.Key_Plus: lambda: stack.zoom(0.5),
        keys.Key_Equal: lambda: stack.zoom(0.5),
        keys.Key_Minus: lambda: stack.zoom(2.0),
        keys.Key_Home: stack.go_home,
        keys.Key_End: stack.go_now,
        keys.Key_0: stack.show_all,
    }
    deed = deeds.get(event.key())
    if deed is not None:
        deed()
    return deed is not None


def _of_crosshair(stack: MovedByKeys, event: QKeyEvent) -> bool:
    if moves_crosshair(event):
        _step(stack, 1 if event.key() == Qt.Key.Key_Right else -1)
    elif event.key() in (Qt.Key.Key_Return, Qt.Key.Key_Enter) and stack.instant is not None:
        stack.open_at_crosshair()
    elif event.key() == Qt.Key.Key_Escape and stack.instant is not None:
        stack.point_at(None)
    else:
        return False
    return True


def _step(stack: MovedByKeys, way: int) -> None:
    start, end = stack.in_view
    inside = stack.instant is not None and start <= stack.instant <= end
    at = stack.instant if inside and stack.instant is not None else (start + end) // 2
    stack.point_at(min(max(at + way * (end - start) // _CROSSHAIR_STEPS, start), end))
