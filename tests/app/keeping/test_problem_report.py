"""The log and the problem report hold nothing that somebody typed, whatever went wrong."""

import logging

import pytest
from hypothesis import given
from hypothesis import strategies as st

from app.dialogs.problem_report import ProblemReportDialog
from app.keeping import log_file
from app.keeping.log_file import MOST_BYTES, NAME, newest_lines, scrubbed_text, scrubbed_trace, start_log
from app.keeping.preferences import Preferences
from app.keeping.problem_report import Open, report
from tests.support.open_window import make_store, open_window, settled

SECRET = "Zsófia Beispiel"


@pytest.fixture
def log(tmp_path):
    handler = start_log(tmp_path / "logs")
    yield tmp_path / "logs"
    logging.getLogger("luffmark").removeHandler(handler)
    handler.close()


def failing(value):
    raise ValueError(f"cannot read {value}")


def test_a_log_holds_places_and_kinds_and_no_values(log):
    logger = logging.getLogger("luffmark.test")
    logger.warning("no words for %s at %d", SECRET, 17)
    try:
        failing(SECRET)
    except ValueError as error:
        logger.error("unexpected error in %s", SECRET, exc_info=error)
    text = (log / NAME).read_text("utf-8")
    assert SECRET not in text
    assert "no words for <str> at <int>" in text
    assert "ValueError" in text
    assert "test_problem_report.py" in text
    assert "failing" in text
    assert str(log) not in text


def test_causes_are_told_without_their_texts():
    try:
        try:
            failing(SECRET)
        except ValueError as error:
            raise RuntimeError(SECRET) from error
    except RuntimeError as error:
        told = scrubbed_trace(error)
    assert SECRET not in told
    assert told.index("RuntimeError") < told.index("ValueError")


@given(st.text(min_size=6), st.integers())
def test_no_value_passes_into_the_text(name, number):
    record = logging.LogRecord("luffmark", 30, "x.py", 1, "one %s, two %d, three %.3f", (name, number, 1.5), None)
    assert scrubbed_text(record) == "one <str>, two <int>, three <float>"


def test_logs_rotate_and_stay_small(log, monkeypatch):
    logger = logging.getLogger("luffmark.test")
    for _ in range(6 * MOST_BYTES // 1000):
        logger.warning("x" * 1000)
    files = sorted(log.glob(NAME + "*"))
    assert 2 <= len(files) <= 1 + log_file.KEPT
    assert all(f.stat().st_size <= MOST_BYTES for f in files)
    assert len(newest_lines(log, 5)) == 5


def test_a_folder_that_takes_no_writing_stops_nothing(tmp_path):
    (tmp_path / "file").write_text("x")
    assert start_log(tmp_path / "file" / "logs") is None


def test_a_report_is_made_of_what_the_program_knows(tmp_path):
    kept = Preferences(person="ZB", recent_stores=(f"/home/{SECRET}/ward.luffmark",))
    text = report(kept, Open(9, 120, True, False, False, "ward", ("store.read_only",)), tmp_path, (1280, 800))
    assert "Store with 9 episodes, ledger at 120, read-only" in text
    assert "Page ward" in text
    assert SECRET not in text
    assert "ZB" not in text
    assert "PySide6-Essentials" in text


def test_the_window_shows_it_before_anything_is_saved(qtbot, tmp_path):
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as window:
        window.actions_by_key["report_problem"].trigger()
        dialog = next(d for d in window.findChildren(ProblemReportDialog) if d.isVisible())
        settled(qtbot, window)
        text = dialog.text.toPlainText()
        assert "Store with 2 episodes" in text
        for typed in ("Bed 7", "bed-7", "AB", str(tmp_path), "ward.luffmark", "7.26"):
            assert typed not in text
        assert list(tmp_path.glob("*.txt")) == []
        dialog.text.setPlainText("only this")
        dialog.save_to(tmp_path / "report.txt")
        assert (tmp_path / "report.txt").read_text("utf-8") == "only this"
        dialog.save_to(tmp_path / "none" / "report.txt")
        assert "none" in dialog.said.text()
        dialog.reject()
