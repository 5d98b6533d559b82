"""What reads a log file's rows, shared by the tests of that file."""

from pathlib import Path

import pytest

from storage.intake.findings import Intake
from storage.intake.log_csv import read_log_csv
from storage.store import Store
from tests.storage.conftest import NOW
from tests.support.log_rows import HEADER, Reader


@pytest.fixture
def read(tmp_path: Path) -> Reader:
    """Read rows under a header as a file."""

    def run(*rows: str, header: str = HEADER, existing: Store | None = None, raw: bytes | None = None) -> Intake:
        path = tmp_path / "log.csv"
        path.write_bytes("\n".join((header, *rows)).encode() + b"\n" if raw is None else raw)
        return read_log_csv(path, now=NOW, existing=existing)

    return run
