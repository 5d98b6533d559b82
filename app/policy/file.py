"""A policy as a file: reading its text."""

from __future__ import annotations

from pathlib import Path

from core.record.message import refuse

MOST_BYTES = 1_000_000
"""The shipped policy has some 30 kB; what is far larger is another file."""


def text_of(path: Path) -> str:
    """The text of a policy file, a byte-order mark left out.

    Raises:
        RecordError: `policy.unreadable`, it is no UTF-8 text or far too large.
        OSError: it cannot be read.
    """
    with path.open("rb") as file:
        data = file.read(MOST_BYTES + 1)
    if len(data) > MOST_BYTES:
        raise refuse("policy.unreadable", detail=f"{path.name} is larger than {MOST_BYTES // 1000} kB")
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        raise refuse("policy.unreadable", detail=f"not UTF-8 ({error.reason})") from None
