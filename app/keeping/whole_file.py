"""Writing a file whole or not at all, and over another one only where that was asked for."""

from __future__ import annotations

from pathlib import Path

from core.record.message import refuse


def write_whole(path: Path, data: bytes) -> None:
    """Put `data` in place of what was at `path`; a failure leaves that as it was.

    What is no file (a device, a pipe) is written to and never replaced.

    Raises:
        OSError: naming `path`.
    """
    unfinished = path.with_name(path.name + ".unfinished")
    try:
        if path.exists() and not path.is_file():
            path.write_bytes(data)
            return
        unfinished.write_bytes(data)
        unfinished.replace(path)
    except OSError as error:
        unfinished.unlink(missing_ok=True)
        raise type(error)(error.errno, error.strerror, str(path)) from None


def claim(path: Path, *, replace: bool) -> None:
    """Refuse a file that cannot be written, or that is there already, before any work is done for it.

    Raises:
        RecordError: `file.exists`, unless `replace`.
        OSError: naming `path`.
    """
    if path.is_file() and not replace:
        raise refuse("file.exists", path=str(path))
    existed = path.exists()
    with path.open("ab"):
        pass
    if not existed:
        path.unlink()
