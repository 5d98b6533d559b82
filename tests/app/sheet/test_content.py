"""What a handover says where data are missing, and how it speaks of moments, units and states."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

import pytest

from app import demo
from app.handover.page_html import page_html
from app.handover.plain import handover_text
from app.look.theme import LIGHT
from app.operations import entry, episode
from app.operations import handover as operations
from app.operations.handover import Handover
from app.sheet.blocks import Text
from app.sheet.content import sheet_content
from app.sheet.episode_sheet import flag_blocks
from app.sheet.shapes import EpisodePage, PageBrevity, SheetContent, WardRow
from app.sheet.writer import is_limited, limits_of_care
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
    assert dict(page.support)["Support"] == "start of support not recorded"
    assert facts["SpO2 target"].startswith("not recorded")
    assert facts["Ceiling of care"] == facts["Resuscitation"] == facts["Responsible"] == "not recorded"
    assert page.standing == "No arterial or capillary gas recorded."
    assert {value for _, value in page.plan} == {"not recorded"}
    assert [name for name, _ in page.plan] == ["Plan", "Agreed with", "Breaks and night", "Jobs not done"]
    assert dict(page.care)["Secretions"] == "nothing recorded this shift"
    assert not page.gases
    assert not page.changes
    settings = dict(page.support)["Settings now"]
    assert settings.startswith("mode not recorded")
    assert "FiO2 not known" in settings
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
    assert page.gases[0].state == "not acidotic"
    assert page.gases[0].verdict == "not used for a verdict"


def test_a_gas_off_support_is_the_gas_and_not_the_patient(tmp_path: Path) -> None:
    _, page = one(
        tmp_path,
        "00:40 bpap-st 14/5 28", "03:10 mask off", "03:50 ph 7.31 paco2 60 site arterial", "04:10 mask on",
    )  # fmt: skip
    assert page.standing.startswith("Acidotic, last gas drawn while the mask was off: pH 7.31")


def test_a_change_without_a_baseline_does_not_hide_what_the_gas_says_against_the_start(tmp_path: Path) -> None:
    found, _ = one(
        tmp_path, "00:05 ph 7.21 paco2 74 site arterial", "00:15 bpap-st 20/6 40", "01:15 22/6",
        "02:05 ph 7.19 paco2 75 site arterial",
    )  # fmt: skip
    (bed,) = found.ward.rows
    assert bed.response.startswith("No response judged yet. Since the start no clear change: pH ")
    assert bed.response.endswith("(gas of 02:05).")
    assert "-0.02" in bed.response.replace("\N{MINUS SIGN}", "-")


def test_what_the_verdict_of_the_start_says_is_not_said_twice(tmp_path: Path) -> None:
    lines = ("00:05 ph 7.21 paco2 74 site arterial", "00:15 bpap-st 20/6 40", "01:05 ph 7.28 paco2 66 site arterial")
    (bed,) = one(tmp_path, *lines)[0].ward.rows
    assert "Since the start" not in bed.response, "it is the verdict"


def test_a_range_that_a_gas_changed_is_told_among_the_changes(tmp_path: Path) -> None:
    _, page = one(
        tmp_path, "20:50 ph 7.44 paco2 36 pao2 60 gas_fio2 40% site arterial", "20:55 bpap-st 14/6 40",
        "21:50 ph 7.43 paco2 36 pao2 60 gas_fio2 40% site arterial",
        "03:20 ph 7.29 paco2 58 pao2 60 gas_fio2 50% site arterial", facts={"indication": "pneumonia"},
    )  # fmt: skip
    told = " ".join(page.since)
    assert "SpO2 range 94-98 % to 88-92 % since 03:20: a gas showed hypercapnia, none is prescribed." in told
    target = dict(page.facts)["SpO2 target"]
    assert target == "not recorded; 88 to 92 % by risk, which the gas of 03:20 showed"
    assert page.standing.startswith("P/F 120 mmHg; acidotic: pH 7.29")


def test_oxygen_that_fails_comes_first(content: SheetContent) -> None:
    assert row(content, "Bay A 1").state.startswith("Hypoxaemic: P/F 107 mmHg; not acidotic: pH 7.40")
    page = next(p for p in content.episodes if p.label == "Bay A 1")
    assert {g.state for g in page.gases} == {"not acidotic", "not acidotic, pH above 7.45"}


def row(content: SheetContent, label: str) -> WardRow:
    return next(r for r in content.ward.rows if r.label == label)


def test_a_pf_of_an_older_gas_is_not_dated_with_the_newest(tmp_path: Path) -> None:
    ventilated = ("23:00 mode bpap-st", "23:00 16/8 60", "00:30 ph 7.44 pco2 34 po2 64 site arterial")
    _, page = one(tmp_path, *ventilated, "03:40 ph 7.41 pco2 38 site arterial", facts={"indication": "pneumonia"})
    assert "P/F 107 mmHg at 00:30" in page.standing
    assert page.standing.endswith("pH 7.41, PaCO2 38 mmHg at 03:40")


def test_limits_of_care_are_said_whole_and_strongly(content: SheetContent) -> None:
    assert row(content, "Bed 4").limits == "Ceiling of care: full treatment; for resuscitation."
    limited = row(content, "Bay A 4")
    assert limited.limits == "Ceiling of care: no intubation; not for resuscitation."
    assert (row(content, "Bed 4").is_limited, limited.is_limited) == (False, True)
    assert limits_of_care({}) == "Ceiling of care: not recorded; resuscitation: not recorded."
    assert is_limited({"ceiling_of_care": "comfort", "resuscitation": None})
    assert f"<b>{limited.limits}</b>" in page_html(content, LIGHT)
    assert row(content, "Bed 4").limits in page_html(content, LIGHT)


def test_an_unconfirmed_threshold_bears_its_star_wherever_its_flag_stands(content: SheetContent) -> None:
    assert "CONCERN pH below 7.30 and not better: level of care*, since 02:22" in row(content, "Bay A 4").flags
    assert "ESCALATE pH below 7.20 on support, since 04:18" in row(content, "Bed 4").flags
    for page in content.episodes:
        for flag in page.flags:
            unsure = any(f"[{sure}" in flag.source for sure in ("from memory", "common practice"))
            assert ("*, since" in flag.head) is unsure, flag.head
    assert "marked *" in content.caution


def test_whom_was_told_and_the_answer_are_two_things(content: SheetContent) -> None:
    assert "Told: 04:37 medical registrar. Answer: busy, will come." in row(content, "Bed 4").action
    assert "|" not in handover_text(content)


def test_what_is_closed_says_whether_anybody_settled_it(content: SheetContent) -> None:
    page = next(p for p in content.episodes if p.label == "Bay A 4")
    closed = [f for f in page.flags if not f.is_open]
    assert closed
    assert not any(f.is_settled for f in closed)
    told = [b.words for b in flag_blocks(page.flags, PageBrevity()) if isinstance(b, Text)]
    assert any(t.startswith("No longer met: ") for t in told)
    assert not any(t.startswith("Settled") for t in told)


def test_a_relapse_and_the_sum_since_the_start_stand_on_the_first_page(content: SheetContent) -> None:
    assert "Gain lost, still better: pH" in row(content, "Bed 5").response
    assert row(content, "Bed 5").response.endswith("Lost since 01:55: pH 7.34 to 7.27, PaCO2 63 to 78 mmHg.")
    assert "No clear change (since the start: worse): pH" in row(content, "Bed 4").response
    assert "No clear change (since the start: better): pH" in row(content, "Bed 2").response


def test_a_gain_that_a_later_gas_lost_is_told_with_the_moment_of_the_best(tmp_path: Path) -> None:
    lines = ("23:30 ph 7.25 pco2 78 site arterial", "23:40 mode bpap-st", "23:40 16/5 30",
             "00:40 ph 7.36 pco2 56 site arterial", "02:00 ipap 20", "02:15 ph 7.27 pco2 74")  # fmt: skip
    found, _ = one(tmp_path, *lines, facts={"indication": "copd"})
    told = found.ward.rows[0].response
    assert "Lost since 00:40: pH 7.36 to 7.27, PaCO2 56 to 74 mmHg." in told, told


def test_plan_and_call_stand_on_the_first_page_where_something_is_to_be_done(content: SheetContent) -> None:
    assert row(content, "Bed 4").action.startswith("Plan: If pH is below 7.25 on the next gas: intensive care")
    assert "Told: 04:37 medical registrar" in row(content, "Bed 4").action
    assert row(content, "Bay A 4").action == "Plan: not recorded. Told: not recorded."
    assert row(content, "Bed 1").action == ""
    text = handover_text(content)
    assert "Plan: If pH is below 7.25" in text.partition("DUE IN THE NEXT")[0]


def test_gases_are_due_first_the_longest_overdue_on_top_and_skin_checks_in_one_line(content: SheetContent) -> None:
    due = content.ward.due
    gases = [n for n, line in enumerate(due) if "lood gas" in line]
    assert gases == list(range(len(gases)))
    assert due[0] == "Bay A 4: Repeat blood gas OVERDUE 2 h 08 min"
    late = ["OVERDUE" in line for line in due[: len(gases)]]
    assert late == sorted(late, reverse=True)
    others = content.ward.due_other
    kinds = [line.partition(":")[0] for line in others]
    assert kinds == ["Ask about a probable break", "Oxygen review", "Reassessment"]
    assert others[1].startswith("Oxygen review: Bed 3 OVERDUE 2 h 39 min; Bay A 4 OVERDUE")
    assert not any("kin check" in line for line in (*due, *others))
    assert content.ward.skin.startswith("Skin checks overdue: Bed 2, Bay A 2, ")
    assert "Skin checks to come: Bed 1 by 05:32" in content.ward.skin
    assert content.ward.skin.split()[-1] in handover_text(content)


def test_a_shift_that_ends_after_the_record_says_so_and_its_chart_ends_there(night_store: Store) -> None:
    end = demo.demo_now() + 2 * HOUR
    request = operations.HandoverRequest(end - 12 * HOUR, end)
    made = operations.prepare(night_store, "AB", end, request).value
    found = sheet_content(made, Reader(demo.ZONE))
    assert found.ward.quiet == "nothing logged since 05:30"
    assert "Nothing logged since 05:30" in handover_text(found)
    page = next(p for p in found.episodes if p.label == "Bed 4")
    shift = next(s for s in made.shift.episodes if s.now.label == "Bed 4")
    assert page.chart.end == shift.now.now.last_logged_at < end
    assert dict(page.support)["Record"].startswith("nothing logged since 05:")


def test_of_an_empty_ward_nothing_is_said_to_be_in_order(tmp_path: Path) -> None:
    with Store.create(tmp_path / "w.luffmark", now=NOW - 9 * HOUR) as store:
        made = operations.prepare(store, "AB", NOW, operations.HandoverRequest(NOW - 8 * HOUR, NOW)).value
    told = sheet_content(made, Reader()).ward.see_first
    assert told == "No episode: nothing is logged, so nothing is judged."


def test_a_shift_that_ends_now_needs_no_such_words(content: SheetContent) -> None:
    assert content.ward.quiet == ""
    assert "Record" not in dict(content.episodes[0].support)


def test_a_file_taken_in_late_is_not_counted_as_typed_late(tmp_path: Path) -> None:
    _, typed = one(tmp_path, "01:00 rr 24 hr 100")
    assert typed.to_check[0] == "2 typed entries of this shift were recorded more than 1 h late."


def test_off_the_mask_is_said_loudly(tmp_path: Path) -> None:
    content, page = one(tmp_path, "00:40 bpap-st 14/5 28", "04:10 mask off")
    assert "OFF THE MASK since 04:10" in dict(page.support)["Settings now"]
    assert content.ward.rows[0].support == "OFF THE MASK since 04:10"
    assert dict(page.facts)["Mask this shift"] == "3 h 30 min; off 04:10 to now"


def test_told_remark_plan_and_jobs_are_handed_on(tmp_path: Path) -> None:
    _, page = one(
        tmp_path,
        "01:00 bpap-st 14/5 28", "02:00 told registrar, will come", "plan if pH below 7.25 by 06:00 call ICU",
        "jobs chest film", "agreed with Dr Reg", "breaks and night 20 min for meals, none at night",
        "handover remark tired but settled", "03:00 secretions", "03:05 comfort poor",
    )  # fmt: skip
    assert page.told == ("02:00 registrar, will come",)
    assert dict(page.plan)["Plan"] == "if pH below 7.25 by 06:00 call ICU"
    assert dict(page.plan)["Jobs not done"] == "chest film"
    assert dict(page.plan)["Agreed with"] == "Dr Reg"
    assert dict(page.plan)["Breaks and night"] == "20 min for meals, none at night"
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
        said += [*(v for _, v in (*page.support, *page.plan, *page.care)), *page.due, *page.told, *page.to_check]
        said += [page.since_head, *page.since, *page.levers, *(c.brief for c in page.changes)]
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


def test_a_state_that_rests_on_a_doubtful_gas_says_so_on_both_pages(tmp_path: Path) -> None:
    lines = (
        "23:40 ph 7.26 paco2 68 pao2 58 gas_fio2 28%",
        "00:00 bpap-st 14/5 28",
        "01:05 ph 7.45 paco2 120 pao2 60",
    )
    content, page = one(tmp_path, *lines)
    assert content.ward.rows[0].state.startswith("Doubtful gas. ")
    assert page.standing.startswith("Doubtful gas. ")
    (tmp_path / "sure").mkdir()
    assert not one(tmp_path / "sure", *lines[:2])[1].standing.startswith("Doubtful")


def test_the_wards_page_names_an_episode_of_which_nothing_was_logged_for_long(night: Handover) -> None:
    first, *others = night.shift.episodes
    support = replace(first.now.support, silent_since=night.shift.end - 13 * HOUR)
    silent = replace(first, now=replace(first.now, support=support))
    shift = replace(night.shift, episodes=(silent, *others))
    made = sheet_content(replace(night, shift=shift), Reader(demo.ZONE))
    assert "; nothing logged since 27-Mar-2026 16:30" in made.ward.rows[0].support
    assert not any("nothing logged" in row.support for row in made.ward.rows[1:])


def test_a_difference_of_nothing_is_no_value(content: SheetContent) -> None:
    assert "P/F 0 mmHg" not in handover_text(content)


def test_the_next_shift_reads_who_was_called_before_it_about_a_flag_that_stands(night_store: Store) -> None:
    """Bed 4: escalated since 04:18, the registrar called at 04:37, the shift changed at 05:00."""
    request = operations.HandoverRequest(parse("2026-03-28T05:00:00Z"), demo.demo_now())
    made = operations.prepare(night_store, "AB", demo.demo_now(), request).value
    content = sheet_content(made, Reader(demo.ZONE))
    row = next(r for r in content.ward.rows if r.label == "Bed 4")
    assert row.action.endswith("Told: 04:37 (before this shift) medical registrar. Answer: busy, will come.")
    page = next(p for p in content.episodes if p.label == "Bed 4")
    assert page.told == ("04:37 (before this shift) medical registrar. Answer: busy, will come",)


def test_two_beds_of_one_label_are_told_apart_wherever_they_stand(night: Handover) -> None:
    first, second, *rest = night.shift.episodes
    twin = replace(second, now=replace(second.now, label=first.now.label, support=first.now.support))
    both = replace(night, shift=replace(night.shift, episodes=(first, twin, *rest)))
    made = sheet_content(both, Reader(demo.ZONE))
    labels = [r.label for r in made.ward.rows[:2]]
    assert labels == [p.label for p in made.episodes[:2]]
    assert labels[0].endswith(f", {first.episode})")
    assert labels[1].endswith(f", {twin.episode})")
    assert not any("(" in r.label for r in made.ward.rows[2:])
