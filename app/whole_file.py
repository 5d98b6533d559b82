"""Writing a file whole or not at all."""

from __future__ import annotations

from pathlib import Path


def write_whole(path: Path, data: bytes) -> None:
    """Put `data` in place of what was at `path`; a failure leaves that as it was.

    Raises:
        OSError: naming `path`.
    """
    unfinished = path.with_name(path.name + ".unfinished")
    try:
        unfinished.write_bytes(data)
        unfinished.replace(path)
    except OSError as error:
        unfinished.unlink(missing_ok=True)
        raise type(error)(error.errno, error.strerror, str(path)) from None
