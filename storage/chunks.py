"""Device samples as immutable blocks, one per hour: exact, small, quick to decode.

Values that are whole multiples of a power of ten are kept as integers, so that 12.3 comes back as 12.3;
anything else is kept as float64. Integers go as differences in bytes, or as offsets from the least in bits,
deflated where that helps: whichever is smallest. Times that keep one step are not stored at all.
"""

from __future__ import annotations

import zlib
from collections.abc import Iterator
from dataclasses import dataclass
from functools import lru_cache
from hashlib import sha256
from itertools import pairwise

import numpy as np
from numpy.typing import NDArray

from core.record.instant import HOUR
from core.record.message import refuse
from core.record.samples import Times, Values
from storage.errors import store_error

CODEC = "b1"
_REGULAR, _HAS_NAN, _FLOAT, _BITS, _DEFLATED = 1, 2, 4, 8, 16
_MAX_SCALE = 9
_MAX_DECIMALS = 15
_EXACT = 2.0**53
_FEW = 240
_MANY, _SAMPLE = 1_800, 360
_MOST = 4_000_000
"""Samples in a block: an hour at a thousand a second. More is damage, not data."""
_LEVEL = 6
"""How hard to deflate: the highest level takes three times as long and saves less than a hundredth."""
_WIDTHS = (1, 2, 4, 8)
_INTS = {w: np.dtype(f"<i{w}") for w in _WIDTHS}
Integers = NDArray[np.int64]


@dataclass(frozen=True, slots=True)
class Block:
    """One encoded block: `n` samples from `t0` to `t1`, both included."""

    t0: int
    t1: int
    n: int
    blob: bytes

    @property
    def sha(self) -> bytes:
        """SHA-256 of the bytes."""
        return sha256(self.blob).digest()


