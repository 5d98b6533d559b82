"""The printed handover: every required line on paper, on both papers, readable without colour, never clipped."""

from __future__ import annotations

import re
from dataclasses import replace
from io import BytesIO
from pathlib import Path

import pytest
from pypdf import PdfReader

from app import demo
from app.handover.plain import handover_text
from app.look.formats import ABSENT
from app.operations import handover as operations
from app.operations.outcome import CancelledError, watched
from app.sheet.content import sheet_content
from app.sheet.gas_table import GasRow
from app.sheet.paper import PAPERS
from app.sheet.press import LEAST_PRINT
from app.sheet.printing import pdf_bytes, write_pdf
from app.sheet.shapes import ChangeLine, FlagLine, SheetContent
from app.words import Reader
from core.record.instant import HOUR, parse
from core.record.message import RecordError
from storage.store import Store
from tests.app.sheet.conftest import START
from tests.support.pdf_text import flat, flat_pages
from tests.support.sample_ward import sample_night

HEADINGS = (
    "Settings now", "Leak, interface", "What changed", "Changes this shift and their responses",
    "The shift on one clock", "Gases",
    "Flags, open and settled", "Due in the next 4 h", "Levers that could act", "Plan, calls", "Care",
)  # fmt: skip
SIZES = {"A4": (595, 842), "Letter": (612, 792)}
pytestmark = pytest.mark.usefixtures("application")


def test_one_page_for_the_ward_and_one_for_each_episode(printed: tuple[str, bytes], content: SheetContent) -> None:
    paper, data = printed
    reader = PdfReader(BytesIO(data))
    assert len(reader.pages) == 1 + len(content.episodes)
    for page in reader.pages:
        assert (round(page.mediabox.width), round(page.mediabox.height)) == SIZES[paper]


def test_every_page_has_its_number_the_head_of_the_ledger_and_the_cautions(
    printed: tuple[str, bytes], content: SheetContent
) -> None:
    texts = flat_pages(printed[1])
    for number, text in enumerate(texts, 1):
        assert flat(f"Page {number} of {len(texts)}") in text
        assert flat(content.head) in text
        assert flat(content.caution) in text
        assert flat(content.printed) in text
        for words in ("Given by", "Taken by", "A. Giver"):
            assert flat(words) in text


def test_the_wards_page_says_all_of_every_episode(printed: tuple[str, bytes], content: SheetContent) -> None:
    text = flat_pages(printed[1])[0]
    ward = content.ward
    assert flat(f"See first {ward.see_first}") in text
    assert ward.see_first.startswith("Bed 4"), "the patient who must be escalated comes first"
    for row in ward.rows:
        for part in (f"{row.number} {row.label}", row.who, row.state, row.support, row.limits):
            assert flat(part) in text, part
        quiet = row.tier not in ("escalate", "concern") and not row.is_grave
        elsewhere = quiet and flat(row.label) in text.partition(flat("On their own pages stand"))[2]
        assert flat(row.response) in text or elsewhere, row.label
        for flag in row.flags:
            tier, _, words = flag.partition(" ")
            assert flat(tier + words) in text
        assert flat(row.remarks) in text
    assert all(flat(r.action) in text for r in ward.rows)
    for item in (*ward.due, *ward.due_other, ward.skin, *ward.missing, ward.compared):
        assert flat(item) in text, item


def test_an_episodes_page_says_all_that_is_handed_over(printed: tuple[str, bytes], content: SheetContent) -> None:
    for text, page in zip(flat_pages(printed[1])[1:], content.episodes, strict=True):
        assert text.startswith(flat(page.label))
        parts = [
            page.subtitle,
            page.standing,
            *(d.partition(": ")[0] for d in page.due),
            *page.told,
            *page.levers,
            page.since_head,
        ]
        assert any(all(flat(line) in text for line in told) for told in (page.since, page.since_short)), page.label
        parts += [x for fact in (*page.facts, *page.support) for x in fact]
        parts += [x for fact in (*page.plan, *page.care) if fact[1] != ABSENT for x in fact]
        parts += [x for c in page.changes[-1:] for x in (c.at, c.what, c.response)]
        parts += [f.head.partition(" ")[2] for f in page.flags if f.is_open]
        strong = (f for f in page.flags if f.tier == "escalate" and f.is_open and f.is_strongest)
        parts += [f"{f.evidence} {f.source}" for f in strong]
        parts += [x for f in page.flags if not f.is_open for x in (f.marker, f.spell)]
        for part in parts:
            assert flat(part) in text, (page.label, part)
        for name in (n for n, value in (*page.plan, *page.care) if value == ABSENT):
            assert flat(name).lower() in text.lower(), "what was not recorded is named"
        for g in page.gases[-5:]:
            values = f"{g.ph} {g.delta_ph} {g.paco2} {g.delta_paco2} {g.pao2} {g.hco3}"
            row = [g.at, g.site, values, g.state, g.verdict]
            assert all(flat(cell) in text for cell in row), (page.label, row)
        for change in page.changes[:-1]:
            assert flat(change.response) in text or flat(change.brief) in text, "every change has its verdict"
        for heading in (*HEADINGS, "Handover remark", "Given by", "Taken by", "Time"):
            assert flat(heading) in text, heading


