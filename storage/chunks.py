"""Device samples as immutable blocks: exact, small, quick to decode. `storage.block_cuts` says where they are cut.

Values that are whole multiples of a power of ten are kept as integers, so that 12.3 comes back as 12.3;
anything else is kept as float64. Integers go as differences in bytes, or as offsets from the least in bits,
deflated where that helps: whichever is smallest. Times that keep one step are not stored at all.
"""

from __future__ import annotations

import zlib
from dataclasses import dataclass
from functools import lru_cache
from hashlib import sha256

import numpy as np
from numpy.typing import NDArray

from core.record.message import refuse
from core.record.samples import Times, Values
from storage.errors import store_error

CODEC = "b1"
REGULAR, _HAS_NAN, _FLOAT, BITS, _DEFLATED = 1, 2, 4, 8, 16
_MAX_SCALE = 9
_MAX_DECIMALS = 15
_EXACT = 2.0**53
_MOST = 4_000_000
"""Samples in a block: an hour at a thousand a second. More is damage, not data."""
_WIDTHS = (1, 2, 4, 8)
_INTS = {w: np.dtype(f"<i{w}") for w in _WIDTHS}
Integers = NDArray[np.int64]
_Form = tuple[int, int, int, int, bytes]
"""A way to write the values: flags, scale, start, width, bytes."""


@dataclass(frozen=True, slots=True)
class Block:
    """One encoded block: `n` samples from `t0` to `t1`, both included; `empty` of them, where known, are NaN."""

    t0: int
    t1: int
    n: int
    blob: bytes
    empty: int = 0

    @property
    def sha(self) -> bytes:
        """SHA-256 of the bytes."""
        return sha256(self.blob).digest()


@lru_cache(maxsize=4096)
def block_head(flags: int, scale: int, decimals: int, widths: int, n: int, step: int, start: int) -> bytes:
    fixed = bytes((flags, scale | min(decimals, _MAX_DECIMALS) << 4, widths))
    return fixed + _varint(n) + _varint(step) + _varint(_zigzag(start))


