"""A file while it is read block by block: hashed, its progress told, stopped when a person says so."""

from __future__ import annotations

from collections.abc import Callable
from hashlib import sha256
from pathlib import Path
from typing import BinaryIO

from core.record.message import refuse
from storage.intake.steady_file import SteadyFile

BLOCK = 1 << 20
Progress = Callable[[int, int], None]


class WatchedFile:
    """What the readers of files share. `size` counts the bytes read so far."""

    def __init__(
        self, path: Path, progress: Progress | None = None, cancelled: Callable[[], bool] | None = None
    ) -> None:
        self.path, self._progress, self._cancelled = path, progress, cancelled
        self._hash = sha256()
        self.size = 0

    @property
    def sha(self) -> str:
        """SHA-256 of what was read so far, as hex."""
        return self._hash.hexdigest()

    def read(self, file: BinaryIO, steady: SteadyFile, size: int = 0) -> bytes:
        """The next bytes, a block of them where no size is given.

        Raises:
            RecordError: `intake.cancelled`.
            UnreadableFileError: `file.changed`.
        """
        if self._cancelled is not None and self._cancelled():
            raise refuse("intake.cancelled", path=self.path.name)
        data = file.read(size or BLOCK)
        self._hash.update(data)
        self.size += len(data)
        steady.check_read(self.size)
        if self._progress is not None:
            self._progress(self.size, steady.size)
        return data
