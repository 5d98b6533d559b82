"""What the window holds while a store is open, and how it lets go of what it showed."""

from __future__ import annotations

from dataclasses import dataclass

from PySide6.QtWidgets import QDialog, QLayoutItem, QWidget
from shiboken6 import isValid

from app.episode.feed import EpisodeFeed
from app.keeping.notice_strip import NoticeStrip
from app.session.model import SessionModel
from app.strip.known_strip import KnownStrip
from app.strip.log_strip import LogStrip
from app.ward.feed import WardFeed
from app.window.pages import Pages
from app.window.progress_line import ProgressLine
from app.window.top_bar import TopBar


@dataclass(frozen=True, slots=True)
class Opened:
    """What there is while a store is open."""

    model: SessionModel
    feed: WardFeed
    episode_feed: EpisodeFeed
    pages: Pages
    strip: LogStrip


LASTING = (TopBar, ProgressLine, KnownStrip, NoticeStrip)
"""Parts of the window that outlive a store: they are hidden, not thrown away."""


def let_go(item: QLayoutItem | None) -> None:
    """Take what a layout's item holds off the screen, and throw it away unless it lasts."""
    if item is None:
        return
    widget, layout = item.widget(), item.layout()
    if isinstance(widget, LASTING):
        widget.hide()
    elif widget is not None:
        widget.hide()
        widget.deleteLater()
    elif layout is not None:
        while layout.count():
            let_go(layout.takeAt(0))


def leave_dialogs(window: QWidget) -> None:
    """Leave every dialog of a window, those that refuse it too: what they show and ask goes with the store."""
    for dialog in window.findChildren(QDialog):
        if isValid(dialog) and dialog.isVisible():
            QDialog.reject(dialog)
