"""The handover in the window: read by keys alone, printed and closed, and nothing lost to a bad disk."""

from io import BytesIO
from pathlib import Path

import pytest
from pypdf import PdfReader
from PySide6.QtCore import QRect, Qt
from PySide6.QtGui import QPageLayout
from PySide6.QtPrintSupport import QPrintDialog, QPrinter
from PySide6.QtWidgets import QApplication, QDialog, QGraphicsView

from app.dialogs.print_preview import HandoverPreview
from app.keeping.preferences import Preferences
from app.operations import handover
from app.operations.last_handover import facts_of
from app.operations.outcome import CancelledError, watched
from app.sheet import operations as handover_sheet
from app.sheet.content import sheet_content
from app.words import Reader
from core.record.instant import HOUR
from storage.store import Store
from tests.support.open_window import NOW, ZONE, make_store, open_window, settled, until

Key = Qt.Key


def reading(qtbot, window):
    window.show_page("handover")
    until(qtbot, lambda: "Bed 7" in window.pages.handover.plain())
    settled(qtbot, window)
    return window.pages.handover


def test_it_is_read_by_keys_alone(qtbot, window):
    view = reading(qtbot, window)
    bar = view.text.verticalScrollBar()
    view.text.setFocus()
    places = [bar.value()]
    for _ in range(2):
        qtbot.keyClick(view.text, Key.Key_N)
        places.append(bar.value())
    assert places == sorted(set(places)), "each turn goes on"
    qtbot.keyClick(view.text, Key.Key_P)
    assert bar.value() == places[1]
    qtbot.keyClick(view.text, Key.Key_P)
    assert bar.value() == 0
    qtbot.keyClick(view.text, Key.Key_PageDown)
    assert bar.value() > 0
    bar.setValue(0)
    qtbot.keyClick(view.text, Key.Key_Tab)  # to the first bed
    qtbot.keyClick(view.text, Key.Key_Return)
    assert bar.value() == places[1]


def test_it_says_all_that_the_paper_says(qtbot, window):
    view = reading(qtbot, window)
    flat = " ".join(view.plain().replace("\N{WORD JOINER}", "").split())
    with Store.open(window.model.session.store_path) as store:
        made = handover.prepare(store, "AB", NOW, window.doers.ward.handover_request()).value
    for page in sheet_content(made, window.reader).episodes:
        said = [*page.since, *page.levers, *page.told, *page.due, page.since_head, page.standing]
        said += [v for _, v in (*page.facts, *page.support, *page.plan, *page.care)]
        said += [x for g in page.gases for x in (g.ph, g.paco2, g.delta_paco2, g.verdict)]
        said += [c.response for c in page.changes] + [f.evidence for f in page.flags]
        assert all(" ".join(text.split()) in flat for text in said), page.label


def test_what_is_copied_is_the_plain_text(qtbot, window):
    view = reading(qtbot, window)
    view.copy.click()
    text = QApplication.clipboard().text()
    assert text.startswith("HANDOVER. Shift 27-Mar-2026 19:30 to 28-Mar-2026 07:30, as of 05:30")
    assert not [c for c in text if ord(c) > 0x17F], "no signs that another system may not take"
    assert all(len(line) <= 100 for line in text.splitlines())


def test_a_full_disk_is_told_and_the_typed_remark_stays(qtbot, window, tmp_path):
    window.model.select("bed-7")
    qtbot.keyClicks(window.strip.line, "handover remark watch the left side of the mask")
    settled(qtbot, window)
    qtbot.keyClick(window.strip.line, Key.Key_Return)
    settled(qtbot, window)
    qtbot.keyClicks(window.strip.line, "handover remark half ty")
    (tmp_path / "full.pdf").symlink_to("/dev/full")
    window.doers.ward.save_handover(tmp_path / "full.pdf")
    until(qtbot, lambda: "full.pdf" in window.strip.plain())
    assert window.strip.line.text() == "handover remark half ty"
    view = reading(qtbot, window)
    assert "watch the left side of the mask" in view.plain()
    window.doers.ward.save_handover(tmp_path / "there.pdf")
    until(qtbot, (tmp_path / "there.pdf").exists)
    text = "".join(p.extract_text() for p in PdfReader(tmp_path / "there.pdf").pages)
    assert "watch the left side of the mask" in " ".join(text.split())


