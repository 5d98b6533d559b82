"""The sample night in a store, and a copy of it that a test may write to."""

from pathlib import Path

import pytest

from app import demo
from storage.store import Store


@pytest.fixture(scope="module")
def night(tmp_path_factory) -> Path:
    return demo.make_demo_store(tmp_path_factory.mktemp("night"))


@pytest.fixture
def own(night: Path, tmp_path: Path) -> Path:
    with Store.open(night) as store:
        store.backup(tmp_path / "copy")
    Store.restore(tmp_path / "copy", tmp_path / "own.luffmark")
    return tmp_path / "own.luffmark"
