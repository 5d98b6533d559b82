"""The mapping dialog in real use: what it asks, what it shows, what it keeps, and that nothing is guessed."""

from pathlib import Path

import pytest
from PySide6.QtCore import QPoint, QPointF, Qt
from PySide6.QtGui import QWheelEvent
from PySide6.QtWidgets import QApplication, QComboBox

from app.cli import main
from app.dialogs.intake import IntakeDialog
from app.intake_window.mapping_dialog import MappingDialog
from storage.intake.writing import Writing
from storage.store import Store
from tests.support.hl7_messages import gas, message
from tests.support.open_window import settled, until

GASES = (
    "Ward 4\n\nSampled;pH;pCO2;pO2 (kPa);Remark\n28.03.2026 01:10;7,31;8,1;7,9;calm\n"
    "28.03.2026 02:10;7,33;7,6;8,0;calm\n"
)


def open_mapping(qtbot, window, path: Path) -> MappingDialog:
    dialog = window.doers.file.take_in(path)
    assert isinstance(dialog, MappingDialog)
    until(qtbot, lambda: dialog.looked is not None)
    return dialog


def choose(box: QComboBox, data: str) -> None:
    """Choose as a person does."""
    box.setCurrentIndex(box.findData(data))
    box.activated.emit(box.currentIndex())


def visible(window, kind):
    return next(d for d in window.findChildren(kind) if d.isVisible())


@pytest.fixture
def gases(tmp_path):
    path = tmp_path / "analyser.csv"
    path.write_text(GASES)
    return path


def test_the_unit_and_whose_it_is_are_asked_before_anything_is_read(qtbot, window, gases):
    window.select("bed-7")
    dialog = open_mapping(qtbot, window, gases)
    assert not dialog.go.isEnabled()
    assert {m.key for m in dialog.questions()} == {"mapping.unit", "mapping.episode"}, (
        "the episode in hand is no answer"
    )
    assert "kPa" in dialog.columns.item(2, 4).text()
    assert dialog.preview.item(0, 4).text().startswith("? 8,1")
    choose(dialog.columns.box_of("pCO2", unit=True), "kPa")
    assert dialog.preview.item(0, 4).text() == "8.1 kPa = 61 mmHg"
    assert dialog.columns.item(2, 4).text() == ""
    choose(dialog.answers.episode, "bed-7")
    assert dialog.questions() == ()
    assert dialog.go.isEnabled()
    assert dialog.preview.item(0, 1).text() == "28-Mar-2026 01:10"
    dialog.reject()


def test_from_mapping_to_record_and_recognised_next_time(qtbot, window, gases):
    dialog = open_mapping(qtbot, window, gases)
    choose(dialog.columns.box_of("pCO2", unit=True), "kPa")
    choose(dialog.columns.box_of("Remark"), "")
    choose(dialog.answers.episode, "bed-7")
    dialog.name.setText("analyser ward 4")
    dialog.go.click()
    intake = visible(window, IntakeDialog)
    until(qtbot, lambda: intake.intake is not None)
    assert "6 entries" in intake.summary.text()
    head = window.model.session.head
    intake.go.click()
    until(qtbot, lambda: window.model.session.head > head)
    settled(qtbot, window)
    again = open_mapping(qtbot, window, gases)
    assert again.kept.currentData() == "analyser ward 4"
    assert {m.key for m in again.questions()} == {"mapping.episode"}, "whose it is, is asked for each file"
    again.reject()


def test_a_device_table_asks_for_the_meaning_of_leak(qtbot, window, tmp_path):
    path = tmp_path / "trend.csv"
    rows = [f"2026-03-28 01:{m:02d},{20 + m},4{m:02d}" for m in range(50)]
    path.write_text("\n".join(["Time,Leak (L/min),Tidal volume (mL)", *rows]))
    dialog = open_mapping(qtbot, window, path)
    choose(dialog.answers.episode, "bed-7")
    assert [m.key for m in dialog.questions()] == ["mapping.leak"]
    assert dialog.answers.leak.isVisible()
    choose(dialog.answers.leak, "total")
    dialog.answers.shift.setValue(-3600)
    assert dialog.preview.item(0, 1).text() == "28-Mar-2026 00:00"
    assert dialog.go.isEnabled()
    dialog.reject()


