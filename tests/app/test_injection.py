"""Labels and notes that would act as markup are shown as they were typed, on every page of the window."""

from __future__ import annotations

from pathlib import Path

import pytest
from PySide6.QtGui import Qt, QTextDocument
from PySide6.QtWidgets import QApplication, QLabel, QTextEdit, QWidget
from pytestqt.qtbot import QtBot

from app.operations.episode import BeginRequest, begin
from core.record.entries import NewEntry
from core.record.instant import HOUR, MINUTE
from storage.store import Store
from tests.support.injections import FORMATS, MARK, MARKUP
from tests.support.open_window import NOW, ZONE, make_store, open_window, settled

EVIL = tuple(e for e in (*MARKUP, *FORMATS) if not e.startswith(MARK))
STARTS = tuple({e[: e.index(MARK)] for e in EVIL})
PAGES = ("show_ward", "show_episode", "show_figures", "show_handover", "show_compare", "show_statistics")


@pytest.fixture
def path(tmp_path: Path) -> Path:
    """A ward whose every text is markup."""
    made = make_store(tmp_path / "ward.luffmark")
    with Store.open(made) as store:
        for n, evil in enumerate(EVIL):
            key = f"e{n}"
            begin(store, "AB", NOW - HOUR, BeginRequest(key, {"label": evil, "contact": evil}, zone=ZONE))
            entries = [NewEntry(key, "note", NOW - 30 * MINUTE, words=evil, by="AB", note=evil)]
            entries += [NewEntry(key, "rr", NOW - m * MINUTE, 20.0 + m % 5, None, "20", "/min", 0, by="AB", note=evil)
                        for m in (50, 20, 5)]  # fmt: skip
            store.append(entries, by="AB", operation="log", now=NOW)
    return made


def drawn_as_rich_text(widget: QWidget) -> list[str]:
    """Every text of a widget and of all in it that Qt would read as markup."""
    found: list[str] = []
    for one in [widget, *widget.findChildren(QWidget)]:
        if isinstance(one, QLabel):
            rich = one.textFormat() is Qt.TextFormat.RichText
            rich |= one.textFormat() is Qt.TextFormat.AutoText and Qt.mightBeRichText(one.text())
            found += [one.text()] if rich else []
        elif isinstance(one, QTextEdit):
            found.append(one.toHtml())
        found += [text for text in (one.toolTip(), one.whatsThis()) if Qt.mightBeRichText(text)]
    return [text for text in found if MARK in text]


def acted(text: str) -> list[str]:
    """Where a mark stands without what was typed before it: that was taken for markup and is gone."""
    document = QTextDocument()
    document.setHtml(text)
    parts = document.toPlainText().split(MARK)
    return [before[-40:] for before in parts[:-1] if not before.endswith(STARTS)]


def test_the_check_sees_markup_that_acts(qapp: QApplication) -> None:
    for evil in MARKUP:
        if evil in EVIL and "<" in evil[: evil.index(MARK)]:
            assert acted(evil) or MARK not in _plain(evil), evil


def _plain(text: str) -> str:
    document = QTextDocument()
    document.setHtml(text)
    return document.toPlainText()


def test_markup_in_labels_and_notes_is_text_on_every_page(qtbot: QtBot, path: Path) -> None:
    shown = 0
    with open_window(qtbot, path) as window:
        for n in (0, 3, len(MARKUP)):
            window.model.select(f"e{n}")
            settled(qtbot, window)
            for page in PAGES:
                window.actions_by_key[page].trigger()
                settled(qtbot, window)
                for text in drawn_as_rich_text(window):
                    shown += 1
                    assert acted(text) == [], (EVIL[n], page, text[:600])
    assert shown, "some page draws rich text with a mark in it"
