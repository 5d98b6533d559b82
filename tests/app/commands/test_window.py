"""`luffmark` alone opens the store opened last, so that nobody meets the damaged one again after a restore."""

from pathlib import Path

import pytest

from app.cli import main
from app.commands.context import default_store
from app.keeping import preferences as kept
from app.keeping.preferences import Preferences
from app.window import start


@pytest.fixture
def opened(monkeypatch):
    """What the window was opened on."""
    told: list[Path | None] = []

    def opens(store=None, _passphrase=None, _by=""):
        told.append(store)
        return 0

    monkeypatch.setattr(start, "run_window", opens)
    return told


def test_the_store_named_the_one_opened_last_the_usual_one_or_none(opened, tmp_path):
    assert main([]) == 0
    usual = default_store()
    usual.parent.mkdir(parents=True, exist_ok=True)
    usual.write_bytes(b"")
    assert main([]) == 0
    new, gone = tmp_path / "ward-restored.luffmark", tmp_path / "gone.luffmark"
    new.write_bytes(b"")
    kept.save(kept.default_path(), Preferences(recent_stores=(str(gone), str(new), str(usual))))
    assert main([]) == 0
    assert main(["--store", str(gone)]) == 0
    assert opened == [None, usual, new, gone]
