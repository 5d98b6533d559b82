"""Every action has a name, keys, a help text and somebody who carries it out; the list finds it."""

from collections import Counter

import pytest
from PySide6.QtGui import QKeySequence

from app.deeds.episode import EpisodeDeeds
from app.deeds.file import FileDeeds
from app.deeds.help import HelpDeeds
from app.deeds.log import LogDeeds
from app.deeds.review import ReviewDeeds
from app.deeds.store import StoreDeeds
from app.deeds.view import ViewDeeds
from app.deeds.ward import WardDeeds
from app.window.action_table import DEEDS, MENUS
from app.window.actions import found, help_of, keys_of, name_of

SERVERS = {
    "file": FileDeeds,
    "log": LogDeeds,
    "ward": WardDeeds,
    "episode": EpisodeDeeds,
    "review": ReviewDeeds,
    "store": StoreDeeds,
    "view": ViewDeeds,
    "help": HelpDeeds,
}


@pytest.mark.parametrize("deed", DEEDS, ids=lambda d: d.key)
def test_each_action_is_whole(deed):
    assert name_of(deed).strip()
    assert len(help_of(deed)) > 10
    assert help_of(deed).endswith(".")
    assert deed.keys
    assert all(not QKeySequence(k).isEmpty() for k in deed.keys)
    assert callable(getattr(SERVERS[deed.menu], deed.slot))


def test_no_two_actions_share_a_key_or_a_name():
    keys = Counter(QKeySequence(k).toString() for d in DEEDS for k in d.keys)
    names = Counter(d.name for d in DEEDS)
    assert [k for k, n in keys.items() if n > 1] == []
    assert [k for k, n in names.items() if n > 1] == []


def test_every_menu_has_actions():
    assert {d.menu for d in DEEDS} == {key for key, _ in MENUS}


def test_the_list_finds_by_name_help_and_key():
    assert found("panels")[0].key == "panels"
    assert "take_in" in [d.key for d in found("log file")]
    assert "undo" in [d.key for d in found(keys_of(next(d for d in DEEDS if d.key == "undo")))]
    assert found("no such thing at all") == ()
    assert len(found("")) == len(DEEDS)


@pytest.mark.parametrize("key", ["settings_form", "end_episode"])
def test_no_name_reads_as_if_the_ventilator_obeyed(key):
    """What a person does at the bed is logged here, nothing is set or stopped by it."""
    (deed,) = [d for d in DEEDS if d.key == key]
    assert name_of(deed).startswith("Log ")
