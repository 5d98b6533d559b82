"""The paper form asks for everything that the printed sheet says, on both papers."""

from io import BytesIO

import pytest
from pypdf import PdfReader

from app.sheet.blank import CARE, FACTS, blank_bytes
from app.sheet.gas_table import HEADINGS
from app.sheet.paper import PAPERS
from app.telling.caution_texts import CAUTION
from core.record.message import RecordError
from tests.support.pdf_text import flat, flat_pages


@pytest.mark.parametrize("paper", sorted(PAPERS))
def test_every_question_stands_on_the_form(qapp, paper):
    data, count = blank_bytes(paper, episodes=2)
    ward, one, two = flat_pages(data)
    assert count == 3
    for asked in ("Shift from", "See first", "All episodes, in order of concern", "Due in the next 4 h", "Given by"):
        assert flat(asked) in ward
    for asked in (
        *FACTS,
        *CARE,
        *HEADINGS,
        "What changed",
        "Levers noted",
        "Settings now",
        "Flags",
        "Handover remark",
        "Given by",
        "Taken by",
    ):
        assert flat(asked) in one
    assert one.replace("Page2", "") == two.replace("Page3", "")
    for n, text in enumerate((ward, one, two), 1):
        assert f"Page{n}of3" in text
        assert flat(CAUTION) in text
        assert flat("nothing on it is from the record") in text


def test_the_paper_is_what_was_asked_for(qapp):
    width = {paper: float(PdfReader(BytesIO(blank_bytes(paper)[0])).pages[0].mediabox.width) for paper in PAPERS}
    assert width["A4"] == pytest.approx(595, abs=1)
    assert width["Letter"] == pytest.approx(612, abs=1)
    with pytest.raises(RecordError):
        blank_bytes("A5")
