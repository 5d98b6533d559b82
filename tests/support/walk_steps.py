"""What somebody may do at the window, at random: each step draws from its own chance and says what it does."""

from __future__ import annotations

import gc
import string
from collections.abc import Callable
from functools import partial
from random import Random
from typing import TYPE_CHECKING, Final

from PySide6.QtCore import QPoint, Qt
from PySide6.QtGui import QKeySequence
from PySide6.QtTest import QTest
from PySide6.QtWidgets import (
    QAbstractButton,
    QAbstractItemView,
    QAbstractSpinBox,
    QApplication,
    QComboBox,
    QDialog,
    QDoubleSpinBox,
    QLineEdit,
    QMenu,
    QMenuBar,
    QPlainTextEdit,
    QWidget,
)

from app.operations import entry
from app.strip.state import State
from app.window.action_table import DEEDS
from tests.support.open_window import ZONE
from tests.support.walk_hands import PLAIN, front, keys_go_to, named, parts, turn, write
from tests.support.walk_watch import dialogs_seen, front_dialog
from tests.support.walk_words import BRIEF, LINES, NONSENSE, PAGES, TYPED

if TYPE_CHECKING:
    from tests.support.random_walk import Walker

Key = Qt.Key
KEYS: Final = (
    Key.Key_Return, Key.Key_Enter, Key.Key_Escape, Key.Key_Escape, Key.Key_Tab, Key.Key_Backtab, Key.Key_Up,
    Key.Key_Down, Key.Key_Left, Key.Key_Right, Key.Key_Home, Key.Key_End, Key.Key_PageUp, Key.Key_PageDown,
    Key.Key_Space, Key.Key_Delete, Key.Key_Backspace, Key.Key_F10, Key.Key_Menu, Key.Key_Plus, Key.Key_Minus,
)  # fmt: skip
HELD: Final = (
    PLAIN, PLAIN, PLAIN, Qt.KeyboardModifier.ShiftModifier, Qt.KeyboardModifier.ControlModifier,
    Qt.KeyboardModifier.AltModifier, Qt.KeyboardModifier.ControlModifier | Qt.KeyboardModifier.ShiftModifier,
)  # fmt: skip
SIZES: Final = ((1000, 640), (1280, 800), (1100, 900), (1920, 1080))
NEVER: Final = frozenset({"quit"})
"""Closing is a step of its own."""


def acts(walker: Walker, chance: Random) -> str:
    """An action of the menus, as its menu does it: never under a dialog."""
    deed = chance.choice([d for d in DEEDS if d.key not in NEVER])
    action = walker.window.actions_by_key[deed.key]
    if front_dialog() is not None or not action.isEnabled():
        return f"action {deed.key}: not now"
    walker.say(f"action {deed.key}")
    action.trigger()
    return ""


def presses_shortcut(walker: Walker, chance: Random) -> str:
    """The keys of an action, wherever the focus is."""
    deed = chance.choice([d for d in DEEDS if d.key not in NEVER])
    keys, target = chance.choice(deed.keys), keys_go_to(walker)
    walker.say(f"shortcut {keys} ({deed.key}) at {named(target)}")
    QTest.keySequence(target, QKeySequence(keys))
    return ""


def presses_key(walker: Walker, chance: Random) -> str:
    """A key at whatever has the focus, once or a few times."""
    key, held, target = chance.choice(KEYS), chance.choice(HELD), keys_go_to(walker)
    times = chance.choice((1, 1, 2, 4))
    walker.say(f"key {key.name} {held.name} x{times} at {named(target)}")
    for _ in range(times):
        if walker.lives(target):
            QTest.keyClick(target, key, held)
    return ""


def presses_letter(walker: Walker, chance: Random) -> str:
    """A letter, alone or with Alt or Ctrl."""
    letter, held = chance.choice(string.ascii_lowercase + string.digits + "/?"), chance.choice(HELD)
    target = keys_go_to(walker)
    walker.say(f"letter {letter} {held.name} at {named(target)}")
    if held is Qt.KeyboardModifier.ControlModifier and letter == "q":
        return ""
    QTest.keyClick(target, letter, held)
    return ""