@pytest.mark.qt_log_ignore("QPainter::begin", "QPrinter::setOutputFileName")
def test_a_printer_that_takes_nothing_is_told(qtbot, window):
    with Store.open(window.model.session.store_path) as store:
        made = handover.prepare(store, "AB", NOW, window.doers.ward.handover_request()).value
    preview = HandoverPreview(sheet_content(made, window.reader), window.theme, window)
    qtbot.addWidget(preview)
    preview.failed.connect(window.doers.review._not_on_paper)
    gone = QPrinter(QPrinter.PrinterMode.HighResolution)
    gone.setOutputFormat(QPrinter.OutputFormat.PdfFormat)
    gone.setOutputFileName("/nowhere/at all.pdf")
    preview.print_on(gone)
    assert preview.pages == 0
    assert "Nothing was printed" in window.strip.plain()
    assert "Ctrl+P" in window.strip.plain()


def test_an_older_page_says_that_it_is_old_until_the_new_one_is_there(qtbot, window):
    window.show_page("handover")
    view = window.pages.handover
    assert "older" not in view.state.text()
    assert not view.copy.isEnabled()
    reading(qtbot, window)
    assert view.copy.isEnabled()
    window.show_page("handover")
    assert "What stands below is the older one" in view.state.text()
    assert not view.copy.isEnabled()
    view.set_theme(view._theme)  # another look makes it no newer
    assert "older" in view.state.text()
    settled(qtbot, window)
    assert "older" not in view.state.text()
    assert view.copy.isEnabled()


def test_a_handover_that_was_closed_is_what_the_page_compares_with_at_once(qtbot, window):
    view = reading(qtbot, window)
    assert "No handover was closed before" in view.plain()
    window.doers.review.do_close_handover()
    dialog = window.doers.review._dialog
    dialog.submit()
    assert "Both names" in dialog.wrong.text()
    dialog.given.setText("AB")
    dialog.taken.setText("CD")
    dialog.submit()
    assert dialog.wrong.text().startswith("Gathering the shift")
    until(qtbot, lambda: "is closed" in window.strip.plain())
    settled(qtbot, window)
    assert "No handover was closed before" not in view.plain()
    assert "A handover of this shift was closed 28-Mar-2026 05:30." in " ".join(view.plain().split())


def test_closing_a_handover_again_says_that_one_is_closed(qtbot, window):
    for n in range(3):
        window.doers.review.do_close_handover()
        dialog = window.doers.review._dialog
        settled(qtbot, window)
        assert dialog.already.isVisible() is (n > 0)
        if n == 1:
            assert dialog.already.text().startswith("A handover of this shift is closed already: ")
            assert "AB to CD, at 28-Mar-2026 05:30." in dialog.already.text()
        if n == 2:
            assert dialog.already.text().startswith("2 handovers of this shift are closed already, the last: ")
        dialog.given.setText("AB")
        dialog.taken.setText("CD")
        dialog.submit()
        until(qtbot, lambda: window.doers.review._dialog is None)


def test_paper_chosen_once_is_kept(qtbot, window, tmp_path):
    window.doers.review.do_close_handover()
    dialog = window.doers.review._dialog
    assert dialog.paper.currentData() == "A4"
    dialog.paper.setCurrentIndex(dialog.paper.findData("Letter"))
    dialog.taken.setText("CD")
    dialog.submit()
    until(qtbot, lambda: window.doers.review._dialog is None)
    settled(qtbot, window)
    assert window.preferences.paper == "Letter"
    window.doers.ward.save_handover(tmp_path / "l.pdf")
    until(qtbot, (tmp_path / "l.pdf").exists)
    box = PdfReader(tmp_path / "l.pdf").pages[0].mediabox
    assert (round(box.width), round(box.height)) == (612, 792)
    with Store.open(window.model.session.store_path) as store:
        (kept,) = store.documents()
        assert facts_of(kept).as_of == NOW
        closed = PdfReader(BytesIO(store.document(kept.id)))
        assert (round(closed.pages[0].mediabox.width), len(closed.pages)) == (612, 3)
        assert "AB" in closed.pages[0].extract_text()


