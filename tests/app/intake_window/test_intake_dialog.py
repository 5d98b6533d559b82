"""Taking in, row by row and file by file: ticks on refused rows, codes explained, other windows, leaving."""

from threading import Event

import pytest
from PySide6.QtCore import Qt

from app.dialogs.correct import CorrectDialog
from app.dialogs.intake import IntakeDialog
from app.intake_window.mapping_dialog import MappingDialog
from app.operations import intake as operations
from app.operations.intake import ReadRequest
from storage.intake.kept_codes import kept_codes
from storage.store import Store
from tests.support.hl7_messages import gas, message
from tests.support.open_window import NOW, settled, until
from tests.support.spreadsheets import sheet_xml, write_xlsx

HEAD = "episode,at,channel,value,unit,by,note\n"
GOOD = "bed-9,2026-03-28T02:00:00+00:00,rr,24,/min,AB,\n"
BAD = "bed-9,2026-03-28T02:00:00+00:00,ipap,99,cmH2O,AB,\nbed-9,2026-03-28T02:00:00+00:00,hr,x,/min,AB,\n"
LOCAL = ["OBX|2|NM|PCO2T^pCO2 at 37^L||8.1|kPa^^UCUM|||||F", "OBX|3|NM|K^potassium^L||4.4|mmol/L^^UCUM|||||F"]
WHEN = {"at": "202603280425+0000", "sent": "202603280430+0000"}


def shown(qtbot, window, *paths):
    dialog = window.doers.file.take_in(*paths)
    until(qtbot, lambda: dialog.intake is not None)
    return dialog


def taken(qtbot, window, dialog):
    head = window.model.session.head
    assert dialog.go.isEnabled()
    dialog.go.click()
    until(qtbot, lambda: window.model.session.head > head)
    settled(qtbot, window)


def newest_facts(path):
    with Store.open(path) as store:
        return store.sources()[-1].facts


# refused rows


def test_refused_rows_are_left_out_one_by_one_and_that_is_recorded(qtbot, window, tmp_path):
    path = tmp_path / "night.csv"
    path.write_text(HEAD + GOOD + BAD)
    dialog = shown(qtbot, window, path)
    ticks = [dialog.table.item(row, 0) for row in range(2)]
    assert [t.checkState() for t in ticks] == [Qt.CheckState.Unchecked] * 2
    assert dialog.table.item(2, 0).data(Qt.ItemDataRole.CheckStateRole) is None, "a row that is taken has no tick"
    ticks[0].setCheckState(Qt.CheckState.Checked)
    assert not dialog.go.isEnabled(), "one refused row has no tick yet"
    ticks[1].setCheckState(Qt.CheckState.Checked)
    assert dialog.leave_out.isChecked()
    ticks[1].setCheckState(Qt.CheckState.Unchecked)
    assert not dialog.go.isEnabled()
    dialog.leave_out.setChecked(True)
    assert ticks[1].checkState() == Qt.CheckState.Checked
    taken(qtbot, window, dialog)
    facts = newest_facts(tmp_path / "ward.luffmark")
    assert (facts["left_out_rows"], facts["left_out_lines"]) == (2, "3,4")


def bad_files(folder):
    """A file of each kind with one refused value and one that is good."""
    rows = [["time", "rr"], ["2026-03-28 02:00", 24], ["2026-03-28 02:10", 999]]
    (folder / "a.csv").write_text("\n".join(",".join(map(str, r)) for r in rows) + "\n")
    write_xlsx(folder / "a.xlsx", sheet_xml(rows))
    (folder / "a.hl7").write_text(message([*gas(), *gas(ph="9.9")[:1]], **WHEN))
    (folder / "a.json").write_text(
        '{"resourceType": "Bundle", "entry": [' + ",".join(
            '{"resource": {"resourceType": "Observation", "status": "final", "subject": {"reference": "Patient/1"}, '
            f'"effectiveDateTime": "2026-03-28T0{n}:00:00Z", "code": {{"coding": [{{"system": "http://loinc.org", '
            f'"code": "9279-1"}}]}}, "valueQuantity": {{"value": {v}, "system": "http://unitsofmeasure.org", '
            f'"code": "/min"}}}}}}' for n, v in ((1, 24), (2, 999))) + "]}")  # fmt: skip
    return {name: folder / name for name in ("a.csv", "a.xlsx", "a.hl7", "a.json")}


