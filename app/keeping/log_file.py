"""The program's own log: rotating files that hold nothing of a patient.

Only what the program's authors wrote reaches a file: the text of a log call before its values are put in, the kind
of each value, and of an error its type and the places in the code. What a value or an error's text says stays out,
because it may quote what somebody typed.
"""

from __future__ import annotations

import logging
import traceback
from pathlib import Path
from typing import Final

MOST_BYTES: Final = 256_000
KEPT: Final = 4
NAME: Final = "luffmark.log"
_ROOMS = ("app", "core", "storage")


def default_folder() -> Path:
    """Where logs are kept on this platform."""
    from platformdirs import user_log_path

    return user_log_path("luffmark", appauthor=False)


class ScrubbingFormatter(logging.Formatter):
    """Writes a record without its values."""

    def format(self, record: logging.LogRecord) -> str:
        told = f"{self.formatTime(record)} {record.levelname} {record.name}: {scrubbed_text(record)}"
        places = getattr(record, "places", "")  # what the program scrubbed itself
        if places:
            told += f"\n{places}"
        elif record.exc_info and record.exc_info[1] is not None:
            told += "\n" + scrubbed_trace(record.exc_info[1])
        return told


def scrubbed_text(record: logging.LogRecord) -> str:
    """The text of a log call, each value replaced by its kind.

    >>> record = logging.LogRecord("luffmark", 30, "x.py", 1, "no words for %s in %d", ("Bed 4", 3), None)
    >>> scrubbed_text(record)
    'no words for <str> in <int>'
    """
    text = str(record.msg)
    args = record.args if isinstance(record.args, tuple) else ()
    for value in args:
        start = text.find("%")
        if start < 0:
            break
        end = next((n + 1 for n in range(start + 1, len(text)) if text[n].isalpha()), len(text))
        text = f"{text[:start]}<{type(value).__name__}>{text[end:]}"
    return text


def scrubbed_trace(error: BaseException) -> str:
    """Where an error came from: types, files of the program, lines and functions. No texts, no values, no folders.

    >>> try:
    ...     {}["a patient's name"]
    ... except KeyError as error:
    ...     "patient" in scrubbed_trace(error), scrubbed_trace(error).startswith("KeyError")
    (False, True)
    """
    lines = []
    seen: BaseException | None = error
    while seen is not None:
        lines.append(type(seen).__name__)
        for frame in traceback.extract_tb(seen.__traceback__):
            lines.append(f"  {place_of(frame.filename)}:{frame.lineno} {frame.name}")
        seen = seen.__cause__ or (None if seen.__suppress_context__ else seen.__context__)
    return "\n".join(lines)


def place_of(filename: str) -> str:
    """A file of the program by its room and name; any other by its name alone, because folders name people.

    >>> place_of("/opt/ward/luffmark/app/forms/gas_form.py"), place_of("/usr/lib/python3.11/json/decoder.py")
    ('app/forms/gas_form.py', 'decoder.py')
    """
    parts = Path(filename.replace("\\", "/")).parts
    rooms = [n for n, part in enumerate(parts[:-1]) if part in _ROOMS]
    return "/".join(parts[rooms[-1] :]) if rooms else parts[-1] if parts else ""


def start_log(folder: Path) -> logging.Handler | None:
    """Write warnings and errors of the program to rotating files; None where the folder takes no writing."""
    from logging.handlers import RotatingFileHandler  # it loads sockets: not on the way to the first screen

    try:
        folder.mkdir(parents=True, exist_ok=True)
        handler = RotatingFileHandler(folder / NAME, maxBytes=MOST_BYTES, backupCount=KEPT, encoding="utf-8")
    except OSError:
        return None
    handler.setFormatter(ScrubbingFormatter())
    handler.setLevel(logging.WARNING)
    logging.getLogger("luffmark").addHandler(handler)
    return handler


def newest_lines(folder: Path, count: int) -> tuple[str, ...]:
    """The newest lines of the log, oldest first."""
    try:
        return tuple((folder / NAME).read_text("utf-8", errors="replace").splitlines()[-count:])
    except OSError:
        return ()