def test_changing_the_column_of_time_frees_the_old_one(qtbot, window, tmp_path):
    path = tmp_path / "a.csv"
    path.write_text("Sampled,Printed,pH\n2026-03-28 01:10,2026-03-28 01:20,7.31\n")
    dialog = open_mapping(qtbot, window, path)
    assert not dialog.columns.box_of("Sampled").isEnabled()
    choose(dialog.answers.time, "Printed")
    assert dialog.columns.box_of("Sampled").isEnabled()
    assert not dialog.columns.box_of("Printed").isEnabled()
    assert dialog.preview.item(0, 1).text() == "28-Mar-2026 01:20"
    dialog.reject()


def test_a_wheel_over_a_choice_changes_nothing(qtbot, window, gases):
    dialog = open_mapping(qtbot, window, gases)
    box = dialog.columns.box_of("pH")
    before = box.currentIndex()
    where, turn = QPointF(5, 5), QPoint(0, -120)
    wheel = QWheelEvent(where, QPointF(box.mapToGlobal(where)), turn, turn, Qt.MouseButton.NoButton,
                        Qt.KeyboardModifier.NoModifier, Qt.ScrollPhase.NoScrollPhase, False)  # fmt: skip
    QApplication.sendEvent(box, wheel)
    assert box.currentIndex() == before
    dialog.reject()


def test_a_file_that_is_no_table_says_so(qtbot, window, tmp_path):
    path = tmp_path / "a.xlsx"
    path.write_bytes(b"PK\x03\x04 broken")
    dialog = window.doers.file.take_in(path)
    until(qtbot, lambda: "damaged" in dialog.asked.text())
    assert not dialog.go.isEnabled()
    dialog.reject()


def test_every_field_has_a_name(qtbot, window, gases):
    dialog = open_mapping(qtbot, window, gases)
    for box in dialog.findChildren(QComboBox):
        assert box.accessibleName(), box
    for widget in (dialog.name, dialog.preview, dialog.columns, dialog.answers.shift):
        assert widget.accessibleName()
    dialog.reject()


def test_a_patient_of_a_result_file_is_confirmed_once(qtbot, window, tmp_path):
    path = tmp_path / "results.hl7"
    path.write_text(message(gas(), at="202603280425+0000", sent="202603280430+0000"))
    dialog = window.doers.file.take_in(path)
    until(qtbot, lambda: dialog.intake is not None)
    assert not dialog.go.isEnabled()
    box = dialog.patients.boxes["WARD-7|0042"]
    assert box.currentText() == "", "nobody is chosen beforehand"
    box.setCurrentText("bed-7")
    first = dialog.intake
    dialog.patients.buttons["WARD-7|0042"].click()
    until(qtbot, lambda: dialog.intake is not first)
    assert dialog.patients.isHidden()
    assert dialog.go.isEnabled()
    head = window.model.session.head
    dialog.go.click()
    until(qtbot, lambda: window.model.session.head > head)
    path.write_text(message(gas(), order="F2", at="202603280455+0000", sent="202603280456+0000"))
    settled(qtbot, window)
    later = window.doers.file.take_in(path)
    until(qtbot, lambda: later.intake is not None)
    assert later.go.isEnabled()
    later.reject()


def test_what_will_be_recorded_is_listed_before_it_is(qtbot, window, tmp_path):
    path = tmp_path / "results.hl7"
    path.write_text(message(gas(), at="202603280425+0000", sent="202603280430+0000"))
    dialog = window.doers.file.take_in(path)
    until(qtbot, lambda: dialog.intake is not None)
    dialog.patients.boxes["WARD-7|0042"].setCurrentText("bed-7")
    first = dialog.intake
    dialog.patients.buttons["WARD-7|0042"].click()
    until(qtbot, lambda: dialog.intake is not first)
    rows = [[dialog.table.item(r, c).text() for c in range(1, 4)] for r in range(dialog.table.rowCount())]
    assert ["new, PaCO2", "8.1 kPa", "bed-7, 28-Mar-2026 04:25"] in rows
    assert ["new, pH", "7.31", "bed-7, 28-Mar-2026 04:25"] in rows
    dialog.reject()


