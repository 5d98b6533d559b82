"""The pages of a damaged store's file, each read by itself: no other page, and no table of contents, is needed.

An encrypted page is decrypted here, since the driver reads nothing of a file whose first page fails. Its form is that
of SQLCipher 4 with a raw key: AES-256-CBC, the page's own IV and its HMAC-SHA512 at its end, the HMAC's key made of
the key and the salt that stands in the file's first 16 bytes. Where that salt is lost, pages are still decrypted, and
`proved` says that nothing vouches for them.
"""

from __future__ import annotations

import hmac
import struct
from hashlib import pbkdf2_hmac
from pathlib import Path
from typing import BinaryIO

PAGE = 4096
_SALT, _IV, _MAC = 16, 16, 64
_RESERVED = _IV + _MAC
_WAL_HEADER, _FRAME_HEADER = 32, 24
_TRIES = 50


class Pages:
    """Pages by number from 1, as the file and its journal hold them. Close it."""

    def __init__(self, path: Path, key: bytes | None) -> None:
        self._file = path.open("rb")
        self._journal = _Journal(path.with_name(path.name + "-wal"))
        self.count = max(path.stat().st_size // PAGE, self._journal.last_page)
        self.usable = PAGE - (_RESERVED if key is not None else 0)
        self._key, self._mac_key = key, b""
        self._last: tuple[int, bytes | None] = 0, None
        self.proved = key is not None and self._finds_salt(key)
        """Whether each page that is given is what was written: only an encrypted page carries its proof."""

    def close(self) -> None:
        """Close the file."""
        self._file.close()
        self._journal.close()

    def page(self, number: int) -> bytes | None:
        """The content of a page, `usable` bytes; None where it is missing or its proof fails."""
        if self._last[0] != number:
            self._last = number, self._content(number)
        return self._last[1]

    def _content(self, number: int) -> bytes | None:
        raw = self._raw(number)
        if len(raw) < PAGE:
            return None
        if self._key is None:
            return raw
        if self.proved and not self._is_proved(number, raw):
            return None
        return _decrypted(self._key, number, raw)

    def _raw(self, number: int) -> bytes:
        found = self._journal.page(number)
        if found is not None:
            return found
        self._file.seek((number - 1) * PAGE)
        return self._file.read(PAGE)

    def _finds_salt(self, key: bytes) -> bool:
        """Whether the salt at the head of the file fits its pages: one that proves itself is enough."""
        salt = self._raw(1)[:_SALT]
        self._mac_key = pbkdf2_hmac("sha512", key, bytes(b ^ 0x3A for b in salt), 2, 32)
        step = max(1, self.count // _TRIES)
        return any(self._is_proved(n, self._raw(n)) for n in (1, *range(2, self.count + 1, step)))

    def _is_proved(self, number: int, raw: bytes) -> bool:
        if len(raw) < PAGE:
            return False
        start = _SALT if number == 1 else 0
        own = hmac.digest(self._mac_key, raw[start : PAGE - _MAC] + struct.pack("<I", number), "sha512")
        return hmac.compare_digest(own, raw[PAGE - _MAC :])


def _decrypted(key: bytes, number: int, raw: bytes) -> bytes:
    from cryptography.hazmat.primitives.ciphers import Cipher, algorithms, modes

    start = _SALT if number == 1 else 0
    end = PAGE - _RESERVED
    reader = Cipher(algorithms.AES(key), modes.CBC(raw[end : end + _IV])).decryptor()
    return bytes(start) + reader.update(raw[start:end]) + reader.finalize()


class _Journal:
    """The newest committed copy of each page in a write-ahead journal: as far as its checksums hold."""

    def __init__(self, path: Path) -> None:
        self._places: dict[int, int] = {}
        self.last_page = 0
        self._file = path.open("rb") if path.is_file() else None
        if self._file is not None:
            self._read_places(self._file)

    def close(self) -> None:
        """Close the file."""
        if self._file is not None:
            self._file.close()

    def page(self, number: int) -> bytes | None:
        """A page's newest copy, or None."""
        place = self._places.get(number)
        if place is None or self._file is None:
            return None
        self._file.seek(place)
        return self._file.read(PAGE)

    def _read_places(self, file: BinaryIO) -> None:
        head = file.read(_WAL_HEADER)
        if len(head) < _WAL_HEADER or head[:3] != b"\x37\x7f\x06" or struct.unpack(">I", head[8:12])[0] != PAGE:
            return
        order = ">" if head[3] & 1 else "<"
        check = _checksum((0, 0), head[:24], order)
        if check != struct.unpack(">II", head[24:32]):
            return
        waiting: dict[int, int] = {}
        while len(frame := file.read(_FRAME_HEADER + PAGE)) == _FRAME_HEADER + PAGE:
            number, pages_after = struct.unpack(">II", frame[:8])
            check = _checksum(check, frame[:8] + frame[_FRAME_HEADER:], order)
            if frame[8:16] != head[16:24] or check != struct.unpack(">II", frame[16:24]):
                return
            waiting[number] = file.tell() - PAGE
            if pages_after:  # a commit: what came since the last one counts
                self._places |= waiting
                self.last_page = pages_after
                waiting = {}


def _checksum(so_far: tuple[int, int], data: bytes, order: str) -> tuple[int, int]:
    """The journal's running checksum over pairs of 32-bit words."""
    a, b = so_far
    words = struct.unpack(f"{order}{len(data) // 4}I", data)
    for x, y in zip(words[::2], words[1::2], strict=True):
        a = (a + x + b) & 0xFFFFFFFF
        b = (b + y + a) & 0xFFFFFFFF
    return a, b
