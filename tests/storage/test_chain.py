"""The digest of a block of samples is the one that its row's JSON gives, whatever the episode is called."""

from __future__ import annotations

import json
import os
from hashlib import sha256
from typing import Any

import numpy as np
import pytest
from hypothesis import example, given
from hypothesis import strategies as st

from core.record.instant import MINUTE, SECOND
from core.record.samples import DeviceSamples
from storage import ledger
from storage.chain import ROW_COLUMNS, row_digest
from storage.store import Store
from tests.storage.conftest import NOW

WHOLE = st.integers(-(2**63), 2**63 - 1)


def plain_digest(row: dict[str, Any]) -> str:
    """By the words of the module: SHA-256 over the salt and the columns as JSON, a blob by its own SHA-256."""
    values = ["chunk", *(row[name] for name in ROW_COLUMNS["chunk"])]
    values = [v.hex() if isinstance(v, bytes) else v for v in values]
    text = json.dumps(values, ensure_ascii=False, separators=(",", ":"))
    return sha256(row["salt"] + text.encode()).hexdigest()


@given(st.text(st.characters(exclude_categories=["Cs"])), st.lists(WHOLE, min_size=6, max_size=6), st.binary())
@example("".join(map(chr, range(0x80))), [0] * 6, b"")
@example("\u2028\u2029\x7f\x85\ud7ff\ue000\U0010ffff/\\\"'", [-1] * 6, b"\x00\xff")
def test_digest_of_a_chunk(episode: str, numbers: list[int], blob: bytes) -> None:
    names = ("seq", "batch_seq", "source_seq", "t0", "t1", "n")
    row = {**dict(zip(names, numbers, strict=True)), "episode_id": episode, "channel": "leak", "codec": "b1",
           "sha": sha256(blob).digest(), "blob": blob, "salt": os.urandom(16)}  # fmt: skip
    assert row_digest("chunk", row) == plain_digest(row)


def test_many_blocks_are_kept_as_few_are(store: Store, monkeypatch: pytest.MonkeyPatch) -> None:
    t = np.arange(0, 150 * 3600, 60, dtype=np.int64) * SECOND + MINUTE
    for few in (10_000, 100):
        monkeypatch.setattr(ledger, "_MANY", few)
        samples = DeviceSamples(f"E{few}", "leak", "s", t, np.arange(t.size) % 97 / 10, 1)
        store.append([], by="AB", operation="intake", now=NOW, samples=[samples])
    one, other = (store.samples(key)[0] for key in ("E10000", "E100"))
    assert np.array_equal(one.t, other.t)
    assert np.array_equal(one.v, other.v)
    assert store.verify() == ()


def test_a_block_without_its_digest_is_told_as_what_is_never_written() -> None:
    row = dict.fromkeys(ROW_COLUMNS["chunk"]) | {"salt": b"0" * 16}
    with pytest.raises(TypeError):
        row_digest("chunk", row)
