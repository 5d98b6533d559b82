"""The time zone of this computer by its IANA name, for wall-clock times typed and shown."""

from __future__ import annotations

import os
from pathlib import Path
from zoneinfo import ZoneInfo

_LINK = Path("/etc/localtime")
_FOLDER = "zoneinfo/"


def is_zone(name: str) -> bool:
    """Whether `name` is a zone that the time zone data know.

    >>> is_zone("Europe/London"), is_zone("Ward/Seven")
    (True, False)
    """
    try:
        ZoneInfo(name)
    except (KeyError, OSError, ValueError):
        return False
    return bool(name)


def local_zone() -> str:
    """The name of the local zone; UTC where the computer does not say.

    Qt is asked only where the environment and /etc/localtime do not know (Windows): it is slow to load.
    """
    for name in (os.environ.get("TZ", "").lstrip(":"), _linked()):
        if is_zone(name):
            return name
    from PySide6.QtCore import QTimeZone

    name = bytes(QTimeZone.systemTimeZoneId().data()).decode("ascii", "replace")
    return name if is_zone(name) else "UTC"


def _linked() -> str:
    try:
        return str(_LINK.resolve(strict=True)).partition(_FOLDER)[2]
    except OSError:
        return ""