def logs(walker: Walker, chance: Random) -> str:
    """A line on the strip, sensible or not, and Enter: after its preview, too early, or twice."""
    strip = walker.window.strip
    if strip is None or front_dialog() is not None or not strip.line.isEnabled() or not strip.line.isVisible():
        return "log: not now"
    text = chance.choice(LINES if chance.random() < 0.75 else NONSENSE)
    waits, enters = chance.choice((0, 30, 150)), chance.choice((0, 1, 1, 2, 3))
    walker.say(f"log '{text[:60]}' for {strip.patient}, waits {waits}, Enter x{enters}")
    write(strip.line, text[:200], anew=chance.random() < 0.7)
    if chance.random() < 0.6:
        for _ in range(enters):
            walker.then(lambda: not is_read(walker), partial(press_enter, walker))
        return ""
    walker.after(waits, [lambda: press_enter(walker) for _ in range(enters)], apart=chance.choice((0, 20, 200)))
    return ""


def is_read(walker: Walker) -> bool:
    """Whether the line is still being read, or what was asked is too fresh for an answer."""
    strip = walker.window.strip
    return strip is not None and (strip.state is State.AWAITED or not strip.settle.is_over)


def press_enter(walker: Walker) -> None:
    """Enter on the line, if it is still there."""
    strip = walker.window.strip
    if strip is not None and front_dialog() is None and strip.line.isVisible():
        QTest.keyClick(strip.line, Key.Key_Return)


def types(walker: Walker, chance: Random) -> str:
    """Into a field that is there."""
    fields: list[QWidget] = [*parts(walker, QLineEdit), *parts(walker, QPlainTextEdit)]
    if not fields:
        return "type: no field"
    field, text = chance.choice(fields), chance.choice(TYPED if chance.random() < 0.8 else NONSENSE)
    walker.say(f"type '{text[:40]}' into {named(field)}")
    write(field, text[:80], anew=chance.random() < 0.7)
    return ""


def fills(walker: Walker, chance: Random) -> str:
    """Several fields of the dialog in front, numbers within their limits, and Enter once or twice."""
    dialog, boxes = front_dialog(), [b for b in parts(walker, QDoubleSpinBox) if not b.isReadOnly()]
    words = [w for w in parts(walker, QLineEdit) if not isinstance(w.parent(), QAbstractSpinBox)]
    if dialog is None or not (boxes or words):
        return "fill: no fields"
    walker.say(f"fills {type(dialog).__name__} '{dialog.windowTitle()}' and goes on")
    for box in chance.sample(boxes, min(len(boxes), chance.randint(1, 3))):
        low, high = max(box.minimum(), 0.0), min(box.maximum(), 120.0)
        write(box.lineEdit(), f"{low + (high - low) * chance.random():.{box.decimals()}f}", anew=True)
    for line in chance.sample(words, min(len(words), chance.randint(0, 2))):
        write(line, chance.choice(TYPED), anew=True)
    enter, escape = (partial(press_in, walker, dialog, key) for key in (Key.Key_Return, Key.Key_Escape))
    leaving = [escape] if chance.random() < 0.25 else []
    if chance.random() < 0.6:
        for deed in (enter, enter, *leaving):
            walker.then(lambda: not walker.lives(dialog) or not getattr(dialog, "_awaited", False), deed)
        return ""
    walker.after(150, [enter] * chance.choice((1, 2, 2)) + leaving, apart=chance.choice((0, 10, 200)))
    return ""


def press_in(walker: Walker, dialog: QDialog, key: Qt.Key) -> None:
    """A key in a dialog, if it still takes the keys."""
    if walker.lives(dialog) and front_dialog() is dialog:
        QTest.keyClick(dialog, key)


def clicks(walker: Walker, chance: Random) -> str:
    """A button that is there; where a dialog is open mostly one of its own."""
    buttons = parts(walker, QAbstractButton)
    if not buttons:
        return "click: no button"
    button = chance.choice(buttons)
    walker.say(f"click {named(button)}")
    QTest.mouseClick(button, Qt.MouseButton.LeftButton, PLAIN, button.rect().center())
    return ""