@pytest.mark.parametrize("name", ["a.csv", "a.xlsx", "a.hl7", "a.json"])
def test_refused_rows_of_every_kind_of_file_can_be_left_out(qtbot, window, tmp_path, name):
    from storage.intake.mapping import ColumnUse, Mapping, TimeUse

    mapping = Mapping("m", ("time", "rr"), (ColumnUse("rr", "rr", "/min"),), TimeUse("time", order="iso", zone="UTC"),
                      decimal=".", written_by="person")  # fmt: skip
    is_table = name in ("a.csv", "a.xlsx")
    request = ReadRequest(bad_files(tmp_path)[name], mapping if is_table else None, episode="bed-9")
    dialog = IntakeDialog(window.model, request, window.reader, window.theme, window)
    dialog.open()
    until(qtbot, lambda: dialog.intake is not None)
    assert len(dialog.intake.refusals) == 1
    dialog.table.item(0, 0).setCheckState(Qt.CheckState.Checked)
    taken(qtbot, window, dialog)
    assert newest_facts(tmp_path / "ward.luffmark")["left_out_rows"] == 1


# codes


def test_a_senders_own_code_is_explained_once_and_kept(qtbot, window, tmp_path):
    path = tmp_path / "results.hl7"
    path.write_text(message([*gas()[:1], *LOCAL], **WHEN))
    request = ReadRequest(path, episode="bed-7")
    dialog = IntakeDialog(window.model, request, window.reader, window.theme, window)
    dialog.open()
    until(qtbot, lambda: dialog.intake is not None)
    assert dialog.codes.isVisible()
    assert {k: b.currentText() for k, b in dialog.codes.boxes.items()} == {"L|PCO2T": "?", "L|K": "?"}
    assert not dialog.codes.keep.isEnabled(), "nothing is chosen beforehand"
    for key, answer in (("L|PCO2T", "paco2"), ("L|K", "")):
        box = dialog.codes.boxes[key]
        box.setCurrentIndex(box.findData(answer))
        box.activated.emit(box.currentIndex())
    first = dialog.intake
    dialog.codes.keep.click()
    until(qtbot, lambda: dialog.intake is not first)
    assert dialog.codes.isHidden()
    assert [d.entry.raw for d in dialog.intake.entries if d.entry.channel == "paco2"] == ["8.1"]
    assert {a.message.key for a in dialog.intake.aside} == {"code.not_wanted"}
    dialog.reject()
    with Store.open(tmp_path / "ward.luffmark") as store:
        assert kept_codes(store) == {"L|PCO2T": "paco2", "L|K": ""}
        again = operations.read(store, "AB", NOW, request).value  # as the command line reads it
        assert [d.entry.channel for d in again.entries if d.entry.channel == "paco2"] == ["paco2"]
        assert again.unknown_codes == ()


def test_a_code_without_an_answer_stays_aside(qtbot, window, tmp_path):
    path = tmp_path / "results.hl7"
    path.write_text(message([*gas(), *LOCAL], **WHEN))
    dialog = IntakeDialog(window.model, ReadRequest(path, episode="bed-7"), window.reader, window.theme, window)
    dialog.open()
    until(qtbot, lambda: dialog.intake is not None)
    texts = [dialog.codes.boxes[k].accessibleName() for k in ("L|PCO2T", "L|K")]
    assert texts == ["What pCO2 at 37 is", "What potassium is"]
    taken(qtbot, window, dialog)


def test_what_is_said_of_codes_leaves_the_patient_that_was_chosen_and_the_other_way_round(qtbot, window, tmp_path):
    path = tmp_path / "results.hl7"
    path.write_text(message([*gas(), *LOCAL], **WHEN))
    dialog = shown(qtbot, window, path)
    (identifier,) = dialog.patients.boxes
    box = dialog.patients.boxes[identifier]
    dialog.patients.buttons[identifier].click()
    assert "Choose the episode first" in dialog.wrong.text()
    box.setCurrentIndex(box.findData("bed-7"))
    for key in ("L|PCO2T", "L|K"):
        code = dialog.codes.boxes[key]
        code.setCurrentIndex(code.findData(""))
        code.activated.emit(code.currentIndex())
        if key == "L|K":
            break
        first = dialog.intake
        dialog.codes.keep.click()
        until(qtbot, lambda before=first: dialog.intake is not before)
        assert dialog.patients.boxes[identifier].currentText() == "Bed 7 (bed-7)"
    first = dialog.intake
    dialog.patients.buttons[identifier].click()
    until(qtbot, lambda: dialog.intake is not first)
    assert dialog.patients.isHidden()
    assert dialog.codes.answers == {"L|K": ""}
    assert dialog.codes.keep.isEnabled()
    taken(qtbot, window, dialog)


