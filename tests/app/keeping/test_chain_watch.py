"""A plain store that was changed from outside is told of in window and command line, and loses no backup."""

import json

import pytest

from app.cli import main
from app.operations import backup as operations
from app.operations.backup import Rotation
from app.operations.episode import BeginRequest, begin
from core.record.instant import HOUR
from storage.backup_rotation import backups_in
from storage.store import Store
from tests.support.open_window import NOW, ZONE, make_store, open_window, settled, until
from tests.support.tampered import tamper

FORGED = "UPDATE entry SET number = 7.39 WHERE channel = 'ph' AND number = 7.24"


@pytest.fixture
def forged(tmp_path):
    path = make_store(tmp_path / "ward.luffmark")
    tamper(path, FORGED)
    return path


def test_a_changed_value_is_told_in_the_window_and_stays_told(qtbot, forged):
    with open_window(qtbot, forged) as window:
        keeping = window.keeping
        assert "figures of it may be wrong" not in keeping.notices.plain()
        keeping.chain.look()
        until(qtbot, lambda: "figures of it may be wrong" in keeping.notices.plain())
        assert "of bed-7" in keeping.notices.plain()
        assert "by AB" in keeping.notices.plain()
        assert list(keeping.notices.ways) == ["restore", "salvage"]
        assert not keeping.backups.expire


def test_a_bed_of_changed_rows_is_missing_and_named_and_the_others_stand(qtbot, forged):
    """No figure of it is shown, for however short a time; the flags of the others are kept as ever."""
    with open_window(qtbot, forged) as window:
        assert list(window.feed.answers) == ["bed-3"]
        assert "Missing from the ward: bed-7." in window.keeping.notices.plain()
        assert list(window.keeping.notices.ways) == ["restore", "salvage"]
        window.select("bed-3")  # who is sound is logged for as ever, a new bed with its name among it
        head = window.model.session.head
        window.model.ask(begin, BeginRequest("bed-9", {"label": "Bed 9"}, NOW, ZONE))
        until(qtbot, lambda: window.model.session.head > head and "bed-9" in window.feed.answers)
        window.feed._all_wanted = True
        window.feed._ask()
        settled(qtbot, window)
        assert "Missing from the ward: bed-7." in window.keeping.notices.plain()


def test_a_sound_store_and_one_that_cannot_be_forged_are_left_in_peace(qtbot, tmp_path):
    with open_window(qtbot, make_store(tmp_path / "ward.luffmark")) as window:
        watch = window.keeping.chain
        assert watch._first.isActive()
        watch.look()
        until(qtbot, lambda: not watch._runner.is_busy)
        assert watch.found == ()
        assert window.keeping.notices.plain() == ""
        settled(qtbot, window)


def test_commands_say_it_before_they_give_figures(forged, capsys):
    assert main(["--store", str(forged), "--zone", ZONE, "figures", "bed-3"]) == 0
    err = capsys.readouterr().err
    assert "figures of it may be wrong" in err
    assert "of bed-7" in err
    assert main(["--store", str(forged), "--zone", ZONE, "figures", "bed-7"]) == 1, "no figure of what was changed"


def test_a_backup_of_a_damaged_store_is_kept_and_is_no_success(forged, tmp_path, capsys):
    copy = tmp_path / "copy.luff"
    assert main(["--store", str(forged), "--by", "AB", "--json", "backup", str(copy)]) == 1
    out = capsys.readouterr()
    assert copy.exists()
    assert "rows" in json.loads(out.out)["damage"][0]
    assert "salvage reads it" in out.err


def test_no_earlier_backup_goes_while_the_store_is_damaged(forged, tmp_path):
    folder = tmp_path / "backups"
    with Store.open(forged) as store:
        for hours in range(30):
            operations.rotate(store, "AB", NOW + hours * HOUR, Rotation(folder, now=True, expire=False))
    assert len(backups_in(folder, forged)) == 30
