"""One hash chain over all batches: each batch's hash covers its rows, its facts and the hash before it.

A row's digest is SHA-256 over its salt and its columns as JSON (numbers as their shortest exact text); a blob
stands in it by its own SHA-256. So a row can be erased later and its digest kept, without breaking the chain
and without letting the value be guessed.
"""

from __future__ import annotations

import json
from collections.abc import Iterable, Mapping
from hashlib import sha256
from operator import itemgetter
from typing import Any

import msgspec
import sqlalchemy as sa

from storage.schema import LEDGER_ROWS, batch

GENESIS = "0" * 64
_UNCHAINED = frozenset({"salt", "blob", "data"})
ROW_COLUMNS: dict[str, tuple[str, ...]] = {
    t.name: tuple(c.name for c in t.columns if c.name not in _UNCHAINED) for t in LEDGER_ROWS
}
_WITH_SHA = frozenset({"chunk", "document"})
_encode = json.JSONEncoder(ensure_ascii=False, separators=(",", ":"), allow_nan=False).encode
_CHUNK = "chunk"
_chunk_columns = itemgetter(*ROW_COLUMNS[_CHUNK])
_SHA_AT = 1 + ROW_COLUMNS[_CHUNK].index("sha")
_encode_plain = msgspec.json.Encoder().encode  # the same text as `_encode` gives for whole numbers and texts
_HEADER = tuple(c.name for c in batch.columns if c.name != "hash")


def row_digest(table: str, row: Mapping[str, Any]) -> str:
    """The digest of one ledger row, as hex."""
    if table == _CHUNK:
        return _chunk_digest(row)
    values = [table, *(row[name] for name in ROW_COLUMNS[table])]
    if table in _WITH_SHA:
        values = [value.hex() if isinstance(value, bytes) else value for value in values]
    return sha256(row["salt"] + _encode(values).encode()).hexdigest()


def _chunk_digest(row: Mapping[str, Any]) -> str:
    """The same for a block of samples, whose columns hold no fractions: a file brings tens of thousands of them."""
    values = [_CHUNK, *_chunk_columns(row)]
    sha = values[_SHA_AT]
    if not isinstance(sha, bytes):
        raise TypeError(f"the digest of a block is {sha!r}")
    values[_SHA_AT] = sha.hex()
    return sha256(row["salt"] + _encode_plain(values)).hexdigest()


def rows_digest(digests: Iterable[str]) -> str:
    """The digest of a batch's rows, in order of sequence."""
    total = sha256()
    for one in digests:
        total.update(bytes.fromhex(one))
    return total.hexdigest()


def batch_hash(header: Mapping[str, Any]) -> str:
    """The hash of a batch: over all its facts, its rows' digest and the hash before it among them."""
    text = _encode([header[name] for name in _HEADER])
    return sha256(text.encode()).hexdigest()


def last_batch(connection: sa.Connection) -> sa.RowMapping | None:
    """The newest batch, or None in an empty store."""
    return connection.execute(sa.select(batch).order_by(batch.c.seq.desc()).limit(1)).mappings().first()
