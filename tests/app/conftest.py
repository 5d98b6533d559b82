"""What tests of the application share: the window on two beds, commands on a store. No test leaves its policy in the
names of the next."""

from collections.abc import Iterator
from pathlib import Path

import pytest
from pytestqt.qtbot import QtBot

from app.policy.names import use
from app.window.main import MainWindow
from core.judgement.policy import shipped_policy
from tests.support.command_line import HEADER, ROWS, Run, on_store
from tests.support.open_window import make_store, open_window, settled


@pytest.fixture(autouse=True)
def shipped_names() -> Iterator[None]:
    """Names say the shipped limits until a test opens a store with others."""
    yield
    use(shipped_policy())


@pytest.fixture
def window(qtbot: QtBot, tmp_path: Path) -> Iterator[MainWindow]:
    """The window on a store of two beds, with its figures shown."""
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as made:
        yield made


@pytest.fixture
def on_bed_7(qtbot: QtBot, window: MainWindow) -> MainWindow:
    """The same with the bed in hand that does not respond."""
    window.select("bed-7")
    settled(qtbot, window)
    return window


@pytest.fixture
def store(tmp_path: Path) -> Path:
    """Where a store may be made."""
    return tmp_path / "ward.luffmark"


@pytest.fixture
def log_file(tmp_path: Path) -> Path:
    """The log of one bed."""
    path = tmp_path / "log.csv"
    path.write_text(HEADER + ROWS, "utf-8")
    return path


@pytest.fixture
def run(store: Path, capsys: pytest.CaptureFixture[str]) -> Run:
    """Runs a command on the store; gives exit code, stdout and stderr."""
    return on_store(store, capsys, "--zone", "UTC")