def test_it_is_as_of_now_while_the_shift_runs(qtbot, window):
    view = reading(qtbot, window)
    assert "to 28-Mar-2026 07:30, as of 05:30" in view.plain()


def request_of(path: Path) -> handover_sheet.SheetRequest:
    return handover_sheet.SheetRequest(handover.HandoverRequest(NOW - 10 * HOUR, NOW), Reader(ZONE), path)


@pytest.mark.parametrize("at", range(5))
def test_stopped_at_any_report_there_is_no_file_and_nothing_in_the_chain(qapp, tmp_path, at):
    told: list[tuple[int, int]] = []

    def stop(done: int, total: int) -> None:
        told.append((done, total))
        if len(told) == at + 1:
            raise CancelledError

    with Store.open(make_store(tmp_path / "w.luffmark")) as store:
        head = store.head()
        with pytest.raises(CancelledError), watched(stop):
            handover_sheet.write(store, "AB", NOW, request_of(tmp_path / "x.pdf"))
        assert not (tmp_path / "x.pdf").exists()
        assert store.head() == head
        assert told[:2] == [(0, 2), (1, 2)][: at + 1], "two episodes gathered, then three pages"
        assert handover_sheet.write(store, "AB", NOW, request_of(tmp_path / "x.pdf")).value == 3
        assert store.head() > head


def preview_of(qtbot, window):
    with Store.open(window.model.session.store_path) as store:
        made = handover.prepare(store, "AB", NOW, window.doers.ward.handover_request()).value
    preview = HandoverPreview(sheet_content(made, window.reader), window.theme, window)
    preview.show()
    qtbot.waitExposed(preview)
    until(qtbot, lambda: preview.pages == 3)
    return preview


def test_the_preview_turns_its_pages_and_prints_upright(qtbot, window, tmp_path, monkeypatch):
    preview = preview_of(qtbot, window)
    assert preview.place.text() == "Page 1 of 3"
    assert not preview.before.isEnabled()
    preview.after.click()
    preview.after.click()
    assert preview.place.text() == "Page 3 of 3"
    assert not preview.after.isEnabled()

    def lying(dialog):
        printer = dialog.printer()
        printer.setOutputFormat(QPrinter.OutputFormat.PdfFormat)
        printer.setOutputFileName(str(tmp_path / "out.pdf"))
        printer.setPageOrientation(QPageLayout.Orientation.Landscape)
        return QDialog.DialogCode.Accepted

    monkeypatch.setattr(QPrintDialog, "exec", lying)
    with qtbot.waitSignal(preview.accepted):
        preview.print_button.click()
    pages = PdfReader(tmp_path / "out.pdf").pages
    assert len(pages) == 3
    assert all(page.mediabox.height > page.mediabox.width for page in pages)


def test_the_preview_is_black_on_white_in_the_dark_look_too(qtbot, tmp_path):
    dark = Preferences(theme="dark", cautions_seen=True)
    with open_window(qtbot, make_store(tmp_path / "w.luffmark"), preferences=dark) as window:
        preview = preview_of(qtbot, window)
        (sheet,) = preview.view.findChildren(QGraphicsView)
        page = max(sheet.items(), key=lambda i: (i.boundingRect().height(), -i.sceneBoundingRect().top()))
        seen = sheet.mapFromScene(page.sceneBoundingRect()).boundingRect()
        title = QRect(
            seen.x() + seen.width() // 20, seen.y() + seen.height() // 40, seen.width() // 4, seen.height() // 50
        )
        image = sheet.viewport().grab(title).toImage()
        assert not image.isNull()
        shades = [image.pixelColor(x, y).lightness() for x in range(image.width()) for y in range(image.height())]
        assert max(shades) > 240
        darkest = min(shades)
        assert darkest < 60
        preview.close()
