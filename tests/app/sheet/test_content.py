"""What a handover says where data are missing, and how it speaks of moments, units and states."""

from __future__ import annotations

from pathlib import Path

import pytest

from app.operations import entry, episode
from app.operations import handover as operations
from app.operations.handover import Handover
from app.sheet.content import sheet_content
from app.sheet.shapes import EpisodePage, SheetContent
from app.words import Reader
from core.record.instant import HOUR, parse
from core.record.message import RecordError
from storage.store import Store

NOW = parse("2026-03-28T05:00:00Z")


def one(tmp_path: Path, *lines: str, facts: dict[str, str] | None = None) -> tuple[SheetContent, EpisodePage]:
    """The handover of a store with one episode logged by lines."""
    with Store.create(tmp_path / "w.luffmark", now=NOW - 9 * HOUR) as store:
        begin = episode.BeginRequest("A", {"label": "Bed 9", **(facts or {})})
        episode.begin(store, "AB", NOW - 8 * HOUR, begin)
        for line in lines:
            entry.log_line(store, "AB", NOW, entry.LineRequest("A", line, "UTC", confirmed=True))
        request = operations.HandoverRequest(NOW - 8 * HOUR, NOW)
        made = operations.prepare(store, "AB", NOW, request).value
    found = sheet_content(made, Reader())
    return found, found.episodes[0]


def test_missing_data_are_said_to_be_missing(tmp_path: Path) -> None:
    content, page = one(tmp_path, "01:00 rr 24")
    facts = dict(page.facts)
    assert facts["Why on support"] == "not recorded"
    assert facts["Support"] == "start of support not recorded"
    assert facts["SpO2 target"].startswith("not recorded")
    assert facts["Ceiling of care"] == facts["Resuscitation"] == facts["Responsible"] == "not recorded"
    assert page.standing == "No arterial or capillary gas recorded."
    assert page.plan == page.jobs == "not recorded"
    assert dict(page.care)["Secretions"] == "nothing recorded this shift"
    assert not page.gases
    assert not page.changes
    assert page.settings.startswith("mode not recorded")
    assert "FiO2 not known" in page.settings
    for word in ("handover remark", "plan", "ceiling of care", "resuscitation decision"):
        assert f"No {word} recorded for any episode." in content.ward.missing


def test_a_change_stands_with_its_response_in_words(tmp_path: Path) -> None:
    _, page = one(
        tmp_path,
        "00:30 ph 7.25 paco2 70 pao2 58 gas_fio2 28 site arterial", "00:40 bpap-st 14/5 28",
        "01:40 ph 7.26 paco2 69 pao2 59 gas_fio2 28 site arterial", "01:50 18/5 28",
        "03:00 ph 7.33 paco2 58 pao2 61 gas_fio2 28 site arterial", "03:40 bpap-st 22/5 28",
        facts={"indication": "copd"},
    )  # fmt: skip
    assert [c.at for c in page.changes] == ["00:40", "01:50", "03:40"]
    first, second, third = page.changes
    assert first.response.startswith("No clear change: pH +0.01, PaCO2 −1 mmHg, P/F +4 mmHg after 1 h, gas acidotic")
    assert second.what == "IPAP 14 to 18 cmH2O"
    assert second.response.startswith("Better: pH +0.07, PaCO2 −11 mmHg, P/F +7 mmHg after 1 h 10 min, gas acidotic")
    assert third.response.startswith("Not yet known.")
    assert page.standing == "Acidotic: pH 7.33, PaCO2 58 mmHg, P/F 218 mmHg at 03:00"
    assert page.gases[-1].delta_ph == "+0.07"


def test_a_change_that_is_not_judged_says_why(tmp_path: Path) -> None:
    _, page = one(tmp_path, "01:00 bpap-st 14/5 28", "02:10 ph 7.33 paco2 58 site arterial")
    assert page.changes[0].what.startswith("Support was running: Mode BPAP-ST, IPAP 14 cmH2O")
    assert page.changes[0].response.startswith("Not judged. Support was running when logging began. No baseline")


