"""Calm notices about the computer that the window runs on."""

from typing import Final

TEMPLATES: Final[dict[str, str]] = {
    "notice.clock_back":
        "The computer's clock was set back by {minutes:minutes}: it is {at:time} now. Recording times "
        "never step back; check a time of day before you log it.",
    "notice.clock_forward": "The computer's clock was set forward by {minutes:minutes}: it is {at:time} now. "
        "Check a time of day before you log it.",
    "notice.disk_low": "The disk is getting full: {mb:0} MB are free. Make room before the night.",
    "notice.disk_nearly_full": "The disk is nearly full: {mb:0} MB are free. Make room now, or nothing more can be "
        "recorded.",
    "notice.slept":
        "The computer slept for {minutes:minutes}, until {at:time}. What happened meanwhile is only known "
        "where somebody logs it.",
    "notice.slept_or_forward": "The computer slept, or its clock was set forward, by {minutes:minutes}: it is "
        "{at:time} now. Check a time of day before you log it.",
}  # fmt: skip
