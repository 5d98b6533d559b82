"""What the program puts into the temporary folder for a while: the sample's store, and copies of closed handovers
that another program shows.

Each folder carries a lock that its own program holds. A lock that nobody holds was left by a program that was killed,
and the next start removes what lies under it.
"""

from __future__ import annotations

import os
import shutil
import tempfile
import time
from dataclasses import dataclass
from pathlib import Path

from PySide6.QtCore import QDir, QLockFile

SAMPLE, HANDOVERS = "luffmark-sample-", "luffmark-handover-"
_LOCKS = "luffmark-*.lock"
_IN_USE = "in-use.lock"
_NEW_S = 60


class OwnFolder:
    """A temporary folder for its owner's eyes alone, that goes with the program or at the next start."""

    def __init__(self, kind: str) -> None:
        self.path = Path(tempfile.mkdtemp(prefix=kind, dir=_temporary()))
        self._lock = own_lock(self.path / _IN_USE)

    def forget(self) -> None:
        """Throw it away. What another program still holds open stays, as on Windows, until the next start."""
        self._lock.unlock()
        shutil.rmtree(self.path, ignore_errors=True)


@dataclass(frozen=True, slots=True)
class Swept:
    """What was left behind: folders with handovers that were removed, and any that could not be."""

    handovers: int = 0
    stuck: tuple[Path, ...] = ()


def sweep() -> Swept:
    """Remove what programs that were killed left in the temporary folder; what is in use stays."""
    handovers, stuck = 0, []
    for kind in (SAMPLE, HANDOVERS):
        for folder in sorted(_temporary().glob(f"{kind}*")):
            if folder.is_dir() and _is_ours(folder) and not _is_new(folder) and is_free(folder / _IN_USE):
                shutil.rmtree(folder, ignore_errors=True)
                if kind == HANDOVERS:
                    handovers += not folder.exists()
                    stuck += [folder] if folder.exists() else []
    for lock in _temporary().glob(_LOCKS):
        if _is_ours(lock):
            is_free(lock)  # taking a lock that nobody holds, and giving it back, removes its file
    return Swept(handovers, tuple(stuck))


def own_lock(path: Path) -> QLockFile:
    """A lock that is its program's alone, whatever its age; held from now on."""
    lock = QLockFile(str(path))
    lock.setStaleLockTime(0)
    lock.tryLock(0)
    return lock


def is_free(path: Path) -> bool:
    """Whether no program that runs holds a lock; the file that a killed one left is removed."""
    lock = QLockFile(str(path))
    lock.setStaleLockTime(0)
    if not lock.tryLock(0):
        return False
    lock.unlock()
    return True


def _is_new(folder: Path) -> bool:
    """Whether another program may be making it just now: it has no lock yet."""
    return not (folder / _IN_USE).exists() and time.time() - folder.stat().st_mtime < _NEW_S


def _is_ours(path: Path) -> bool:
    """Whether this user made it: a shared temporary folder holds what others made, and links that lead elsewhere."""
    if path.is_symlink():
        return False
    return os.name == "nt" or path.stat().st_uid == os.getuid()


def _temporary() -> Path:
    return Path(QDir.tempPath())
