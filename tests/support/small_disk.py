"""A disk of a few megabytes that can be filled: a file system in memory, where mounting is permitted."""

from __future__ import annotations

import os
import shutil
import subprocess
import sys
from collections.abc import Iterator
from contextlib import contextmanager
from pathlib import Path


def may_mount() -> bool:
    """Whether this system lets us mount one."""
    return sys.platform == "linux" and os.geteuid() == 0 and shutil.which("mount") is not None


@contextmanager
def small_disk(at: Path, kilobytes: int) -> Iterator[Path | None]:
    """A disk of so many kilobytes at a folder that is made for it; None where mounting is refused."""
    at.mkdir()
    command = ["mount", "-t", "tmpfs", "-o", f"size={kilobytes}k,mode=0700", "tmpfs", str(at)]
    if not may_mount() or subprocess.run(command, capture_output=True).returncode != 0:
        yield None
        return
    try:
        yield at
    finally:
        subprocess.run(["umount", "-l", str(at)], check=True)


def fill(disk: Path, leave: int = 0) -> Path:
    """Fill a disk up to `leave` bytes; the file that takes the room."""
    ballast = disk / "ballast"
    room = max(0, shutil.disk_usage(disk).free - leave)
    with ballast.open("wb") as file:
        try:
            for _ in range(room // 4096):
                file.write(bytes(4096))
                file.flush()
        except OSError:
            pass  # full it is
    return ballast