def test_a_gas_that_is_not_acidotic_is_not_called_resolved_in_a_heading(tmp_path: Path) -> None:
    _, page = one(tmp_path, "00:30 ph 7.42 paco2 38 pao2 55 gas_fio2 60 site arterial")
    assert page.standing.startswith("Not acidotic: pH 7.42, PaCO2 38 mmHg, P/F 92 mmHg")


def test_off_the_mask_is_said_loudly(tmp_path: Path) -> None:
    content, page = one(tmp_path, "00:40 bpap-st 14/5 28", "04:10 mask off")
    assert "OFF THE MASK since 04:10" in page.settings
    assert content.ward.rows[0].support == "OFF THE MASK since 04:10"
    assert dict(page.facts)["Mask this shift"] == "3.5 h; off 04:10 to now"


def test_told_remark_plan_and_jobs_are_handed_on(tmp_path: Path) -> None:
    _, page = one(
        tmp_path,
        "01:00 bpap-st 14/5 28", "02:00 told registrar, will come", "plan if pH below 7.25 by 06:00 call ICU",
        "jobs chest film", "handover remark tired but settled", "03:00 secretions", "03:05 comfort poor",
    )  # fmt: skip
    assert page.told == ("02:00 registrar, will come",)
    assert page.plan == "if pH below 7.25 by 06:00 call ICU"
    assert page.jobs == "chest film"
    assert page.remark == "tired but settled"
    assert dict(page.care)["Secretions"] == "03:00 recorded"
    assert dict(page.care)["Tolerance"] == "poor"


def test_pressures_are_in_the_readers_unit_throughout(night: Handover) -> None:
    content = sheet_content(night, Reader("Europe/London", "kPa"))
    said = [content.ward.see_first, *(r.state + r.response for r in content.ward.rows)]
    for page in content.episodes:
        said += [page.standing, *(v for _, v in page.facts), *(c.response for c in page.changes)]
        said += [f.evidence for f in page.flags]
    assert not [s for s in said if "mmHg" in s]
    assert sum("kPa" in s for s in said) > 20


def test_nothing_printed_has_a_hole(content: SheetContent) -> None:
    said = [content.ward.see_first, *content.ward.due, *content.ward.missing]
    for row in content.ward.rows:
        said += [row.state, row.support, row.response, row.who, row.limits, row.remarks, *row.flags]
    for page in content.episodes:
        said += [page.settings, page.leak, page.plan, *page.due, *page.told, *page.to_check]
        said += [f.head + f.evidence + f.source for f in page.flags]
        said += [c.what + c.response for c in page.changes]
    for text in said:
        assert not any(hole in text for hole in ("None", "nan", "{", "}", "[[", "  ")), text
        assert "?" not in text, text


@pytest.mark.parametrize(
    ("start", "end", "key"),
    [
        (NOW, NOW, "handover.backwards"),
        (NOW, NOW - 1, "handover.backwards"),
        (NOW - 400 * HOUR, NOW, "handover.too_long"),
    ],
)
def test_what_is_no_shift_is_refused(tmp_path: Path, start: int, end: int, key: str) -> None:
    with Store.create(tmp_path / "w.luffmark", now=1) as store, pytest.raises(RecordError) as refused:
        operations.prepare(store, "AB", NOW, operations.HandoverRequest(start, end))
    assert refused.value.message.key == key


def test_as_known_at_a_moment_leaves_out_what_was_recorded_later(tmp_path: Path) -> None:
    with Store.create(tmp_path / "w.luffmark", now=NOW - 9 * HOUR) as store:
        episode.begin(store, "AB", NOW - 8 * HOUR, episode.BeginRequest("A"))
        late = entry.LineRequest("A", "01:00 ph 7.21 paco2 80", "UTC", confirmed=True)
        entry.log_line(store, "AB", NOW, late)
        request = operations.HandoverRequest(NOW - 8 * HOUR, NOW - HOUR, NOW - HOUR)
        then = sheet_content(operations.prepare(store, "AB", NOW, request).value, Reader())
        now = operations.HandoverRequest(NOW - 8 * HOUR, NOW - HOUR)
        known = sheet_content(operations.prepare(store, "AB", NOW, now).value, Reader())
    assert then.episodes == () or not then.episodes[0].gases
    assert known.episodes[0].gases
    assert "as known at" in then.printed
