"""Help: every line it shows is one that the log strip reads, and every action stands there under its menu."""

import pytest

from app.look.theme import LIGHT
from app.window.action_table import DEEDS, MENUS
from app.window.actions import help_of, menu_name, name_of
from app.window.help_dialog import LINES, HelpDialog
from core.record.instant import parse
from core.record.log_line import read_line
from core.record.settings import NO_SETTINGS

NOW = parse("2026-10-25T04:30:00+00:00")
FILLED = {"yesterday 23:40 ...": "yesterday 23:40 rr 20", "first 01:30 ...": "first 01:30 rr 20",
          "note ...": "note settled", "told ...": "told registrar: comes",
          "handover remark ...": "handover remark settled"}  # fmt: skip


@pytest.mark.parametrize("line", [part for line, _ in LINES for part in line.split(" | ")])
def test_what_help_shows_can_be_typed(line):
    read = read_line(FILLED.get(line, line), now=NOW, zone="Europe/London", in_force=NO_SETTINGS)
    assert read.readings


def test_every_action_stands_under_its_menu(qtbot):
    dialog = HelpDialog(LIGHT)
    qtbot.addWidget(dialog)
    told = dialog.text.toPlainText()
    for menu, title in MENUS:
        assert menu_name(title) in told
        for deed in (d for d in DEEDS if d.menu == menu):
            assert name_of(deed).rstrip(".") in told
            assert help_of(deed) in told.replace("\n", " ")
