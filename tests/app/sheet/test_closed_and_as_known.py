"""A closed handover stays as it was printed; a review says on every page as of when it was known."""

import re
import shutil
from pathlib import Path

import pytest

from app import demo
from app.operations import correction, entry, episode
from app.operations import handover as operations
from app.session.shift import shift_of
from app.sheet.content import sheet_content
from app.sheet.printing import pdf_bytes
from app.words import Reader
from core.judgement.policy import policy_hash, shipped_text
from core.record.instant import HOUR, MINUTE, parse
from storage.errors import StoreError
from storage.store import Store
from tests.app.sheet.conftest import START
from tests.support.pdf_text import page_texts

KNOWN = parse("2026-03-28T02:40:00Z")
NOW = demo.demo_now()


def gather(store: Store, as_known_at=None, end=NOW):
    request = operations.HandoverRequest(START, end, as_known_at)
    return operations.prepare(store, "AB", NOW, request).value


def close(store: Store, given="AB", taken="CD") -> tuple[str, bytes]:
    content = sheet_content(gather(store), Reader(demo.ZONE), given_by=given, taken_by=taken)
    data, _ = pdf_bytes(content)
    name = operations.closed_name(content.ward.shift, given, taken)
    return operations.close(store, "AB", NOW, operations.ClosedHandover(name, data)).value, data


def texts(data: bytes) -> list[str]:
    return [" ".join(text.split()) for text in page_texts(data)]


def test_a_closed_handover_never_changes(qapp, own: Store, tmp_path: Path) -> None:
    head = own.printed_head()
    document, printed = close(own)
    key = own.episode_keys()[0]
    entry.log_line(own, "EF", NOW + HOUR, entry.LineRequest(key, "ph 7.01 paco2 99", "UTC", True))
    gas = next(e for e in own.entries(key) if e.channel == "ph")
    fixed = correction.CorrectionRequest(key, gas.id, "misread", "7.11", confirmed=True)
    correction.correct(own, "EF", NOW + HOUR, fixed)
    text = shipped_text().replace("severe_below_ph = { value = 7.25", "severe_below_ph = { value = 7.30")
    own.put_policy(text, policy_hash(text), "EF", NOW + HOUR)
    assert operations.closed(own, "EF", NOW + HOUR, document).value == printed
    assert sheet_content(gather(own), Reader(demo.ZONE)) != sheet_content(gather(own, NOW), Reader(demo.ZONE))
    assert all(f"Ledger head {head}" in page for page in texts(printed))
    assert all("Given by" in page and "AB" in page and "CD" in page for page in texts(printed)[:1])
    assert not own.verify()
    path = own.path
    own.close()
    shutil.copy(path, tmp_path / "again.luff")
    with Store.open(path) as again:
        assert operations.closed(again, "EF", NOW + 2 * HOUR, document).value == printed
        assert again.proves(head)


def test_closing_again_keeps_both_and_lists_the_newest_first(qapp, own: Store) -> None:
    (first, one), (second, other) = close(own), close(own, taken="XY")
    found = operations.closed_list(own, "AB", NOW, None).value
    assert [d.id for d in found] == [second, first]
    assert [d.size for d in found] == [len(other), len(one)]
    assert found[0].name.endswith("AB to XY")
    with pytest.raises(StoreError):
        operations.closed(own, "AB", NOW, "no such id")


def test_a_review_says_on_every_page_as_of_when_it_was_known(qapp, night_store: Store) -> None:
    content = sheet_content(gather(night_store, KNOWN, KNOWN), Reader(demo.ZONE))
    data, count = pdf_bytes(content)
    pages = texts(data)
    assert len(pages) == count
    assert all("as known at 28-Mar-2026 02:40" in page for page in pages)
    assert "Handover, reviewed" in pages[0]
    usual, _ = pdf_bytes(sheet_content(gather(night_store), Reader(demo.ZONE)))
    assert not any("as known at" in page or "reviewed" in page for page in texts(usual))


def test_a_review_holds_nothing_that_was_recorded_later_and_names_what_came(qapp, night_store: Store) -> None:
    review = gather(night_store, KNOWN, KNOWN)
    assert review.later
    for record in review.records.values():
        assert all(s.entry.recorded_at <= KNOWN for s in record.standing)
        assert all(not len(s) or s.t[-1] <= KNOWN + MINUTE for s in record.series.values() if s is not None)
    checks = [line for page in sheet_content(review, Reader(demo.ZONE)).episodes for line in page.to_check]
    told = [line for line in checks if line.startswith("Not known then: ")]
    assert told
    assert any("recorded later" in line for line in told)
    assert not gather(night_store).later


@pytest.mark.parametrize(
    ("moment", "hours", "clocks"),
    [
        ("2026-03-29T02:00:00Z", 11, ["22:00", "23:00", "00:00", "01:00", "03:00", "04:00"]),
        ("2026-10-25T02:00:00Z", 13, ["22:00", "23:00", "00:00", "01:00", "02:00", "02:00", "03:00"]),
    ],
)
def test_hours_and_times_of_a_night_with_a_clock_change(
    qapp, tmp_path, moment: str, hours: int, clocks: list
) -> None:
    """Oslo: 02:00 to 03:00 is skipped in March and comes twice in October."""
    zone = "Europe/Oslo"
    night = shift_of(parse(moment), zone)
    assert (night.end - night.start) / HOUR == hours
    with Store.create(tmp_path / "w.luffmark", now=night.start - HOUR) as store:
        episode.begin(store, "AB", night.start, episode.BeginRequest("A", {"label": "Bed 9"}))
        for after, line in ((0, "bpap-st 16/6 30"), (180, "rr 22"), (60 * hours - 1, "rr 20")):
            at = night.start + (after + 1) * MINUTE
            entry.log_line(store, "AB", at, entry.LineRequest("A", line, zone, confirmed=True))
        request = operations.HandoverRequest(night.start, night.end)
        content = sheet_content(operations.prepare(store, "AB", night.end, request).value, Reader(zone))
    page = content.episodes[0]
    assert dict(page.facts)["Mask this shift"].startswith(f"{hours - 1} h 59 min")
    assert "19:30 to" in content.ward.shift
    assert content.ward.shift.endswith("07:30")
    text = texts(pdf_bytes(content)[0])[1]
    chart = text[text.index("SpO2 target; dashed") : text.index("Gases (")]
    found = [c for c in re.findall(r"\b\d\d:00\b", chart) if c >= "22:00" or c <= "04:00"]
    assert found[: len(clocks)] == clocks


def test_a_night_with_a_clock_change_is_one_shift() -> None:
    """29 March 2026 in Oslo: 02:00 to 03:00 is skipped, so the night from 19:30 to 07:30 lasts 11 h."""
    night = shift_of(parse("2026-03-29T02:00:00Z"), "Europe/Oslo")
    assert (night.end - night.start) / HOUR == 11
    autumn = shift_of(parse("2026-10-25T02:00:00Z"), "Europe/Oslo")
    assert (autumn.end - autumn.start) / HOUR == 13
    own_pattern = shift_of(parse("2026-03-29T02:00:00Z"), "Europe/Oslo", ("07:00", "14:30", "21:15"))
    assert (own_pattern.end - own_pattern.start) / HOUR == 8.75