def encode(t: Times, v: Values, decimals: int, integers: tuple[int, Integers] | None = None) -> Block:
    """One block of samples: `t` int64 us UTC strictly increasing, `v` float64 (NaN kept), shapes (n,), n > 0.

    `integers` is what `as_integers` says of `v`, where that is known already.
    """
    if not 0 < t.size <= _MOST:
        raise refuse("samples.too_many", count=t.size, accepted=_MOST)
    gaps = t[1:] - t[:-1]
    step = int(gaps.min()) if gaps.size else 1
    regular = bool((gaps == step).all())
    if not regular and (gaps % step).any():
        step = int(np.gcd.reduce(gaps))
    time_code, times = (0, b"") if regular else _planes(gaps // step)
    nan = np.isnan(v)
    gone = np.packbits(nan).tobytes() if nan.any() else b""
    found = integers or as_integers(v, nan, decimals)
    beside = times + gone
    common = REGULAR * regular | _HAS_NAN * bool(gone)
    flags, scale, start, width, body = _float_form(beside, v) if found is None else _integer_form(beside, *found)
    head = block_head(common | flags, scale, decimals, time_code << 6 | width, t.size, step, start)
    return Block(int(t[0]), int(t[-1]), int(t.size), head + body, int(nan.sum()) if gone else 0)


def _float_form(beside: bytes, v: Values) -> _Form:
    values = v.astype("<f8").tobytes()
    deflated, body = _shorter(beside, values, _deflate(values))
    return _FLOAT | deflated, 0, 0, 0, body


def _integer_form(beside: bytes, scale: int, whole: Integers) -> _Form:
    """Integers behind what stands `beside` them: their differences deflated, or offsets from the least in bits."""
    low = int(whole.min())
    bits = int(whole.max() - low).bit_length()
    code, planes = _planes(whole[1:] - whole[:-1])
    small = _deflate(planes)
    if bits > 32 or len(small) < whole.size * bits / 8:
        deflated, body = _shorter(beside, planes, small)
        return deflated, scale, int(whole[0]), code, body
    packed = _bit_packed(whole - low, bits)  # as dense as deflating it would be
    deflated, body = _shorter(beside, packed, _deflate(packed, level=0)) if beside else (0, packed)
    return BITS | deflated, scale, low, bits, body


def _shorter(beside: bytes, values: bytes, small: bytes) -> tuple[int, bytes]:
    """Both as they are or deflated, whichever is shorter, with its flag; `small` are the values, deflated.

    What stands beside ends on a whole byte, so that values deflated alone behind it are one stream to who reads it.
    """
    body = _deflate(beside, end=zlib.Z_SYNC_FLUSH) + small if beside else small
    return (_DEFLATED, body) if len(body) < len(beside) + len(values) else (0, beside + values)


def _deflate(body: bytes, level: int = 1, end: int = zlib.Z_FINISH) -> bytes:
    """Deflated by runs and frequencies alone; level 0 leaves the bytes as they are.

    Measured values stand still or scatter, and repeat no longer stretch of bytes: to look for one takes several times
    as long and costs, by up to a fifth, room.
    """
    packer = zlib.compressobj(level, zlib.DEFLATED, -15, 8, zlib.Z_RLE)
    return packer.compress(body) + packer.flush(end)


def as_integers(v: Values, nan: NDArray[np.bool_], decimals: int) -> tuple[int, Integers] | None:
    """The power of ten that makes every value whole, tried from the decimals as written. NaN repeats the last."""
    if nan.any():
        last = np.maximum.accumulate(np.where(nan, 0, np.arange(v.size)))
        v = np.nan_to_num(v[last], nan=0.0)
    if not (np.abs(v) < _EXACT).all() or np.signbit(v[v == 0.0]).any():
        return None
    for scale in dict.fromkeys((min(decimals, _MAX_SCALE), *range(_MAX_SCALE + 1))):
        factor = 10.0**scale
        whole = np.rint(v * factor)
        if (np.abs(whole) < _EXACT).all() and np.array_equal(whole / factor, v):
            return scale, whole.astype(np.int64)
    return None


def _planes(whole: Integers) -> tuple[int, bytes]:
    """Integers in the narrowest width that holds them, by byte planes (which deflate better), with its code."""
    top = int(np.abs(whole).max()) if whole.size else 0
    code = next(c for c, w in enumerate(_WIDTHS) if top < 1 << (8 * w - 1))
    packed = np.ascontiguousarray(whole.astype(_INTS[_WIDTHS[code]]))
    return code, packed.view(np.uint8).reshape(-1, _WIDTHS[code]).T.tobytes()


def _from_planes(raw: bytes, code: int, n: int) -> Integers:
    width = _WIDTHS[code]
    planes = np.frombuffer(raw, np.uint8).reshape(width, n)
    return np.ascontiguousarray(planes.T).view(_INTS[width]).reshape(n).astype(np.int64)


def _bit_packed(whole: Integers, bits: int) -> bytes:
    size = next(w for w in (8, 16, 32) if bits <= w)
    as_bits = np.unpackbits(whole.astype(f">u{size // 8}").view(np.uint8)).reshape(-1, size)
    return np.packbits(as_bits[:, size - bits :]).tobytes()


def _from_bits(raw: bytes, bits: int, n: int) -> Integers:
    if bits == 0:
        return np.zeros(n, np.int64)
    if bits > 32:
        raise ValueError("width")
    size = next(w for w in (8, 16, 32) if bits <= w)
    wide = np.zeros((n, size), np.uint8)
    wide[:, size - bits :] = np.unpackbits(np.frombuffer(raw, np.uint8), count=n * bits).reshape(n, bits)
    return np.packbits(wide.reshape(-1)).view(f">u{size // 8}").astype(np.int64)


def _zigzag(value: int) -> int:
    return value << 1 if value >= 0 else (-value << 1) - 1


def _varint(value: int) -> bytes:
    out = bytearray()
    while value > 127:
        out.append(value & 127 | 128)
        value >>= 7
    out.append(value)
    return bytes(out)


def _read_varint(blob: bytes, at: int) -> tuple[int, int]:
    value = shift = 0
    while True:
        byte = blob[at]
        value |= (byte & 127) << shift
        at, shift = at + 1, shift + 7
        if byte < 128:
            return value, at


def decode(blob: bytes, t0: int, sha: bytes | None = None) -> tuple[Times, Values, int]:
    """The samples of a block: times int64 us UTC and values float64, shapes (n,), and decimals as written.

    Raises:
        StoreError: `store.damaged_chunk` when the bytes are not those that were written.
    """
    if sha is not None and sha256(blob).digest() != sha:
        raise store_error("store.damaged_chunk", t0=t0)
    try:
        return _decode(blob, t0)
    except (IndexError, zlib.error, ValueError, OverflowError, MemoryError) as error:
        raise store_error("store.damaged_chunk", t0=t0) from error


def _decode(blob: bytes, t0: int) -> tuple[Times, Values, int]:
    flags, scale, widths = blob[0], blob[1] & 15, blob[2]
    n, at = _read_varint(blob, 3)
    if not 0 < n <= _MOST:
        raise ValueError("length")
    step, at = _read_varint(blob, at)
    start, at = _read_varint(blob, at)
    start = start >> 1 if not start & 1 else -((start + 1) >> 1)
    body = zlib.decompress(blob[at:], -15) if flags & _DEFLATED else blob[at:]
    time_bytes = 0 if flags & REGULAR else _WIDTHS[widths >> 6] * (n - 1)
    nan_bytes = (n + 7) // 8 if flags & _HAS_NAN else 0
    if flags & REGULAR:
        t = t0 + step * np.arange(n, dtype=np.int64)
    else:
        t = np.empty(n, np.int64)
        t[0] = t0
        t[1:] = t0 + step * np.cumsum(_from_planes(body[:time_bytes], widths >> 6, n - 1))
    v = _values(body[time_bytes + nan_bytes :], flags, scale, widths & 63, start, n)
    if nan_bytes:
        gone = np.frombuffer(body[time_bytes : time_bytes + nan_bytes], np.uint8)
        v[np.unpackbits(gone, count=n).astype(np.bool_)] = np.nan
    return t, v, blob[1] >> 4


def _values(raw: bytes, flags: int, scale: int, width: int, start: int, n: int) -> Values:
    if flags & _FLOAT:
        return np.frombuffer(raw, "<f8", n).astype(np.float64)
    if flags & BITS:
        whole = start + _from_bits(raw, width, n)
    else:
        whole = np.empty(n, np.int64)
        whole[0] = start
        whole[1:] = start + np.cumsum(_from_planes(raw, width, n - 1))
    exact: Values = whole / 10.0**scale
    return exact