def chooses(walker: Walker, chance: Random) -> str:
    """Another entry of a box, or another step of a counter."""
    boxes: list[QWidget] = [*parts(walker, QComboBox), *parts(walker, QAbstractSpinBox)]
    if not boxes:
        return "choose: no box"
    box, key = chance.choice(boxes), chance.choice((Key.Key_Down, Key.Key_Up, Key.Key_End))
    walker.say(f"choose {key.name} in {named(box)}")
    box.setFocus()
    QTest.keyClick(box, key)
    return ""


def picks_row(walker: Walker, chance: Random) -> str:
    """A row of a list or a table; sometimes with a double click."""
    lists = [v for v in parts(walker, QAbstractItemView) if v.model() is not None and v.model().rowCount()]
    if not lists:
        return "row: no list"
    view = chance.choice(lists)
    root = view.rootIndex()
    index = view.model().index(chance.randrange(view.model().rowCount()), 0, root)
    twice = chance.random() < 0.4
    walker.say(f"row {index.row()} of {named(view)}{' twice' if twice else ''}")
    view.setCurrentIndex(index)
    at = view.visualRect(index).center()
    QTest.mouseClick(view.viewport(), Qt.MouseButton.LeftButton, PLAIN, at)
    if twice and walker.lives(view):
        QTest.mouseDClick(view.viewport(), Qt.MouseButton.LeftButton, PLAIN, at)
    return ""


def uses_mouse(walker: Walker, chance: Random) -> str:
    """Somewhere: moves, clicks, right clicks, twice, drags, wheels."""
    root = front() or walker.window
    at = QPoint(chance.randrange(max(1, root.width())), chance.randrange(max(1, root.height())))
    target = root.childAt(at) or root
    if isinstance(target, QMenuBar):
        return "mouse: menu bar"
    local = target.mapFrom(root, at) if target is not root else at
    how = chance.choice(("move", "move", "click", "click", "right", "twice", "drag", "wheel", "middle"))
    walker.say(f"mouse {how} at {at.x()},{at.y()} on {type(target).__name__}")
    left = Qt.MouseButton.LeftButton
    if how == "move":
        QTest.mouseMove(target, local)
    elif how == "twice":
        QTest.mouseDClick(target, left, PLAIN, local)
    elif how == "drag" and not isinstance(target, QLineEdit):
        QTest.mousePress(target, left, PLAIN, local)
        QTest.mouseMove(target, local + QPoint(chance.randint(-200, 200), chance.randint(-80, 80)))
        if walker.lives(target):
            QTest.mouseRelease(target, left, PLAIN, local + QPoint(40, 10))
    elif how == "wheel":
        turn(target, local, chance)
    else:
        button = {"right": Qt.MouseButton.RightButton, "middle": Qt.MouseButton.MiddleButton}.get(how, left)
        QTest.mouseClick(target, button, PLAIN, local)
    return ""


def ends_dialog(walker: Walker, chance: Random) -> str:
    """The dialog in front: left, or its main button pressed."""
    popup, dialog = QApplication.activePopupWidget(), front_dialog()
    if isinstance(popup, QMenu):
        walker.say("closes a menu")
        popup.close()
        return ""
    if dialog is None:
        return "end: no dialog"
    go = getattr(dialog, "go", None)
    if chance.random() < 0.5 and isinstance(go, QAbstractButton) and go.isVisible() and go.isEnabled():
        walker.say(f"goes on in {named(dialog)}")
        QTest.mouseClick(go, Qt.MouseButton.LeftButton, PLAIN, go.rect().center())
    else:
        walker.say(f"leaves {named(dialog)}")
        QTest.keyClick(dialog, Key.Key_Escape)
    return ""


def selects(walker: Walker, chance: Random) -> str:
    """Another patient in hand, as the lanes or the keys do it."""
    feed = walker.window.feed
    if feed is None or not feed.answers or front_dialog() is not None or walker.window.keeping.lock.is_locked:
        return "select: not now"
    key = chance.choice(sorted(feed.answers))
    walker.say(f"select {key}")
    if chance.random() < 0.5:
        walker.window.select(key)
    else:
        walker.window.open_episode(key)
    return ""