# what was taken in is told


def test_what_was_taken_in_is_told_on_the_strip(qtbot, window, tmp_path):
    path = tmp_path / "night.csv"
    path.write_text(HEAD + GOOD)
    taken(qtbot, window, shown(qtbot, window, path))
    told = "night.csv is taken in: 1 entry for 1 episode. File, Files taken in... withdraws it whole."
    assert window.strip.plain() == told


def test_several_episodes_that_would_begin_are_named(qtbot, window, tmp_path):
    path = tmp_path / "night.csv"
    path.write_text(HEAD + GOOD + GOOD.replace("bed-9", "bed-10"))
    dialog = shown(qtbot, window, path)
    assert "2 new episodes begin: bed-9, bed-10." in dialog.summary.text()
    taken(qtbot, window, dialog)
    assert "2 entries for 2 episodes" in window.strip.plain()


# other windows and leaving


def test_what_another_window_recorded_meanwhile_is_looked_at_before_anything_is_taken(qtbot, window, tmp_path):
    path = tmp_path / "night.csv"
    path.write_text(HEAD + GOOD)
    dialog = shown(qtbot, window, path)
    with Store.open(tmp_path / "ward.luffmark") as other:
        intake = operations.read(other, "CD", NOW, ReadRequest(path)).value
        operations.take(other, "CD", NOW, operations.TakeRequest(intake))
    first = dialog.intake
    dialog.go.click()
    until(qtbot, lambda: dialog.intake is not first)
    assert "read again" in dialog.wrong.text()
    assert "1 row is in the store already" in dialog.summary.text()
    assert not dialog.go.isEnabled(), "there is nothing left to take"
    dialog.reject()
    with Store.open(tmp_path / "ward.luffmark") as store:
        assert len([e for e in store.entries("bed-9") if e.channel == "rr"]) == 1


def test_leaving_while_it_is_read_or_taken_leaves_nothing(qtbot, window, tmp_path):
    rows = "".join(f"bed-9,2026-03-{d:02d}T{h:02d}:{m:02d}:00+00:00,leak,{m},L/min,device,\n"
                   for d in range(1, 28) for h in range(24) for m in range(60))  # fmt: skip
    path = tmp_path / "trend.csv"
    path.write_text(HEAD + rows)
    head = window.model.session.head
    dialog = window.doers.file.take_in(path)
    dialog.reject()
    settled(qtbot, window)
    dialog = shown(qtbot, window, path)
    assert dialog.go.isEnabled()
    dialog.go.click()
    dialog.reject()
    settled(qtbot, window)
    with Store.open(tmp_path / "ward.luffmark") as store:
        assert store.head() == head
        assert "bed-9" not in store.episode_keys()
    assert not window.findChildren(IntakeDialog) or all(not d.isVisible() for d in window.findChildren(IntakeDialog))


# several files


def test_several_files_follow_each_other_and_one_answer_serves_for_all_parts(qtbot, window, tmp_path):
    parts = [tmp_path / f"part{n}.csv" for n in (1, 2, 3)]
    for n, path in enumerate(parts):
        rows = [f"2026-03-28 0{n}:{m:02d}:00,{20 + m % 9}" for m in range(60)]
        rows += [f"2026-03-28 0{n + 1}:00:00,29"]  # the first minute of the next part, again
        path.write_text("\n".join(["Time,Leak (L/min)", *rows]) + "\n")
    asking = window.doers.file.take_in(*parts)
    assert asking.windowTitle() == "Take in part1.csv (1 of 3)"
    until(qtbot, lambda: asking.looked is not None)
    for box, key in ((asking.answers.writer, "device"), (asking.answers.leak, "total")):
        box.setCurrentIndex(box.findData(key))
        box.activated.emit(box.currentIndex())
    box = asking.answers.episode
    box.setCurrentIndex(box.findData("bed-7"))
    box.activated.emit(box.currentIndex())
    asking.answers.shift.setValue(-60)
    for n in (1, 2, 3):
        until(qtbot, lambda a=asking: a.looked is not None)
        assert [m.key for m in asking.questions()] == []
        assert (asking.answers.episode_key, asking.answers.shift.value()) == ("bed-7", -60)
        asking.go.click()
        dialog = next(d for d in window.findChildren(IntakeDialog) if d.isVisible())
        assert dialog.windowTitle().endswith(f"({n} of 3)")
        until(qtbot, lambda d=dialog: d.intake is not None)
        taken(qtbot, window, dialog)
        if n < 3:
            until(qtbot, lambda: any(d.isVisible() for d in window.findChildren(MappingDialog)))
            asking = next(d for d in window.findChildren(MappingDialog) if d.isVisible())
    with Store.open(tmp_path / "ward.luffmark") as store:
        (leak,) = store.samples("bed-7", channel="leak")
        assert leak.t.size == 181, "the minutes that two parts hold stand once"
        assert len(store.sources()) == 3
        assert all(s.facts["clock_shift_s"] == -60 for s in store.sources())


