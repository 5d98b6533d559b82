"""The sample night in a store, a copy of it that a test may write to, and a store with the log of one bed."""

from pathlib import Path

import pytest

from app.cli import DONE
from tests.support.command_line import Run
from tests.support.sample_ward import sample_night


@pytest.fixture(scope="module")
def night(tmp_path_factory: pytest.TempPathFactory) -> Path:
    return sample_night(tmp_path_factory.mktemp("night"))


@pytest.fixture
def own(tmp_path: Path) -> Path:
    return sample_night(tmp_path).rename(tmp_path / "own.luffmark")


@pytest.fixture
def filled(run: Run, log_file: Path) -> Run:
    """Runs a command on a store that holds the log file."""
    code, _, err = run("intake", log_file)
    assert code == DONE, err
    return run
