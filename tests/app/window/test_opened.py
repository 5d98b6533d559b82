"""What was shown of a store goes with it: dialogs are left, and nothing can be done that needs one."""

import json

import pytest
from PySide6.QtWidgets import QApplication, QDialog

from app.dialogs.passphrase import RecoveryCodeDialog
from app.intake_window.mapping_dialog import MappingDialog
from storage.store import Store
from tests.support.open_window import settled, until


@pytest.fixture
def broken(tmp_path):
    path = tmp_path / "broken.luffmark"
    path.write_bytes(b"no store at all" * 100)
    return path


def dialogs_seen():
    return [w for w in QApplication.topLevelWidgets() if isinstance(w, QDialog) and w.isVisible()]


def first_page_shown(window):
    return window.model is None and window.first is not None and window.first.isVisible()


@pytest.mark.parametrize("key", ["correct", "close_due", "settle_flag", "gas_form", "archive", "policy", "help"])
def test_a_store_that_gives_way_to_another_leaves_no_dialog_behind(qtbot, on_bed_7, broken, key):
    window = on_bed_7
    window.actions_by_key[key].trigger()
    until(qtbot, lambda: bool(dialogs_seen()))
    window.doers.file.open_path(broken)
    assert dialogs_seen() == []
    until(qtbot, lambda: first_page_shown(window))
    assert dialogs_seen() == []


def test_what_was_opened_while_a_store_was_tried_goes_with_it(qtbot, on_bed_7, broken, tmp_path):
    """A table is being mapped for a store that turns out to be none, and another file waits behind it."""
    window = on_bed_7
    paths = [tmp_path / "a.csv", tmp_path / "b.csv"]
    for path in paths:
        path.write_text("Date;Time;pH\n27-03-2026;23:40;7,26\n", "utf-8")
    window.doers.file.open_path(broken)
    window.doers.file.take_in(*paths)
    assert len(dialogs_seen()) == 1
    until(qtbot, lambda: first_page_shown(window))
    assert dialogs_seen() == []
    assert len(window.findChildren(MappingDialog)) <= 1, "the file behind it did not come up"


def test_nothing_that_needs_a_store_can_be_done_once_it_is_gone(qtbot, on_bed_7, broken):
    window = on_bed_7
    assert window.actions_by_key["show_map"].isEnabled()
    window.doers.file.open_path(broken)
    until(qtbot, lambda: first_page_shown(window))
    from app.window.action_table import DEEDS

    for deed in DEEDS:
        assert window.actions_by_key[deed.key].isEnabled() != deed.needs_store, deed.key


def test_a_form_that_is_half_filled_in_is_kept_when_its_store_is_closed(qtbot, on_bed_7, tmp_path):
    window = on_bed_7
    window.actions_by_key["gas_form"].trigger()
    form = window.doers.log.form
    qtbot.keyClicks(form.gas.fields["ph"].box.lineEdit(), "7.3")
    settled(qtbot, window)
    path = window.model.session.store_path
    window.close_model()
    window.show_first_page()
    assert dialogs_seen() == []
    with Store.open(path, read_only=True) as store:
        kept = [json.loads(text) for text in store.drafts().values()]
    assert [(f["form"], f["episode"], "7.3" in f["typed"].values()) for f in kept] == [("GasForm", "bed-7", True)]


def test_a_dialog_that_refuses_to_be_left_goes_too(qtbot, window):
    dialog = RecoveryCodeDialog("ward.luffmark", "4F7K-92QM-TX3B-HW8D", window.theme, window)
    dialog.open()
    dialog.reject()
    assert dialog.isVisible()
    window.close_model()
    assert not dialog.isVisible()
    window.show_first_page()
