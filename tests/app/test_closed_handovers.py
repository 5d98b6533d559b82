"""Closed handovers, fetched by the window."""

from pypdf import PdfReader

from app.operations import handover
from app.sheet.operations import CloseRequest, close
from storage.store import Store
from tests.support.open_window import NOW, settled


def test_of_two_that_are_asked_for_at_once_each_goes_under_its_own_name(qtbot, window, tmp_path):
    def closes(taken: str) -> str:
        request = CloseRequest(window.doers.ward.handover_request(), window.plain_reader, "AB", taken)
        with Store.open(window.model.session.store_path) as store:
            close(store, "AB", NOW, request)
            return handover.closed_list(store, "", NOW, None).value[0].id

    first, second = closes("CD"), closes("EF")
    deeds = window.doers.review
    for document, name in ((first, "cd.pdf"), ("gone", "gone.pdf"), (second, "ef.pdf")):
        deeds.fetch_closed(document, tmp_path / name)
    settled(qtbot, window)
    texts = {p.name: PdfReader(p).pages[0].extract_text() for p in tmp_path.glob("*.pdf")}
    assert texts.keys() == {"cd.pdf", "ef.pdf"}
    assert "CD" in texts["cd.pdf"]
    assert "EF" in texts["ef.pdf"]
