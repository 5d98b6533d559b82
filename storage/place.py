"""Where a store may live: a local disk. Locks over a network share are not dependable, so shares are refused."""

from __future__ import annotations

import os
import sys
from pathlib import Path

from storage.errors import store_error

_NETWORK_TYPES = frozenset(
    {"nfs", "nfs4", "cifs", "smb", "smb2", "smb3", "smbfs", "afs", "ncpfs", "9p", "fuse.sshfs", "davfs", "afpfs",
     "webdav", "ceph", "glusterfs", "fuse.glusterfs"}
)  # fmt: skip
_DRIVE_REMOTE = 4  # GetDriveTypeW, Windows API


def refuse_network_share(path: Path) -> None:
    """Refuse a path on a network share.

    Raises:
        StoreError: `store.network_share` naming the kind of share.
    """
    kind = _share_kind(path)
    if kind:
        raise store_error("store.network_share", path=path.name, kind=kind)


def _share_kind(path: Path) -> str:
    full = str(path.absolute())
    if sys.platform == "win32":
        return _windows_share_kind(full)
    try:
        mounts = Path("/proc/self/mounts").read_text("utf-8", "replace")
    except OSError:
        return ""
    return share_kind_in(mounts, full)


def share_kind_in(mounts: str, full: str) -> str:
    """The network file system a path lies on, by a mount table in the form of /proc/mounts; else "".

    >>> share_kind_in("srv:/x /mnt/ward nfs4 rw 0 0\\n/dev/sda1 / ext4 rw 0 0", "/mnt/ward/a.luff")
    'nfs4'
    """
    best, kind = "", ""
    for line in mounts.splitlines():
        fields = line.split(" ")
        if len(fields) < 3:
            continue
        point = fields[1].replace("\\040", " ")
        inside = full == point or full.startswith(point.rstrip("/") + "/")
        if inside and len(point) >= len(best):
            best, kind = point, fields[2]
    return kind if kind in _NETWORK_TYPES else ""


def _windows_share_kind(full: str) -> str:
    if full.startswith("\\\\"):
        return "UNC"
    import ctypes

    drive = os.path.splitdrive(full)[0] + "\\"
    windll = getattr(ctypes, "windll")  # noqa: B009 - the name exists on Windows alone
    return "remote drive" if windll.kernel32.GetDriveTypeW(drive) == _DRIVE_REMOTE else ""


def can_write(path: Path) -> bool:
    """Whether both the store's file and its folder take writing (the journal needs the folder)."""
    as_now = os.access in os.supports_effective_ids
    return all(os.access(p, os.W_OK, effective_ids=as_now) for p in (path, path.parent))
