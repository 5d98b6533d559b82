"""Handovers: as of when their figures are, and what they are compared with."""

from __future__ import annotations

from collections.abc import Iterator
from dataclasses import replace
from pathlib import Path

import pytest

from app.handover.plain import handover_text
from app.operations import entry, episode
from app.operations import handover as operations
from app.operations.last_handover import facts_of
from app.sheet.content import sheet_content
from app.words import Reader
from core.record.instant import HOUR, MINUTE, Instant, parse
from core.record.message import RecordError
from storage.store import Store

DAY = parse("2026-03-27T07:30:00Z")
EVENING = DAY + 12 * HOUR
MORNING = DAY + 24 * HOUR


@pytest.fixture
def store(tmp_path: Path) -> Iterator[Store]:
    with Store.create(tmp_path / "w.luffmark", now=DAY - HOUR) as made:
        episode.begin(made, "AB", DAY, episode.BeginRequest("A", {"label": "Bed 9", "indication": "copd"}))
        log(made, DAY + HOUR, "ph 7.24 paco2 75 pao2 60 gas_fio2 28 site arterial")
        log(made, DAY + 90 * MINUTE, "bpap-st 14/5 28")
        log(made, DAY + 150 * MINUTE, "ph 7.25 paco2 73 pao2 61 gas_fio2 28 site arterial")
        yield made


def log(store: Store, at: Instant, line: str) -> None:
    entry.log_line(store, "AB", at, entry.LineRequest("A", line, "UTC", confirmed=True))


def gathered(store: Store, start: Instant, end: Instant, now: Instant, known: Instant | None = None):
    return operations.prepare(store, "AB", now, operations.HandoverRequest(start, end, known)).value


def close(store: Store, start: Instant, end: Instant, now: Instant, names: tuple[str, str] = ("AB", "CD")) -> str:
    made = gathered(store, start, end, now)
    shift = sheet_content(made, Reader()).ward.shift
    request = operations.ClosedHandover(operations.closed_name(shift, *names), b"%PDF", operations.facts_of(made))
    return operations.close(store, "AB", now, request).value


def test_the_first_handover_is_compared_with_the_shifts_start(store: Store) -> None:
    made = gathered(store, DAY, EVENING, EVENING)
    assert (made.handed.at, made.handed.head, made.handed.name) == (DAY, None, "")
    content = sheet_content(made, Reader())
    assert content.ward.compared.startswith(
        "No handover was closed before: what changed is told since the shift's start"
    )
    assert content.episodes[0].since_head == "Since the shift's start, 07:30 (no handover was closed before)"


def test_the_next_is_compared_with_the_last_closed_one(store: Store) -> None:
    close(store, DAY, EVENING, EVENING)
    log(store, EVENING + 30 * MINUTE, "ph 7.26 paco2 72 pao2 60 gas_fio2 28 site arterial")
    log(store, EVENING + HOUR, "18/5 28")
    log(store, EVENING + 2 * HOUR, "ph 7.33 paco2 60 pao2 62 gas_fio2 28 site arterial")
    log(store, EVENING + 3 * HOUR, "plan gas at 06:00")
    made = gathered(store, EVENING, MORNING, MORNING)
    assert made.handed.at == EVENING
    page = sheet_content(made, Reader()).episodes[0]
    assert page.since_head == "Since the last handover, 27-Mar-2026 19:30"
    told = " ".join(page.since)
    assert "Settings: IPAP 14 to 18 cmH2O." in told
    assert "State: still acidotic, pH 7.25 to 7.33, PaCO2 73 to 60 mmHg (27-Mar-2026 10:00 to 21:30)." in told
    assert "change of 20:30 better" in told
    assert "Plan: new." in told
    text = " ".join(handover_text(sheet_content(made, Reader())).split())
    assert "told since the last closed handover, as of 27-Mar-2026 19:30: Shift" in text
    assert "AB to CD" in text


def test_what_was_recorded_late_for_before_the_handover_is_a_change_since(store: Store) -> None:
    """The sheet that was handed over did not say it."""
    close(store, DAY, EVENING, EVENING)
    late = entry.LineRequest("A", "19:10 ph 7.19 paco2 84 site arterial", "UTC", confirmed=True)
    entry.log_line(store, "AB", EVENING + HOUR, late)
    since = gathered(store, EVENING, MORNING, EVENING + 2 * HOUR).since["A"]
    assert since.gas_after is not None
    assert since.gas_after.ph == 7.19
    assert since.gas_before is not None
    assert since.gas_before.ph == 7.25


def test_closing_again_is_compared_as_the_first_was(store: Store) -> None:
    close(store, DAY, EVENING, EVENING)
    first = gathered(store, EVENING, MORNING, MORNING - 10 * MINUTE)
    close(store, EVENING, MORNING, MORNING - 10 * MINUTE)
    again = gathered(store, EVENING, MORNING, MORNING)
    assert first.handed.own_closed_at is None
    assert again.handed.own_closed_at is not None  # it says that this shift's was closed, and compares as before
    assert replace(again.handed, own_closed_at=None) == first.handed
    after = gathered(store, MORNING, MORNING + 12 * HOUR, MORNING + HOUR)
    assert after.handed.at == MORNING - 10 * MINUTE


def test_one_closed_after_a_moment_was_not_known_at_it(store: Store) -> None:
    close(store, DAY, EVENING, EVENING)
    known = EVENING - MINUTE
    assert gathered(store, DAY + HOUR, EVENING + HOUR, MORNING, known).handed.head is None


def test_one_kept_without_its_facts_counts_from_when_it_was_closed(store: Store) -> None:
    store.put_document(operations.KIND, "an older program's", b"%PDF", "AB", EVENING)
    found = facts_of(store.documents()[-1])
    assert (found.as_of, found.head) == (EVENING, store.documents()[-1].seq - 1)
    assert gathered(store, EVENING, MORNING, MORNING).handed.at == EVENING


def test_the_facts_of_a_closing_are_chained_with_it(store: Store) -> None:
    close(store, DAY, EVENING, EVENING + 5 * MINUTE)
    found = facts_of(store.documents()[-1])
    assert (found.start, found.end, found.as_of) == (DAY, EVENING, EVENING)
    assert found.head == store.documents()[-1].seq - 1
    assert store.verify() == ()


def test_a_shift_that_still_runs_has_figures_as_of_now_and_says_so(store: Store) -> None:
    now = DAY + 3 * HOUR
    made = gathered(store, DAY, EVENING, now)
    same = gathered(store, DAY, now, now)
    assert made.shift == same.shift
    assert made.shift.episodes[0].hours_on_mask == pytest.approx(1.5)
    content = sheet_content(made, Reader())
    assert content.ward.shift == "Shift 27-Mar-2026 07:30 to 19:30, as of 10:30"
    assert not any("OVERDUE" in line for line in content.ward.due)
    assert "as of" not in sheet_content(same, Reader()).ward.shift


def test_a_review_stands_at_the_moment_it_knows(store: Store) -> None:
    known = DAY + 2 * HOUR
    made = gathered(store, DAY, EVENING, MORNING, known)
    assert made.shift.end == known
    assert made.shift.episodes[0].hours_on_mask == pytest.approx(0.5)


def test_a_shift_that_has_not_begun_is_refused(store: Store) -> None:
    with pytest.raises(RecordError) as refused:
        gathered(store, MORNING, MORNING + HOUR, EVENING)
    assert refused.value.message.key == "handover.not_begun"
