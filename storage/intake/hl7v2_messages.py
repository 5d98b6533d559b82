"""Cuts a file of HL7 v2 messages into single ones: CR, LF or CRLF between segments, batch and transport marks
between messages, in bounded memory."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import dataclass

from storage.intake.findings import unreadable
from storage.intake.steady_file import SteadyFile
from storage.intake.watched_file import WatchedFile

MAX_SEGMENT = 128 * 1024
MAX_MESSAGE = 4 << 20
MAX_FIELDS = 100_000
"""Fields and components of one message: each becomes an object, and a file of separators alone would fill memory."""
_SKIPPED = (b"FHS", b"BHS", b"BTS", b"FTS")
_ENCODINGS = {"": "utf-8", "ASCII": "utf-8", "UNICODE UTF-8": "utf-8", "UTF-8": "utf-8", "8859/1": "latin-1",
              "8859/2": "iso8859-2", "8859/15": "iso8859-15", "UNICODE": "utf-8"}  # fmt: skip
_CHARACTER_SET = 17


@dataclass(frozen=True, slots=True)
class RawMessage:
    """One message: its segments joined by CR, and the line of the file where it begins (1 is the first)."""

    text: str
    line: int


class MessageReader(WatchedFile):
    """Iterates over the messages of a file, hashing as it goes.

    Raises:
        UnreadableFileError: no HL7, a segment or message without end, an encoding that is not what it says,
            a file that changed.
        RecordError: `intake.cancelled`.
    """

    def __iter__(self) -> Iterator[RawMessage]:
        steady = SteadyFile.begin(self.path)
        held: list[bytes] = []
        held_size = first = 0
        for line, segment in self._segments(steady):
            if segment.startswith(b"MSH"):
                if held:
                    yield _message(held, first)
                held, held_size, first = [], 0, line
            elif segment[:3] in _SKIPPED:
                continue
            elif not first:
                shown = segment[:40].decode("utf-8", "replace")
                raise unreadable(line, shown, "hl7.no_message", accepted="a message that begins with MSH")
            held.append(segment)
            held_size += len(segment)
            if held_size > MAX_MESSAGE:
                raise unreadable(first, "MSH", "hl7.message_too_long", accepted=MAX_MESSAGE)
        if not held:
            raise unreadable(1, "", "hl7.no_message", accepted="a message that begins with MSH")
        yield _message(held, first)
        steady.check()

    def _segments(self, steady: SteadyFile) -> Iterator[tuple[int, bytes]]:
        """Segments with their line; marks of the transport (VT, FS) and empty lines are left out."""
        carried, line = b"", 0
        with self.path.open("rb") as file:
            while True:
                fresh = self.read(file, steady)
                data = carried + fresh
                if fresh and data.endswith(b"\r"):  # its LF may come with the next block
                    data, tail = data[:-1], b"\r"
                else:
                    tail = b""
                parts = data.replace(b"\r\n", b"\n").replace(b"\r", b"\n").split(b"\n")
                carried = (parts.pop() if fresh else b"") + tail
                if max(map(len, (*parts, carried))) > MAX_SEGMENT:
                    raise unreadable(line + 1, "", "line.too_long", accepted=f"{MAX_SEGMENT} bytes")
                for part in parts:
                    line += 1
                    plain = part.strip(b"\x0b\x1c \t\xef\xbb\xbf") if line == 1 else part.strip(b"\x0b\x1c \t")
                    if plain:
                        yield line, plain
                if not fresh:
                    return


def _message(segments: list[bytes], line: int) -> RawMessage:
    data = b"\r".join(segments)
    marks = sum(data.count(data[at : at + 1]) for at in range(3, min(8, len(data))))
    if marks > MAX_FIELDS:
        raise unreadable(line, "MSH", "hl7.too_many_fields", accepted=MAX_FIELDS)
    if data.isascii():
        if b"\x00" in data:
            raise unreadable(line, "NUL", "file.binary", accepted="text")
        return RawMessage(data.decode("ascii"), line)
    fields = segments[0].split(segments[0][3:4] or b"|")
    claimed = fields[_CHARACTER_SET].decode("ascii", "replace") if len(fields) > _CHARACTER_SET else ""
    encoding = _ENCODINGS.get(claimed.split("~")[0].strip().upper())
    if encoding is None:
        raise unreadable(line, claimed[:40], "file.encoding", found=claimed[:40] or "not named",
                         accepted=", ".join(k for k in _ENCODINGS if k))  # fmt: skip
    try:
        return RawMessage(data.decode(encoding), line)
    except UnicodeDecodeError as error:
        shown = f"byte {data[error.start : error.start + 1].hex()}"
        raise unreadable(line, shown, "file.encoding", found=f"not {encoding}",
                         accepted="a message in the character set that MSH-18 names") from None  # fmt: skip
