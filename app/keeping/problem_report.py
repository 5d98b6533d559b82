"""A report of a problem, to be read before it is given away: nothing of a patient, a person or a place.

It says which program runs on what, what the window looks like, how large the store is, and what the log holds, which
is scrubbed when it is written. Labels, values, times of entries, initials, paths and names of files stay out.
"""

from __future__ import annotations

import platform
import sys
from dataclasses import dataclass
from importlib.metadata import PackageNotFoundError, version
from pathlib import Path
from typing import Final

from app.keeping.log_file import newest_lines
from app.keeping.preferences import Preferences
from app.look.formats import counted

LINES: Final = 200
_PACKAGES: Final = ("luffmark", "PySide6-Essentials", "pyqtgraph", "numpy", "SQLAlchemy", "sqlcipher3")


@dataclass(frozen=True, slots=True)
class Open:
    """What is told of an open store: sizes and kinds, no names. `page` is the page that shows."""

    episodes: int
    head: int
    read_only: bool
    is_demo: bool
    looks_back: bool
    page: str
    notices: tuple[str, ...] = ()
    """Keys of the notices that stand."""


def report(preferences: Preferences, opened: Open | None, log_folder: Path, window: tuple[int, int]) -> str:
    """The report as plain text. It is made of values that the program chose, never of what somebody typed."""
    lines = [
        "Luffmark problem report",
        "",
        "What I did:",
        "What I expected:",
        "What happened instead:",
        "",
        *(f"{name} {_version(name)}" for name in _PACKAGES),
        f"Python {platform.python_version()}, {_system()}, {platform.machine()}",
        f"Look {preferences.theme}, text {preferences.text_scale:.0%}, pressures in {preferences.gas_unit}",
        f"Window {window[0]} x {window[1]}",
    ]
    if opened is None:
        lines.append("No store is open")
    else:
        kinds = [word for word, held in (("sample shift", opened.is_demo), ("read-only", opened.read_only),
                                         ("looking back", opened.looks_back)) if held]  # fmt: skip
        lines += [
            f"Store with {opened.episodes} episodes, ledger at {opened.head}{''.join(f', {k}' for k in kinds)}",
            f"Page {opened.page}",
        ]
        if opened.notices:
            lines.append(f"Notices: {', '.join(opened.notices)}")
    log = newest_lines(log_folder, LINES)
    trace = "The program's own trace"
    head = f"{trace}, the newest {counted(len(log), 'line', 'lines')}:" if log else f"{trace}: nothing."
    return "\n".join([*lines, "", head, *log, ""])


def _system() -> str:
    """The system; a kernel's own name can name a computer, so it stays out where releases are named freely."""
    system = platform.system()
    return system if system == "Linux" else f"{system} {platform.release()}"


def _version(package: str) -> str:
    try:
        return version(package)
    except PackageNotFoundError:
        return "not installed as a package" if not getattr(sys, "frozen", False) else "bundled"
