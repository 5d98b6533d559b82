"""Stores for tests: plain and encrypted, with cheap key derivation, closed after each test."""

from collections.abc import Callable, Iterator
from pathlib import Path

import pytest

from core.record.instant import parse
from storage.keys import Cost
from storage.store import Store

NOW = parse("2026-03-28T02:00:00+00:00")
CHEAP = Cost(64, 1, 1)
PASSPHRASE = "correct horse ward 7"


@pytest.fixture
def now() -> int:
    return NOW


@pytest.fixture
def make_store(tmp_path: Path) -> Iterator[Callable[..., Store]]:
    """Make stores that are closed at the end of the test."""
    made: list[Store] = []

    def make(name: str = "ward.luff", *, encrypted: bool = False, imported: bool = False) -> Store:
        passphrase = PASSPHRASE if encrypted else None
        store = Store.create(tmp_path / name, passphrase=passphrase, now=NOW, imported=imported, cost=CHEAP)
        made.append(store)
        return store

    yield make
    for store in made:
        store.close()


@pytest.fixture
def store(make_store: Callable[..., Store]) -> Store:
    return make_store()


@pytest.fixture(params=[False, True], ids=["plain", "encrypted"])
def either_store(request: pytest.FixtureRequest, make_store: Callable[..., Store]) -> Store:
    """A plain and an encrypted store in turn."""
    return make_store(encrypted=request.param)
