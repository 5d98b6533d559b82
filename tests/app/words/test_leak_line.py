"""Leak on one line: minutes only where a device measured them, typed readings counted as readings."""

from __future__ import annotations

from app.words import Reader
from app.words.figure_lines import FigureLines
from core.judgement.leak_trend import leak_figure
from tests.support.log_cases import context

BEGIN = "00:30 rr 20\n01:00 mode BPAP-ST ipap 20 epap 5 ti 1.0 leak_definition unintentional"
TYPED = "\n".join(f"{hour:02d}:00 leak {45 + hour}" for hour in range(2, 7))


def _line(log: str, until: str) -> str:
    return FigureLines(Reader()).leak(leak_figure(context(log, until)))


def test_typed_readings_are_told_as_readings_and_have_no_minutes() -> None:
    line = _line(f"{BEGIN}\n{TYPED}", "06:30")
    assert line.endswith("; 5 of 5 readings over 30 L/min, typed now and then")
    assert "min over" not in line


def test_samples_that_cover_little_of_the_time_say_so() -> None:
    line = _line(f"{BEGIN}\n{TYPED}\ndevice leak 06:00 06:20 45 45", "06:20")
    assert "; in that time 20 min over 30 L/min; the device's samples cover 20 min of it" in line
    assert line.endswith("; 5 of 5 readings over 30 L/min, typed now and then")


def test_a_device_that_measured_throughout_needs_no_such_word() -> None:
    line = _line(f"{BEGIN}\ndevice leak 02:00 06:00 45 45", "06:00")
    assert line.endswith("; in that time 4 h over 30 L/min")
