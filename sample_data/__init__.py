"""Invented data: a seeded simulation of people on mask ventilation, and the night shift it made.

Nothing here is about a real person, ward or device. The simulation shares no code with the judgement that it
serves to test; README.md in this folder states its assumptions.
"""

from __future__ import annotations

from importlib import resources
from pathlib import Path

DEMO_CLOCK = "2026-03-28T05:30:00+00:00"
"""The moment the demonstration pretends it is: late in the night shift. No row of the night lies after it."""


def night_folder() -> Path:
    """The folder of the night shift's files, in the source tree and in an installed package alike."""
    return Path(str(resources.files("sample_data").joinpath("night")))


def files() -> list[Path]:
    """The log files of the night shift, what people typed first, then one file per device.

    >>> files()[0].name
    'notes.csv'
    """
    folder = night_folder()
    return [folder / "notes.csv", *sorted(folder.glob("device-*.csv"))]
