"""The printed handover: every required line on paper, on both papers, readable without colour, never clipped."""

from __future__ import annotations

import re
from dataclasses import replace
from io import BytesIO
from pathlib import Path

import pytest
from pypdf import PdfReader
from PySide6.QtWidgets import QApplication

from app.operations import handover as operations
from app.operations.outcome import CancelledError, watched
from app.plain_handover import handover_text
from app.sheet.gas_table import GasRow
from app.sheet.printing import PAPERS, pdf_bytes, write_pdf
from app.sheet.shapes import ChangeLine, FlagLine, SheetContent
from core.record.message import RecordError
from storage.store import Store

SIZES = {"A4": (595, 842), "Letter": (612, 792)}
pytestmark = pytest.mark.usefixtures("application")


def pages_of(data: bytes) -> list[str]:
    """The text of each page without its spaces: lines may be broken anywhere."""
    return [_flat(page.extract_text()) for page in PdfReader(BytesIO(data)).pages]


def _flat(text: str) -> str:
    return re.sub(r"\s+", "", text)


@pytest.fixture(scope="module", params=sorted(PAPERS))
def printed(request: pytest.FixtureRequest, content: SheetContent, qapp: QApplication) -> tuple[str, bytes]:
    return request.param, pdf_bytes(content, request.param)[0]


def test_one_page_for_the_ward_and_one_for_each_episode(printed: tuple[str, bytes], content: SheetContent) -> None:
    paper, data = printed
    reader = PdfReader(BytesIO(data))
    assert len(reader.pages) == 1 + len(content.episodes)
    for page in reader.pages:
        assert (round(page.mediabox.width), round(page.mediabox.height)) == SIZES[paper]


def test_every_page_has_its_number_the_head_of_the_ledger_and_the_cautions(
    printed: tuple[str, bytes], content: SheetContent
) -> None:
    texts = pages_of(printed[1])
    for number, text in enumerate(texts, 1):
        assert _flat(f"Page {number} of {len(texts)}") in text
        assert _flat(content.head) in text
        assert _flat(content.caution) in text
        assert _flat(content.printed) in text
        for words in ("Given by", "Taken by", "A. Giver"):
            assert _flat(words) in text


def test_the_wards_page_says_all_of_every_episode(printed: tuple[str, bytes], content: SheetContent) -> None:
    text = pages_of(printed[1])[0]
    ward = content.ward
    assert _flat(f"See first {ward.see_first}") in text
    assert ward.see_first.startswith("Bed 4"), "the patient who must be escalated comes first"
    for row in ward.rows:
        for part in (f"{row.number} {row.label}", row.who, row.state, row.support, row.response, row.limits):
            assert _flat(part) in text, part
        for flag in row.flags:
            tier, _, words = flag.partition(" ")
            assert _flat(tier + words) in text
        assert _flat(row.remarks) in text
    assert all(_flat(r.action) in text for r in ward.rows)
    for item in (*ward.due, ward.skin, *ward.missing):
        assert _flat(item) in text, item


def test_an_episodes_page_says_all_that_is_handed_over(printed: tuple[str, bytes], content: SheetContent) -> None:
    for text, page in zip(pages_of(printed[1])[1:], content.episodes, strict=True):
        assert text.startswith(_flat(page.label))
        parts = [page.subtitle, page.standing, page.settings, page.leak, page.plan, page.jobs, *page.due, *page.told]
        parts += [x for fact in (*page.facts, *page.care) for x in fact]
        parts += [x for c in page.changes[-4:] for x in (c.at, c.what, c.response)]
        parts += [f.head.partition(" ")[2] for f in page.flags if f.is_open]
        parts += [f.evidence + " " + f.source for f in page.flags if f.is_open and f.is_strongest]
        for part in parts:
            assert _flat(part) in text, (page.label, part)
        for g in page.gases[-3:]:
            row = [g.at, g.site, f"{g.ph} ({g.delta_ph})" if g.delta_ph else g.ph, g.state, g.verdict]
            assert all(_flat(cell) in text for cell in row), (page.label, row)
        for heading in ("Settings now", "Changes this shift and their responses", "The shift on one clock", "Gases",
                        "Flags", "Due in the next 4 h", "Plan and care", "Remark"):  # fmt: skip
            assert _flat(heading) in text


def test_certainty_stands_beside_every_source(content: SheetContent) -> None:
    flags = [f for page in content.episodes for f in page.flags]
    assert len(flags) > 20
    known = r"\[(confirmed|secondary|from memory|computed here|common practice)\]$"
    assert all(re.search(known, f.source) for f in flags)


def test_it_is_printed_without_colour(printed: tuple[str, bytes]) -> None:
    for page in PdfReader(BytesIO(printed[1])).pages:
        stream = page.get_contents()
        assert stream is not None
        for r, g, b in re.findall(rb"([\d.]+) ([\d.]+) ([\d.]+) (?:scn|SCN|rg|RG)\b", stream.get_data()):
            assert r == g == b