def test_encoding_and_header_are_shown_and_may_be_said_otherwise(qtbot, window, tmp_path):
    path = tmp_path / "old.csv"
    path.write_bytes("Ward 4;;\nTime;pH;Remark\n28.03.2026 01:10;7,31;sp\u00e4t\n".encode("cp437"))
    dialog = open_mapping(qtbot, window, path)
    assert dialog.written.encoding.currentData() == "cp1252"
    assert "assumed" in dialog.written.about.text()
    choose(dialog.written.encoding, "cp437")
    until(qtbot, lambda: dialog.looked.table.dialect.encoding == "cp437")
    assert "assumed" not in dialog.written.about.text()
    assert dialog.columns.item(2, 1).text() == "sp\u00e4t"
    assert dialog.written.header.value() == 2
    dialog.written.header.setValue(3)
    until(qtbot, lambda: "rows" in dialog.asked.text())
    assert not dialog.go.isEnabled()
    dialog.written.header.setValue(2)
    until(qtbot, lambda: dialog.mapping.header == ("Time", "pH", "Remark"))
    choose(dialog.answers.episode, "bed-7")
    dialog.go.click()
    intake = visible(window, IntakeDialog)
    until(qtbot, lambda: intake.intake is not None)
    assert [d.entry.words for d in intake.intake.entries if d.entry.channel == "note"] == ["sp\u00e4t"]
    assert intake.intake.source.facts["encoding"] == "cp437"
    assert not intake.intake.doubts
    intake.reject()


def test_the_command_line_reads_by_the_mapping_that_the_window_kept(qtbot, window, gases, tmp_path, capsys):
    dialog = open_mapping(qtbot, window, gases)
    choose(dialog.columns.box_of("pCO2", unit=True), "kPa")
    choose(dialog.answers.episode, "bed-7")
    dialog.name.setText("analyser ward 4")
    dialog.go.click()
    intake = visible(window, IntakeDialog)
    until(qtbot, lambda: intake.intake is not None)
    shown = [(d.entry.channel, d.entry.at, d.entry.raw, d.entry.number) for d in intake.intake.entries]
    intake.reject()
    settled(qtbot, window)
    store = str(tmp_path / "ward.luffmark")
    assert main(["--store", store, "--by", "AB", "intake", str(gases), "--episode", "bed-7"]) == 0
    with Store.open(tmp_path / "ward.luffmark") as opened:
        source = opened.sources()[-1]
        found = [(e.channel, e.at, e.raw, e.number) for e in opened.source_entries(source.id)]
    assert sorted(map(str, found)) == sorted(map(str, shown))
    assert source.facts["mapping"] == "analyser ward 4"


def type_into(qtbot, box: QComboBox, text: str) -> None:
    """Type over what a box holds and leave it, as a person does."""
    line = box.lineEdit()
    line.setFocus()
    line.selectAll()
    qtbot.keyClicks(line, text)
    line.editingFinished.emit()


def test_a_delimiter_is_typed_kept_and_known_again_by_the_command_line_alike(qtbot, window, tmp_path, capsys):
    path = tmp_path / "odd.csv"
    path.write_bytes("Ward;4;x\nTime^pH^Remark\n2026-03-28 01:10^7.31^sp\u00e4t; he said\n".encode("cp437"))
    dialog = open_mapping(qtbot, window, path)
    type_into(qtbot, dialog.written.mark, "ab")
    assert "'ab'" in dialog.written.about.text(), "why it is not taken"
    assert dialog.written.mark.currentText() == "semicolon"
    type_into(qtbot, dialog.written.mark, "^")
    until(qtbot, lambda: dialog.mapping.header == ("Time", "pH", "Remark"))
    choose(dialog.written.encoding, "cp437")
    until(qtbot, lambda: dialog.looked.table.dialect.encoding == "cp437")
    assert dialog.columns.item(2, 1).text() == "sp\u00e4t; he said"
    assert dialog.written.mark.currentText() == "^"
    choose(dialog.answers.episode, "bed-7")
    dialog.name.setText("odd one")
    dialog.go.click()
    intake = visible(window, IntakeDialog)
    until(qtbot, lambda: intake.intake is not None)
    intake.reject()
    settled(qtbot, window)
    again = open_mapping(qtbot, window, path)
    assert again.kept.currentData() == "odd one"
    assert again.mapping.header == ("Time", "pH", "Remark")
    choose(again.kept, "")
    until(qtbot, lambda: again.mapping.header != ("Time", "pH", "Remark"))
    assert again.written.said == Writing(), "as proposed is as found"
    choose(again.kept, "odd one")
    until(qtbot, lambda: again.mapping.header == ("Time", "pH", "Remark"))
    again.reject()
    settled(qtbot, window)
    store = ["--store", str(tmp_path / "ward.luffmark"), "--by", "AB"]
    assert main([*store, "intake", str(path), "--episode", "bed-7"]) == 0
    with Store.open(tmp_path / "ward.luffmark") as opened:
        source = opened.sources()[-1]
        assert [e.words for e in opened.source_entries(source.id) if e.channel == "note"] == ["sp\u00e4t; he said"]
    assert (source.facts["encoding"], source.facts["delimiter"], source.facts["header_line"]) == ("cp437", "^", 2)
    assert main([*store, "intake", str(path), "--episode", "bed-7", "--delimiter", "ab"]) == 1
    assert "one character" in capsys.readouterr().err
    assert main([*store, "mapping", "propose", str(path), "--delimiter", "^"]) == 0
    assert '"delimiter": "^"' in capsys.readouterr().out