def test_no_letter_is_smaller_than_can_be_read(printed: tuple[str, bytes]) -> None:
    """Sizes of the drawn letters, from the matrices of the PDF; DejaVu's small letters are high for their size."""
    sizes: set[float] = set()

    def note(text: str, cm: list[float], tm: list[float], font: object, size: float) -> None:
        if text.strip():
            sizes.add(round(size * abs(tm[3] * cm[3]), 2))

    for page in PdfReader(BytesIO(printed[1])).pages:
        page.extract_text(visitor_text=note)
    assert min(sizes) >= LEAST_PRINT - 0.05, sorted(sizes)[:5]
    assert max(sizes) > 12


def test_certainty_stands_beside_every_source(content: SheetContent) -> None:
    flags = [f for page in content.episodes for f in page.flags]
    assert len(flags) > 20
    sure = "(confirmed|secondary|from memory|computed here|common practice)"
    known = rf"\[{sure}(; .*{sure})?\]$"
    assert all(re.search(known, f.source) for f in flags)


def test_it_is_printed_without_colour(printed: tuple[str, bytes]) -> None:
    for page in PdfReader(BytesIO(printed[1])).pages:
        stream = page.get_contents()
        assert stream is not None
        for r, g, b in re.findall(rb"([\d.]+) ([\d.]+) ([\d.]+) (?:scn|SCN|rg|RG)\b", stream.get_data()):
            assert r == g == b


def test_plain_text_has_the_same_words(content: SheetContent) -> None:
    text = flat(handover_text(content))
    for page in content.episodes:
        parts = [page.standing, *(v for _, v in (*page.facts, *page.support, *page.plan, *page.care)), *page.due]
        parts += [page.since_head, *page.since, *page.levers]
        parts += [f.head for f in page.flags] + [c.response for c in page.changes]
        for part in parts:
            assert flat(part).replace("\N{MINUS SIGN}", "-").replace("\N{PLUS-MINUS SIGN}", "+-") in text, part
    assert all(len(line) <= 100 for line in handover_text(content).splitlines())
    assert handover_text(content).isascii() or "\N{MINUS SIGN}" not in handover_text(content)


def crowded(content: SheetContent, *, flags: int, changes: int, words: str, strongest: bool = False) -> SheetContent:
    """The first episode with more of everything than a page can hold."""
    page = content.episodes[0]
    change = ChangeLine("03:00", "IPAP 18 to 20 cmH2O", words, "better", "03:00 IPAP 18 to 20 cmH2O: better")
    gas = GasRow("03:10", "art", "7.31", "+0.04", "62", "-6", "66", "31.2", "201", "30 %", "acidotic", "better (1 h)")
    flag = FlagLine("concern", "CONCERN open flag", words, "source [confirmed]", True, strongest)
    made = replace(page, flags=tuple(replace(flag, head=f"CONCERN open flag {n}") for n in range(flags)),
                   changes=(change,) * changes, gases=(gas,) * 30, remark=words)  # fmt: skip
    return replace(content, episodes=(made,))


def test_the_fullest_page_is_one_page_and_says_what_it_leaves_out(content: SheetContent) -> None:
    data, pages = pdf_bytes(crowded(content, flags=3, changes=300, words="Better: pH +0.04 after 1 h."), "Letter")
    assert pages == 2
    text = flat_pages(data)[1]
    assert re.search(flat(r"\d+ earlier changes not shown: see the record"), text)
    assert flat("25 earlier gases not shown: see the record") in text
    assert flat("Earlier, by verdict alone: 03:00 IPAP 18 to 20 cmH2O: better;") in text
    assert all(flat(f"open flag {n}") in text for n in range(3))


def test_twenty_changes_keep_their_verdicts_on_one_page(content: SheetContent) -> None:
    """What has no room for its words stands by its verdict: every change of the shift is there."""
    full = crowded(content, flags=2, changes=20, words="Better: pH +0.04 after 1 h.")
    changes = tuple(replace(c, brief=f"change {n:02d}: better", what=f"what {n:02d}")
                    for n, c in enumerate(full.episodes[0].changes))  # fmt: skip
    data, pages = pdf_bytes(replace(full, episodes=(replace(full.episodes[0], changes=changes),)), "Letter")
    assert pages == 2
    text = flat_pages(data)[1]
    for n in range(20):
        assert f"change{n:02d}:better" in text or f"what{n:02d}" in text, n
    assert "changesnotshown" not in text