def turns_page(walker: Walker, chance: Random) -> str:
    """Another page."""
    name = chance.choice(PAGES)
    action = walker.window.actions_by_key[f"show_{name}"]
    if front_dialog() is not None or not action.isEnabled():
        return "page: not now"
    walker.say(f"page {name}")
    action.trigger()
    return ""


def resizes(walker: Walker, chance: Random) -> str:
    """Another size of the window, or of a dialog."""
    target = chance.choice([walker.window, *dialogs_seen()])
    size = chance.choice(SIZES)
    walker.say(f"resize {type(target).__name__} {size}")
    target.resize(*(size if target is walker.window else (size[0] // 2, size[1] // 2)))
    return ""


def moves_clock(walker: Walker, chance: Random) -> str:
    """Time goes by, and now and then over the end of winter time, or back as a clock that is set right does."""
    minutes = chance.choice((0, 1, 5, 20, 61, 240, 900, -1, -30))
    walker.say(f"clock {minutes:+} min")
    walker.clock += minutes * 60_000_000
    if walker.window.model is not None:
        walker.window.model._ticked()
    return ""


def collects(walker: Walker, _chance: Random) -> str:
    """Garbage, now, on the window's thread."""
    walker.say("gc")
    gc.collect()
    return ""


def idles(walker: Walker, _chance: Random) -> str:
    """Nobody was there for too long, or the window is locked by hand."""
    if walker.window.model is None:
        return "lock: no store"
    walker.say("locks")
    walker.window.keeping.locking.idle()
    return ""


def unlocks(walker: Walker, chance: Random) -> str:
    """Any key where nobody signs in, else the secret that fits, or one that does not."""
    lock = walker.window.keeping.lock
    if not lock.is_locked or front_dialog() is not None:
        return "unlock: not locked"
    walker.say("unlocks")
    if not lock.page.secret.isVisible():
        QTest.keyClick(lock.page, Key.Key_Space)
        return ""
    if lock.page.initials.isVisible():
        lock.page.initials.setText("AB")
    lock.page.secret.setText(walker.fitting_secret() if chance.random() < 0.8 else "0000")
    QTest.keyClick(lock.page.secret, Key.Key_Return)
    return ""


def others_log(walker: Walker, chance: Random) -> str:
    """Another program logs for a patient of this store."""
    feed = walker.window.feed
    if feed is None or not feed.answers or walker.window.model is None:
        return "other: no store"
    key, line = chance.choice(sorted(feed.answers)), chance.choice(BRIEF)
    walker.say(f"another program logs '{line}' for {key}")
    walker.beside(lambda store, now: entry.log_line(store, "ZZ", now, entry.LineRequest(key, line, ZONE, True)))
    return ""


def hurries(_walker: Walker, _chance: Random) -> str:
    """Nothing."""
    return "rest"


Step = Callable[["Walker", Random], str]
ALONE: Final[tuple[tuple[int, Step], ...]] = (
    (12, acts), (8, presses_shortcut), (7, presses_key), (2, presses_letter), (16, logs), (2, types), (6, clicks),
    (2, chooses), (2, picks_row), (7, uses_mouse), (5, selects), (4, turns_page), (1, resizes), (2, moves_clock),
    (3, collects), (1, idles), (2, others_log), (1, hurries),
)  # fmt: skip
"""What is done where no dialog stands, with how often."""
IN_DIALOG: Final[tuple[tuple[int, Step], ...]] = (
    (2, presses_shortcut), (6, presses_key), (2, presses_letter), (8, types), (12, fills), (12, clicks), (7, chooses),
    (7, picks_row), (4, uses_mouse), (14, ends_dialog), (1, resizes), (1, moves_clock), (2, collects), (1, idles),
    (2, others_log), (1, hurries),
)  # fmt: skip
LOCKED: Final[tuple[tuple[int, Step], ...]] = (
    (10, unlocks), (2, presses_shortcut), (2, presses_key), (2, clicks), (1, uses_mouse), (1, collects),
    (1, others_log), (1, resizes), (1, acts),
)  # fmt: skip
NO_STORE: Final[tuple[tuple[int, Step], ...]] = (
    (4, acts), (2, presses_shortcut), (3, presses_key), (4, clicks), (2, uses_mouse), (1, collects), (1, resizes),
)  # fmt: skip
