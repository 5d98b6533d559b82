"""Bytes put aside while a file is read: in memory while they are few, beyond that in a temporary file.

What lies in the temporary file is encrypted by a key that is held in memory alone: it is of patients, and a store may
be encrypted. It goes with this object, and what a crash leaves behind nobody can read.
"""

from __future__ import annotations

import os
import tempfile
import weakref
from collections import OrderedDict
from typing import IO, TYPE_CHECKING

if TYPE_CHECKING:
    from cryptography.hazmat.primitives.ciphers.aead import AESGCM

_BITS = 18
_SEGMENT = 1 << _BITS
_LENGTH = 4
_IN_MEMORY = 8 << 20
_AT_HAND = 48


class SealedFile:
    """`put` gives the number of a place, `get` the bytes at it. Segments read last are kept at hand."""

    def __init__(self) -> None:
        self._open = bytearray()
        self._held: list[bytes] = []
        self._sizes: list[tuple[int, int]] = []
        self._end = 0
        self._file: IO[bytes] | None = None
        self._key = os.urandom(32)
        self._read: OrderedDict[int, bytes] = OrderedDict()

    def put(self, data: bytes) -> int:
        """Put bytes aside; the number of their place."""
        place = self._segments << _BITS | len(self._open)
        self._open += len(data).to_bytes(_LENGTH, "little") + data
        if len(self._open) >= _SEGMENT:
            self._seal()
        return place

    def get(self, place: int) -> bytes:
        """The bytes at a place."""
        segment, at = place >> _BITS, place & (1 << _BITS) - 1
        data = self._open if segment == self._segments else self._segment(segment)
        start = at + _LENGTH
        return bytes(data[start : start + int.from_bytes(data[at:start], "little")])

    @property
    def _segments(self) -> int:
        return len(self._sizes)

    def _seal(self) -> None:
        data = bytes(self._open)
        self._open.clear()
        if self._file is None and (len(self._held) + 1) * _SEGMENT <= _IN_MEMORY:
            self._held.append(data)
            self._sizes.append((0, len(data)))
            return
        if self._file is None:
            self._file = tempfile.TemporaryFile(prefix="luffmark-intake-")  # noqa: SIM115 - it lives as long as this
            weakref.finalize(self, self._file.close)
            held, self._held, self._sizes = self._held, [], []
            for old in held:
                self._write(old)
        self._write(data)

    def _write(self, data: bytes) -> None:
        if self._file is None:
            raise RuntimeError("no file is open")
        sealed = _cipher(self._key).encrypt(self._nonce(self._segments), data, None)
        self._file.seek(self._end)
        self._file.write(sealed)
        self._sizes.append((self._end, len(sealed)))
        self._end += len(sealed)

    def _segment(self, number: int) -> bytes:
        if self._file is None:
            return self._held[number]
        if number in self._read:
            self._read.move_to_end(number)
            return self._read[number]
        at, size = self._sizes[number]
        self._file.seek(at)
        data = _cipher(self._key).decrypt(self._nonce(number), self._file.read(size), None)
        self._read[number] = data
        if len(self._read) > _AT_HAND:
            self._read.popitem(last=False)
        return data

    @staticmethod
    def _nonce(number: int) -> bytes:
        return number.to_bytes(12, "little")  # a key is used by one object, and a number by one segment


def _cipher(key: bytes) -> AESGCM:
    from cryptography.hazmat.primitives.ciphers.aead import AESGCM

    return AESGCM(key)
