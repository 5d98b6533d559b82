"""What this computer's user likes: look, text size, units, window, recent stores. Nothing of a patient.

A TOML file in the user's configuration folder. A file that cannot be read is left alone and the usual values
are taken, so that a broken preference never keeps a night's log from opening.
"""

from __future__ import annotations

import json
import tomllib
from dataclasses import dataclass, fields, replace
from pathlib import Path
from typing import Any, Final

from app.session.shift import STARTS

MOST_RECENT: Final = 8
MOST_LOCK_MINUTES: Final = 120
TEXT_SCALES: Final = (1.0, 1.15, 1.3, 1.5, 1.75, 2.0)


@dataclass(frozen=True, slots=True)
class Preferences:
    """The values. `window` is x, y, width, height; empty: the usual size."""

    theme: str = "light"
    text_scale: float = 1.0
    gas_unit: str = "mmHg"
    shift_starts: tuple[str, ...] = STARTS
    cautions_seen: bool = False
    recent_stores: tuple[str, ...] = ()
    window: tuple[int, ...] = ()
    person: str = ""
    paper: str = "A4"
    """What a handover is printed on: the one chosen last."""
    lock_minutes: int = 10
    hide_minutes: int = 10
    """After how many minutes the screen is hidden where nobody signs in; 0: never, for a display on a wall."""
    backup_folder: str = ""
    witness_file: str = ""

    def with_store(self, path: str) -> Preferences:
        """With a store as the most recent one."""
        rest = tuple(p for p in self.recent_stores if p != path)
        return replace(self, recent_stores=(path, *rest)[:MOST_RECENT])

    def with_scale_step(self, steps: int) -> Preferences:
        """With the text so many steps larger (or smaller), stopping at the ends."""
        nearest = min(range(len(TEXT_SCALES)), key=lambda i: abs(TEXT_SCALES[i] - self.text_scale))
        return replace(self, text_scale=TEXT_SCALES[min(max(nearest + steps, 0), len(TEXT_SCALES) - 1)])


def default_path() -> Path:
    """Where preferences are kept on this platform."""
    from platformdirs import user_config_path

    return user_config_path("luffmark", appauthor=False) / "preferences.toml"


def load(path: Path) -> Preferences:
    """The kept preferences; the usual ones where there are none or they cannot be read."""
    try:
        return from_toml(path.read_text("utf-8"))
    except (OSError, ValueError):
        return Preferences()


def save(path: Path, preferences: Preferences) -> bool:
    """Keep the preferences; False where the folder cannot be written to."""
    try:
        path.parent.mkdir(parents=True, exist_ok=True)
        fresh = path.with_suffix(".new")
        fresh.write_text(to_toml(preferences), "utf-8")
        fresh.replace(path)
    except OSError:
        return False
    return True


def to_toml(preferences: Preferences) -> str:
    """The preferences as TOML."""
    lines = []
    for field in fields(preferences):
        value = getattr(preferences, field.name)
        plain = list(value) if isinstance(value, tuple) else value
        lines.append(f"{field.name} = {json.dumps(plain, ensure_ascii=False)}")
    return "\n".join(lines) + "\n"


def from_toml(text: str) -> Preferences:
    """Read preferences; unknown keys and values of a wrong kind are passed over.

    Raises:
        ValueError: where the text is no TOML.

    >>> from_toml("text_scale = 9").text_scale
    1.0
    """
    kept: dict[str, Any] = {}
    usual = Preferences()
    for key, value in tomllib.loads(text).items():
        old = getattr(usual, key, None)
        if old is None:
            continue
        value = tuple(value) if isinstance(value, list) else value
        value = float(value) if isinstance(old, float) and isinstance(value, int) else value
        if type(value) is type(old) and _accepted(key, value):
            kept[key] = value
    return Preferences(**kept)


def _accepted(key: str, value: Any) -> bool:
    if key == "theme":
        return bool(value in ("light", "dark"))
    if key == "text_scale":
        return bool(1.0 <= value <= 2.0)
    if key == "paper":
        return bool(value in ("A4", "Letter"))
    if key == "gas_unit":
        return bool(value in ("mmHg", "kPa"))
    if key == "lock_minutes":
        return bool(1 <= value <= MOST_LOCK_MINUTES)
    if key == "hide_minutes":
        return bool(0 <= value <= MOST_LOCK_MINUTES)
    if key == "window":
        return len(value) in (0, 4) and all(isinstance(n, int) for n in value)
    if key == "shift_starts":
        return len(value) >= 1 and all(isinstance(v, str) and is_time(v) for v in value)
    return key != "recent_stores" or all(isinstance(v, str) for v in value)


def is_time(text: str) -> bool:
    """Whether a text is a time of day, HH:MM."""
    hour, _, minute = text.partition(":")
    return hour.isdigit() and minute.isdigit() and int(hour) < 24 and int(minute) < 60