def test_leaving_the_field_of_the_delimiter_says_nothing(qtbot, window, gases):
    dialog = open_mapping(qtbot, window, gases)
    looked = dialog.looked
    dialog.written.mark.lineEdit().editingFinished.emit()
    assert dialog.written.said == Writing()
    assert dialog.looked is looked
    dialog.reject()


def test_a_column_that_a_person_names_brings_the_unit_that_its_header_says(qtbot, window, tmp_path):
    path = tmp_path / "trend.csv"
    rows = [f"27.03.2026 21:{m:02d};18,5;{'---' if m < 20 else '11,5'};480" for m in range(10, 50)]
    path.write_text("\n".join(["Zeit;Spitze (mbar);MinVol (l/min);Vte (ml)", *rows]))
    dialog = open_mapping(qtbot, window, path)
    choose(dialog.columns.box_of("Spitze (mbar)"), "pip")
    choose(dialog.columns.box_of("MinVol (l/min)"), "mv")
    assert dialog.columns.box_of("Spitze (mbar)", unit=True).currentData() == "hPa"
    assert dialog.columns.box_of("MinVol (l/min)", unit=True).currentData() == "L/min"
    choose(dialog.answers.episode, "bed-7")
    assert dialog.questions() == ()
    dialog.go.click()
    intake = visible(window, IntakeDialog)
    until(qtbot, lambda: intake.intake is not None)
    assert "10 device samples are empty: gaps." in intake.summary.text()
    assert any("40 samples (10 empty)" in intake.table.item(r, 2).text() for r in range(intake.table.rowCount()))
    intake.reject()


def test_a_bed_s_name_in_a_column_is_asked_about_and_answered_once_for_the_files_of_one_night(
    qtbot, window, tmp_path
):
    paths = []
    for n in (1, 2):
        paths.append(tmp_path / f"part{n}.csv")
        paths[-1].write_text(
            f"Time,Bed,pH\n2026-03-28T0{n}:10:00Z,Bed 7,7.2{n}\n2026-03-28T0{n}:20:00Z,Bed 99,7.30\n"
        )
    first = window.doers.file.take_in(*paths)
    until(qtbot, lambda: first.looked is not None)
    choose(first.answers.writer, "person")
    first.name.setText("beds")
    first.go.click()
    found = visible(window, IntakeDialog)
    until(qtbot, lambda: found.intake is not None)
    assert not found.go.isEnabled()
    assert "A new episode begins: Bed 99." in found.summary.text()
    box = found.patients.boxes["Bed 7"]
    assert box.accessibleName() == "'Bed 7' in this file is"
    box.setCurrentIndex(box.findData("bed-7"))
    found.patients.buttons["Bed 7"].click()
    until(qtbot, lambda: found.go.isEnabled())
    assert found.intake.episodes == ("bed-7", "Bed 99")
    found.go.click()
    until(qtbot, lambda: any(d.isVisible() and d is not first for d in window.findChildren(MappingDialog)))
    second = visible(window, MappingDialog)
    until(qtbot, lambda: second.looked is not None and second.go.isEnabled())
    second.go.click()
    until(qtbot, lambda: any(d.isVisible() and d.intake is not None for d in window.findChildren(IntakeDialog)))
    other = visible(window, IntakeDialog)
    until(qtbot, lambda: other.go.isEnabled())
    assert other.intake.episodes == ("bed-7", "Bed 99")
    assert "new episode" not in other.summary.text()
    other.reject()