def hour_blocks(t: Times, v: Values, decimals: int) -> Iterator[Block]:
    """Samples, shape (n,), times strictly increasing, as one block per hour of the clock (UTC)."""
    if t.size == 0:
        return
    edges = np.concatenate(([0], np.flatnonzero(np.diff(t // HOUR)) + 1, [t.size]))
    plain = _plain_hours(t, v, decimals, edges)
    for i, (start, end) in enumerate(pairwise(edges.tolist())):
        yield plain.get(i) or encode(t[start:end], v[start:end], decimals)


def _plain_hours(t: Times, v: Values, decimals: int, edges: Integers) -> dict[int, Block]:
    """The hours of few samples in even steps, packed together: the same blocks would cost ten times as much alone.

    Hours with gaps, NaN, many samples or a wide span are left to `encode`.
    """
    sizes, starts = np.diff(edges), edges[:-1]
    found = _as_integers(v, np.isnan(v), decimals)
    if found is None or sizes.size < 8:
        return {}
    scale, whole = found
    gaps = np.append(np.diff(t), 0)
    first_gap = gaps[starts]
    odd = gaps != np.repeat(first_gap, sizes)
    odd[edges[1:] - 1] = False  # the gap into the next hour is no matter
    odd |= np.isnan(v)
    low = np.minimum.reduceat(whole, starts)
    span = np.maximum.reduceat(whole, starts) - low
    good = ~np.logical_or.reduceat(odd, starts) & (sizes > 1) & (sizes <= _FEW) & (span < 1 << 16)
    bits = np.ceil(np.log2(span + 1.0)).astype(np.int64)
    made: dict[int, Block] = {}
    for n, width in {(int(n), int(b)) for n, b in zip(sizes[good], bits[good], strict=True)}:
        hours = np.flatnonzero(good & (sizes == n) & (bits == width))
        rows = starts[hours, None] + np.arange(n)
        packed = _bit_rows(whole[rows] - low[hours, None], width)
        for k, hour in enumerate(hours.tolist()):
            at = int(starts[hour])
            head = _head(_REGULAR | _BITS, scale, decimals, width, n, int(gaps[at]), int(low[hour]))
            made[hour] = Block(int(t[at]), int(t[at + n - 1]), n, head + packed[k].tobytes())
    return made


def _bit_rows(whole: Integers, bits: int) -> NDArray[np.uint8]:
    """Rows of integers, shape (k, n), each row packed to `bits` bits a number."""
    k, n = whole.shape
    as_bits = np.unpackbits(whole.astype(">u2").view(np.uint8).reshape(k, n, 2), axis=2)
    return np.packbits(as_bits[:, :, 16 - bits :].reshape(k, n * bits), axis=1)


@lru_cache(maxsize=4096)
def _head(flags: int, scale: int, decimals: int, widths: int, n: int, step: int, start: int) -> bytes:
    fixed = bytes((flags, scale | min(decimals, _MAX_DECIMALS) << 4, widths))
    return fixed + _varint(n) + _varint(step) + _varint(_zigzag(start))


def encode(t: Times, v: Values, decimals: int) -> Block:
    """One block of samples: `t` int64 us UTC strictly increasing, `v` float64 (NaN kept), shapes (n,), n > 0."""
    if not 0 < t.size <= _MOST:
        raise refuse("samples.too_many", count=t.size, accepted=_MOST)
    gaps = np.diff(t)
    step = int(np.gcd.reduce(gaps)) if gaps.size else 1
    regular = bool((gaps == step).all())
    time_code, times = (0, b"") if regular else _planes(gaps // step)
    nan = np.isnan(v)
    gone = np.packbits(nan).tobytes() if nan.any() else b""
    common = _REGULAR * regular | _HAS_NAN * bool(gone)
    candidates = []
    for flags, scale, start, width, values in _value_forms(v, nan, decimals):
        body = times + gone + values
        if times or gone or not flags & _BITS:  # bits alone are as dense as deflating them would be
            packer = zlib.compressobj(_LEVEL, zlib.DEFLATED, -15)
            small = packer.compress(body) + packer.flush()
            if len(small) < len(body):
                flags, body = flags | _DEFLATED, small
        head = _head(common | flags, scale, decimals, time_code << 6 | width, t.size, step, start)
        candidates.append(head + body)
    return Block(int(t[0]), int(t[-1]), int(t.size), min(candidates, key=len))


def _value_forms(v: Values, nan: NDArray[np.bool_], decimals: int) -> list[tuple[int, int, int, int, bytes]]:
    """The ways to write the values: (flags, scale, start, width, bytes)."""
    found = _as_integers(v, nan, decimals)
    if found is None:
        return [(_FLOAT, 0, 0, 0, v.astype("<f8").tobytes())]
    scale, whole = found
    code, planes = _planes(np.diff(whole))
    low = int(whole.min())
    bits = int(whole.max() - low).bit_length()
    by_planes = (0, scale, int(whole[0]), code, planes)
    if bits > 32:
        return [by_planes]
    packed = _bit_packed(whole - low, bits)
    in_bits = (_BITS, scale, low, bits, packed)
    return [in_bits] if _is_noise(np.diff(whole), len(packed)) else [by_planes, in_bits]


def _is_noise(steps: Integers, packed: int) -> bool:
    """Whether many differences would hardly deflate below the bits they are packed to, by a part of them."""
    if steps.size < _MANY:
        return False
    some = steps[steps.size // 2 : steps.size // 2 + _SAMPLE]
    return len(zlib.compress(_planes(some)[1], 1)) * steps.size > 1.15 * packed * some.size


def _as_integers(v: Values, nan: NDArray[np.bool_], decimals: int) -> tuple[int, Integers] | None:
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
    as_bytes = whole.astype(">u4").view(np.uint8).reshape(-1, 4)
    return np.packbits(np.unpackbits(as_bytes, axis=1)[:, 32 - bits :]).tobytes()


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
    time_bytes = 0 if flags & _REGULAR else _WIDTHS[widths >> 6] * (n - 1)
    nan_bytes = (n + 7) // 8 if flags & _HAS_NAN else 0
    if flags & _REGULAR:
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
    if flags & _BITS:
        whole = start + _from_bits(raw, width, n)
    else:
        whole = np.empty(n, np.int64)
        whole[0] = start
        whole[1:] = start + np.cumsum(_from_planes(raw, width, n - 1))
    exact: Values = whole / 10.0**scale
    return exact