def test_plain_text_has_the_same_words(content: SheetContent) -> None:
    text = _flat(handover_text(content))
    for page in content.episodes:
        parts = [page.settings, page.leak, page.standing, *(v for _, v in page.facts), *page.due]
        parts += [f.head for f in page.flags] + [c.response for c in page.changes]
        for part in parts:
            assert _flat(part).replace("\N{MINUS SIGN}", "-") in text, part
    assert all(len(line) <= 100 for line in handover_text(content).splitlines())
    assert handover_text(content).isascii() or "\N{MINUS SIGN}" not in handover_text(content)


def crowded(content: SheetContent, *, flags: int, changes: int, words: str) -> SheetContent:
    """The first episode with more of everything than a page can hold."""
    page = content.episodes[0]
    change = ChangeLine("03:00", "IPAP 18 to 20 cmH2O", words, "better")
    gas = GasRow("03:10", "art", "7.31", "+0.04", "62", "-6", "66", "31.2", "201", "30 %", "acidotic", "better (1 h)")
    flag = FlagLine("concern", "CONCERN open flag", words, "source [confirmed]", True, False)
    made = replace(page, flags=tuple(replace(flag, head=f"CONCERN open flag {n}") for n in range(flags)),
                   changes=(change,) * changes, gases=(gas,) * 30, remark=words)  # fmt: skip
    return replace(content, episodes=(made,))


def test_too_many_rows_are_left_out_from_the_oldest_and_it_is_said(content: SheetContent) -> None:
    data, pages = pdf_bytes(crowded(content, flags=3, changes=60, words="Better: pH +0.04 after 1 h."), "Letter")
    assert pages == 2
    text = pages_of(data)[1]
    assert _flat("earlier changes not shown: see the record") in text
    assert _flat("gases not shown: see the record") in text
    assert all(_flat(f"open flag {n}") in text for n in range(3))


def test_open_flags_are_never_left_out(content: SheetContent) -> None:
    data, pages = pdf_bytes(crowded(content, flags=60, changes=60, words="x " * 200), "Letter")
    assert pages == 3
    both = " ".join(pages_of(data)[1:])
    assert "continued" in both
    assert all(f"openflag{n}." in both for n in range(60))


def test_a_very_long_word_is_broken_and_not_clipped(content: SheetContent) -> None:
    word = "W" * 300
    page = replace(content.episodes[0], plan=word, label="Bed " + "9" * 80, remark="first line\nsecond line")
    data, _ = pdf_bytes(replace(content, episodes=(page,)))
    text = pages_of(data)[1]
    assert text.count("W") >= 300
    assert _flat("first line second line") in text


def test_markup_in_a_note_stays_text(content: SheetContent) -> None:
    page = replace(content.episodes[0], plan="<b>bold</b> & <img src=x>", remark="<script>")
    text = pages_of(pdf_bytes(replace(content, episodes=(page,)))[0])[1]
    assert _flat("<b>bold</b> & <img src=x>") in text
    assert "<script>" in text


def test_a_ward_with_nobody_says_so(content: SheetContent) -> None:
    ward = replace(content.ward, rows=(), due=(), missing=(), skin="", see_first="No episode stands out.")
    data, pages = pdf_bytes(replace(content, ward=ward, episodes=()))
    assert pages == 1
    for words in ("No episode stood in this shift.", "Nothing is due."):
        assert _flat(words) in pages_of(data)[0]


def test_a_large_ward_goes_on_to_further_pages_and_signs_once(content: SheetContent) -> None:
    ward = replace(content.ward, rows=content.ward.rows * 4)
    data, pages = pdf_bytes(replace(content, ward=ward, episodes=()))
    texts = pages_of(data)
    assert pages == len(texts) > 1
    assert ["Givenby" in t for t in texts] == [False] * (pages - 1) + [True]
    assert all("Handover,continued" in t for t in texts[1:])


def test_the_file_is_written_whole_or_not_at_all(content: SheetContent, out: Path) -> None:
    assert write_pdf(content, out) == 1 + len(content.episodes)
    assert out.read_bytes().startswith(b"%PDF")
    with pytest.raises(OSError, match="gone"):
        write_pdf(content, out.parent / "gone" / "x.pdf")
    assert [p.name for p in out.parent.iterdir()] == [out.name]


def test_an_unknown_paper_is_refused(content: SheetContent) -> None:
    with pytest.raises(RecordError) as refused:
        pdf_bytes(content, "A5")
    assert refused.value.message.key == "handover.paper"


def test_printing_tells_progress_and_can_be_stopped(content: SheetContent) -> None:
    seen: list[tuple[int, int]] = []

    def stop_at_third(done: int, total: int) -> None:
        seen.append((done, total))
        if done == 2:
            raise CancelledError

    with pytest.raises(CancelledError), watched(stop_at_third):
        pdf_bytes(content)
    assert seen == [(0, 13), (1, 13), (2, 13)]


def test_a_closed_handover_is_kept_as_it_was_printed(content: SheetContent, tmp_path: Path) -> None:
    data, _ = pdf_bytes(content)
    with Store.create(tmp_path / "w.luffmark", now=5) as store:
        kept = operations.close(store, "AB", 6, operations.ClosedHandover("night", data)).value
        assert operations.closed(store, "AB", 7, kept).value == data
        assert store.verify() == ()
