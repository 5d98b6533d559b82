"""The check that no test leaves anything behind sees what it should."""

import threading

from PySide6.QtCore import QThread, QTimer
from PySide6.QtWidgets import QWidget

from tests.support import nothing_left


class Waiting(QThread):
    def __init__(self):
        super().__init__()
        self.may_end = threading.Event()

    def run(self):
        self.may_end.wait(60)


def test_a_thread_a_timer_and_a_window_are_named_and_nothing_else_is(qapp, monkeypatch):
    monkeypatch.setattr(nothing_left, "PATIENCE_S", 0.2)
    before = nothing_left.threads()
    assert nothing_left.left_behind(before) == []
    end = threading.Event()
    python, of_qt, timer, window = threading.Thread(target=end.wait), Waiting(), QTimer(), QWidget()
    python.start()
    of_qt.start()
    timer.start(1000)
    window.show()
    kinds = sorted(text.partition(" ")[0] for text in nothing_left.left_behind(before))
    end.set()
    of_qt.may_end.set()
    python.join()
    of_qt.wait()
    assert kinds == ["thread", "thread", "timer", "window"]
    assert nothing_left.left_behind(before) == []


def test_what_belongs_to_a_window_goes_with_it(qtbot):
    window = QWidget()
    timer = QTimer(window)
    timer.start(1000)
    window.close()
    window.deleteLater()
    assert nothing_left.left_behind(nothing_left.threads()) == []
