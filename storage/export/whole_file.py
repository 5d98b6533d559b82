"""A file that appears whole or not at all, and never over another one."""

from __future__ import annotations

import os
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path
from typing import TextIO

from storage.errors import store_error


@contextmanager
def whole_file(target: Path, *, newline: str = "\n") -> Iterator[TextIO]:
    """Write UTF-8 text into a new file; on any error nothing of it stays. `newline` as in `open`.

    Raises:
        StoreError: `store.exists`, `store.export_failed`.
    """
    if target.exists():
        raise store_error("store.exists", path=target.name)
    unfinished = target.with_name(target.name + ".unfinished")
    try:
        with unfinished.open("w", encoding="utf-8", newline=newline) as file:
            yield file
            file.flush()
            os.fsync(file.fileno())
        os.replace(unfinished, target)
    except OSError as error:
        raise store_error("store.export_failed", path=target.name, detail=error.strerror or "") from error
    finally:
        unfinished.unlink(missing_ok=True)
