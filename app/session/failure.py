"""Turning whatever went wrong into a message: the environment's faults in plain words, ours as a report."""

from __future__ import annotations

import errno
import logging
import traceback
from dataclasses import dataclass
from pathlib import Path

from app.keeping.log_file import scrubbed_trace
from core.record.message import Message, RecordError
from storage.errors import StoreError

_log = logging.getLogger("luffmark")

_MOST_CAUSES = 5
_FILE_KEYS = {
    errno.ENOENT: "file.missing",
    errno.EACCES: "file.not_allowed",
    errno.EPERM: "file.not_allowed",
    errno.EROFS: "file.read_only_disk",
    errno.ENOSPC: "file.disk_full",
    errno.EDQUOT: "file.disk_full",
    errno.EISDIR: "file.is_folder",
    errno.ENOTDIR: "file.missing",
    errno.ENAMETOOLONG: "file.name_too_long",
}


@dataclass(frozen=True, slots=True)
class Failure:
    """Work that did not succeed: what to tell, and for an error of ours the trace for a report.

    `subject` and `number` say which submission it was (0 and "" outside the runner).
    """

    message: Message
    subject: str = ""
    number: int = 0
    trace: str = ""

    @property
    def is_ours(self) -> bool:
        """An error in the program, to be reported; not one of the person or the surroundings."""
        return bool(self.trace)


def frames_of(error: BaseException) -> str:
    """Where an error came from: its kinds and frames, without its words, which may hold what somebody typed.

    >>> frames_of(ValueError("Bed 7")).strip()
    'ValueError'
    """
    parts: list[str] = []
    found: BaseException | None = error
    while found is not None and len(parts) < _MOST_CAUSES:
        frames = "".join(traceback.format_tb(found.__traceback__))
        parts.append(f"{frames}{type(found).__name__}\n")
        found = found.__cause__ or (None if found.__suppress_context__ else found.__context__)
    return "\ncaused the following:\n".join(reversed(parts))


def failure_of(error: BaseException, subject: str = "", number: int = 0) -> Failure:
    """The failure that an exception means.

    >>> failure_of(FileNotFoundError(2, "No such file", "a.csv")).message.key
    'file.missing'
    """
    if isinstance(error, (RecordError, StoreError)):
        return Failure(error.message, subject, number)
    if isinstance(error, OSError) and error.filename is not None:
        key = _FILE_KEYS.get(error.errno or 0, "file.failed")
        if key == "file.missing" and not Path(str(error.filename)).parent.is_dir():
            key = "file.no_folder"
        values = {"path": str(error.filename), "detail": error.strerror or str(error)}
        return Failure(Message(key, values), subject, number)
    if isinstance(error, OSError) and error.errno in (errno.ENOSPC, errno.EDQUOT):
        return Failure(Message("file.disk_full", {"path": "", "detail": str(error)}), subject, number)
    trace = frames_of(error)
    _log.error("unexpected error in %s\n%s", subject or "work", trace, extra={"places": scrubbed_trace(error)})
    detail = f"{type(error).__name__}: {error}".splitlines()[0][:200]
    return Failure(Message("error.unexpected", {"detail": detail}), subject, number, trace)
