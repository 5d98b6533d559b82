"""A file must stay the same while it is read: what was shown is what is taken."""

from __future__ import annotations

from dataclasses import dataclass
from hashlib import sha256
from pathlib import Path
from typing import Self

from storage.intake.findings import unreadable

_BLOCK = 1 << 20


@dataclass(frozen=True, slots=True)
class SteadyFile:
    """What a file was when its reading began."""

    path: Path
    size: int
    changed_at: int
    node: int

    @classmethod
    def begin(cls, path: Path) -> Self:
        """Note what the file is now.

        Raises:
            OSError: it cannot be looked at.
        """
        return cls(path, *_facts(path))

    def check_read(self, count: int) -> None:
        """Say so where more was read than the file held: one that grows as fast as it is read has no end.

        Raises:
            UnreadableFileError: `file.changed`.
        """
        if count > self.size:
            raise unreadable(0, self.path.name, "file.changed", accepted="a file that nothing writes to")

    def check(self) -> None:
        """Say so where the file has changed since.

        Raises:
            UnreadableFileError: `file.changed`.
        """
        try:
            same = _facts(self.path) == (self.size, self.changed_at, self.node)
        except OSError:
            same = False
        if not same:
            raise unreadable(0, self.path.name, "file.changed", accepted="a file that nothing writes to")


def _facts(path: Path) -> tuple[int, int, int]:
    found = path.stat()
    return found.st_size, found.st_mtime_ns, found.st_ino


def read_bounded(path: Path, most: int) -> tuple[bytes, str]:
    """A file's bytes and their SHA-256, where it is at most `most` bytes.

    Raises:
        UnreadableFileError: `file.too_large`, `file.changed`.
        OSError: it cannot be read.
    """
    steady = SteadyFile.begin(path)
    if steady.size > most:
        raise unreadable(0, path.name, "file.too_large", size=steady.size, accepted=most)
    with path.open("rb") as file:
        data = file.read(most + 1)
    if len(data) != steady.size:
        raise unreadable(0, path.name, "file.changed", accepted="a file that nothing writes to")
    steady.check()
    return data, sha256(data).hexdigest()
