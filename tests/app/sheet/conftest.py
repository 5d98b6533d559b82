"""The sample night as a handover, gathered once."""

from collections.abc import Iterator
from pathlib import Path

import pytest
from PySide6.QtWidgets import QApplication

from app import demo
from app.operations import handover as operations
from app.operations.handover import Handover
from app.sheet.content import sheet_content
from app.sheet.paper import PAPERS
from app.sheet.printing import pdf_bytes
from app.sheet.shapes import SheetContent
from app.words import Reader
from core.record.instant import parse
from storage.store import Store
from tests.support.sample_ward import sample_night

START = parse("2026-03-27T19:30:00Z")


@pytest.fixture(scope="session")
def night_store(tmp_path_factory: pytest.TempPathFactory) -> Iterator[Store]:
    with Store.open(sample_night(tmp_path_factory.mktemp("night"))) as store:
        yield store


@pytest.fixture(scope="session")
def night(night_store: Store) -> Handover:
    request = operations.HandoverRequest(START, demo.demo_now())
    return operations.prepare(night_store, "AB", demo.demo_now(), request).value


@pytest.fixture(scope="session")
def content(night: Handover) -> SheetContent:
    return sheet_content(night, Reader(demo.ZONE), given_by="A. Giver")


@pytest.fixture(scope="session", params=sorted(PAPERS))
def printed(request: pytest.FixtureRequest, content: SheetContent, qapp: QApplication) -> tuple[str, bytes]:
    """The sample night on each paper: its name, and the bytes of the PDF."""
    return request.param, pdf_bytes(content, request.param)[0]


@pytest.fixture
def own(tmp_path: Path) -> Iterator[Store]:
    """The sample night in a store that a test may write to."""
    with Store.open(sample_night(tmp_path)) as store:
        yield store


@pytest.fixture
def application(qapp: QApplication) -> QApplication:
    return qapp


@pytest.fixture
def out(tmp_path: Path) -> Path:
    return tmp_path / "handover.pdf"