def test_open_flags_are_never_left_out(content: SheetContent) -> None:
    data, _ = pdf_bytes(crowded(content, flags=60, changes=60, words="x " * 200), "Letter")
    text = "".join(flat_pages(data)[1:])
    assert all(re.search(f"openflag{n}[;.]", text) for n in range(60))
    assert flat("Evidence and sources of the flags of concern: see the record.") not in text, "none is the strongest"


def test_what_no_words_make_fit_goes_on_on_further_pages_and_says_so(content: SheetContent) -> None:
    data, pages = pdf_bytes(crowded(content, flags=90, changes=60, words="x " * 200, strongest=True), "Letter")
    texts = flat_pages(data)[1:]
    assert pages > 2
    assert flat("Goes on on the next page.") in texts[0]
    assert all("continued" in t for t in texts[1:])
    assert all(re.search(f"openflag{n}\\D", "".join(texts)) for n in range(90))


def test_a_remark_longer_than_a_page_is_printed_whole(content: SheetContent) -> None:
    words = "\n".join(f"line{n} of what was typed by hand" for n in range(150))
    page = replace(content.episodes[0], remark=words)
    data, pages = pdf_bytes(replace(content, episodes=(page,)))
    text = "".join(flat_pages(data))
    assert all(flat(f"line{n} of what") in text for n in range(150))
    assert pages > 2
    assert flat("the remark stands on the next page") in text


def test_a_very_long_word_is_broken_and_not_clipped(content: SheetContent) -> None:
    word = "W" * 300
    long = {"plan": (("Plan", word),), "label": "Bed " + "9" * 80, "remark": "first line\nsecond line"}
    data, _ = pdf_bytes(replace(content, episodes=(replace(content.episodes[0], **long),)))
    text = "".join(flat_pages(data)[1:])
    assert text.count("W") >= 300
    assert flat("first line second line") in text


def test_markup_in_a_note_stays_text(content: SheetContent) -> None:
    page = replace(content.episodes[0], plan=(("Plan", "<b>bold</b> & <img src=x>"),), remark="<script>")
    text = flat_pages(pdf_bytes(replace(content, episodes=(page,)))[0])[1]
    assert flat("<b>bold</b> & <img src=x>") in text
    assert "<script>" in text


def test_a_ward_with_nobody_says_so(content: SheetContent) -> None:
    nothing = {"rows": (), "due": (), "due_other": (), "missing": (), "skin": ""}
    ward = replace(content.ward, **nothing, see_first="No episode stands out.")
    data, pages = pdf_bytes(replace(content, ward=ward, episodes=()))
    assert pages == 1
    for words in ("No episode stood in this shift.", "Nothing is due."):
        assert flat(words) in flat_pages(data)[0]


def test_a_large_ward_goes_on_to_further_pages_and_signs_once(content: SheetContent) -> None:
    ward = replace(content.ward, rows=content.ward.rows * 4)
    data, pages = pdf_bytes(replace(content, ward=ward, episodes=()))
    texts = flat_pages(data)
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


@pytest.fixture(scope="module")
def since_a_closed_one(tmp_path_factory: pytest.TempPathFactory) -> SheetContent:
    """The night, with a handover closed at 02:00 in it."""
    now = demo.demo_now()
    with Store.open(sample_night(tmp_path_factory.mktemp("closed"))) as store:
        first = operations.HandoverRequest(START - 4 * HOUR, parse("2026-03-28T02:00:00Z"))
        made = operations.prepare(store, "AB", now, first).value
        kept = operations.ClosedHandover("Night, AB to CD", b"%PDF", operations.facts_of(made))
        operations.close(store, "AB", now, kept)
        shift = operations.HandoverRequest(START, now)
        return sheet_content(operations.prepare(store, "AB", now, shift).value, Reader(demo.ZONE))


@pytest.mark.parametrize("paper", sorted(PAPERS))
def test_after_a_closed_one_each_episode_still_has_one_page(since_a_closed_one: SheetContent, paper: str) -> None:
    """The fullest pages of the night: every change since the last handover comes on top."""
    content = since_a_closed_one
    data, pages = pdf_bytes(content, paper)
    assert pages == 1 + len(content.episodes)
    texts = flat_pages(data)
    assert flat("told since the last closed handover, as of 28-Mar-2026 02:00: Night, AB to CD.") in texts[0]
    for text, page in zip(texts[1:], content.episodes, strict=True):
        assert flat("Since the last handover, 28-Mar-2026 02:00: ") in text
        assert any(all(flat(line) in text for line in told) for told in (page.since, page.since_short)), page.label
    told = {p.label: " ".join(p.since) for p in content.episodes}
    assert "Settings: IPAP 18 to 24 cmH2O, FiO2 30 to 35 %, backup rate 14 to 16/min." in told["Bed 4"]
    assert "Flags raised: pH below 7.20 on support 04:18;" in told["Bed 4"]
    assert "no longer met" in told["Bed 5"]