def test_every_value_says_which_file_it_came_from(qtbot, window, tmp_path):
    path = tmp_path / "results.hl7"
    path.write_text(message(gas(), **WHEN))
    dialog = IntakeDialog(window.model, ReadRequest(path, episode="bed-7"), window.reader, window.theme, window)
    dialog.open()
    until(qtbot, lambda: dialog.intake is not None)
    taken(qtbot, window, dialog)
    with Store.open(tmp_path / "ward.luffmark") as store:
        record = store.episode("bed-7")
    correct = CorrectDialog(window.model, record, {"bed-7": "Bed 7"}, window.reader, window.theme, window)
    correct.open()
    rows = [correct.list.topLevelItem(r) for r in range(correct.list.topLevelItemCount())]
    until(qtbot, lambda: any("results.hl7" in row.text(3) for row in rows))
    assert {row.text(3) for row in rows if "kPa" in row.text(2)} == {"HL7, results.hl7"}
    assert "AB" in {row.text(3) for row in rows}, "what was typed names its person alone"
    correct.reject()


@pytest.mark.parametrize("in_time", [True, False])
def test_leaving_while_it_is_taken_says_whether_that_was_in_time(qtbot, window, tmp_path, monkeypatch, in_time):
    path = tmp_path / "night.csv"
    path.write_text(HEAD + GOOD)
    dialog = shown(qtbot, window, path)
    begun, go_on = Event(), Event()
    take = operations.take

    def slow(store, who, now, request):
        if not in_time:
            made = take(store, who, now, request)
        begun.set()
        go_on.wait(30)
        return take(store, who, now, request) if in_time else made

    monkeypatch.setattr(operations, "take", slow)
    dialog.go.click()
    assert begun.wait(30)
    dialog.reject()
    assert dialog.isVisible(), "whether anything stands is looked up first"
    go_on.set()
    if in_time:
        until(qtbot, lambda: not dialog.isVisible())
    else:
        until(qtbot, lambda: "before it could be stopped" in dialog.wrong.text())
        dialog.reject()
        assert not dialog.isVisible()
    settled(qtbot, window)
    with Store.open(tmp_path / "ward.luffmark") as store:
        assert store.has_episode("bed-9") is not in_time


def test_what_is_not_listed_is_counted_and_samples_stand_first(qtbot, window, tmp_path):
    path = tmp_path / "night.csv"
    rows = [f"bed-9,2026-03-28T0{m // 60}:{m % 60:02d}:{s:02d}+00:00,rr,{18 + s % 5},/min,AB,\n"
            for m in range(60, 180) for s in range(0, 60, 12)]  # fmt: skip
    device = [f"bed-9,2026-03-28T01:{m:02d}:00+00:00,vte,4{m:02d},mL,device,\n" for m in range(60)]
    path.write_text(HEAD + "".join(rows + device))
    dialog = shown(qtbot, window, path)
    last = dialog.table.rowCount() - 1
    assert dialog.table.item(0, 2).text() == "60 samples"
    assert [dialog.table.item(last, c).text() for c in (1, 2)] == ["more", "101"]
    taken(qtbot, window, dialog)
    path.write_text(HEAD + "".join(row.replace(",4", ",5") for row in device))
    again = shown(qtbot, window, path)
    assert "over 60 that were taken in before" in again.table.item(0, 3).text()
    assert "60 device samples that were taken in before lie under it" in again.summary.text()
    again.reject()
