"""Notices of sleep, clock steps and a full disk: told once, in words, and put away by the person."""

import pytest
from hypothesis import given
from hypothesis import strategies as st
from PySide6.QtCore import Qt

from app.keeping import notices
from app.keeping.notices import CLOCK, LOW, STEP, VERY_LOW, ClockWatch, DiskWatch, steady_now
from app.words import Reader, sentence
from core.record.instant import HOUR, MINUTE, parse
from tests.support.open_window import make_store, open_window

SECOND = 1_000_000
WALL = parse("2026-03-28T02:00:00+00:00")


def key_after(wall, steady, **kind):
    watch = ClockWatch(**kind)
    assert watch.look(WALL, 0) is None
    found = watch.look(WALL + wall, steady)
    return None if found is None else found.key


@pytest.mark.parametrize(
    ("wall", "steady", "key"),
    [
        (5 * SECOND, 5 * SECOND, None),
        (20 * SECOND, 20 * SECOND, None),  # a busy computer is late, that is no sleep
        (3 * HOUR, 3 * HOUR, "notice.slept"),
        (-HOUR + 5 * SECOND, 5 * SECOND, "notice.clock_back"),
        (HOUR + 5 * SECOND, 5 * SECOND, "notice.clock_forward"),
        (5 * SECOND + STEP - 1, 5 * SECOND, None),  # drift that the network corrects
        (HOUR, 3 * HOUR, "notice.clock_back"),  # set back while it slept: the clock matters more
    ],
)
def test_what_the_clocks_say(wall, steady, key):
    assert key_after(wall, steady) == key


def test_where_the_steady_clock_stands_still_in_sleep_both_are_said():
    assert key_after(3 * HOUR, 5 * SECOND, counts_sleep=False) == "notice.slept_or_forward"


@given(st.lists(st.integers(1, 60), min_size=1, max_size=50))
def test_a_steady_night_says_nothing(seconds):
    watch, at = ClockWatch(), 0
    watch.look(WALL, 0)
    for gap in seconds:
        at += gap * SECOND
        assert watch.look(WALL + at, at) is None


def test_a_filling_disk_is_told_once_at_each_step_and_taken_back():
    watch = DiskWatch()
    told = [watch.look(free) for free in (10 * LOW, LOW - 1, LOW - 2, VERY_LOW - 1, 10 * LOW, 10 * LOW)]
    assert [changed for changed, _ in told] == [False, True, False, True, True, False]
    assert [m.key if m else None for _, m in told] == [
        None, "notice.disk_low", "notice.disk_low", "notice.disk_nearly_full", None, None,
    ]  # fmt: skip


def test_in_words():
    watch = ClockWatch()
    watch.look(WALL, 0)
    found = watch.look(WALL + 90 * MINUTE, 90 * MINUTE)
    said = sentence(found, Reader("Europe/London"))
    assert said.startswith("The computer slept for 1 h 30 min, until 28-Mar-2026 03:30.")


def test_the_steady_clock_goes_on():
    assert 0 <= steady_now() - steady_now() + 1_000_000 <= 1_000_000


def test_the_window_says_it_and_a_person_puts_it_away(qtbot, tmp_path, monkeypatch):
    free = [10 * LOW]
    monkeypatch.setattr(notices.shutil, "disk_usage", lambda _folder: type("Usage", (), {"free": free[0]}))
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as window:
        strip = window.keeping.notices
        assert not strip.isVisible()
        free[0] = LOW // 2
        window.keeping.surroundings.look()
        assert strip.isVisible()
        assert "250 MB are free" in strip.plain()
        qtbot.mouseClick(strip.seen, Qt.MouseButton.LeftButton)
        assert not strip.isVisible()
        window.keeping.surroundings.look()
        assert not strip.isVisible()  # said once, not every five seconds
        window.keeping.surroundings.told.emit(CLOCK, back_by_an_hour())
        assert "set back by 1 h" in strip.plain()


def back_by_an_hour():
    watch = ClockWatch()
    watch.look(WALL, 0)
    return watch.look(WALL - HOUR + 5 * SECOND, 5 * SECOND)
