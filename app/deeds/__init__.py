"""What each action does, one object for each menu. They act on the window by its public methods alone."""

from __future__ import annotations

from typing import TYPE_CHECKING

from app.deeds.due import DueDeeds
from app.deeds.episode import EpisodeDeeds
from app.deeds.file import FileDeeds
from app.deeds.help import HelpDeeds
from app.deeds.log import LogDeeds
from app.deeds.policy import PolicyDeeds
from app.deeds.review import ReviewDeeds
from app.deeds.store import StoreDeeds
from app.deeds.view import ViewDeeds
from app.deeds.ward import WardDeeds

if TYPE_CHECKING:
    from app.window.main import MainWindow


class Doers:
    """The objects that serve the menus, by menu."""

    def __init__(self, window: MainWindow) -> None:
        self.file, self.log, self.ward = FileDeeds(window), LogDeeds(window), WardDeeds(window)
        self.review, self.policy = ReviewDeeds(window), PolicyDeeds(window)
        self.store = StoreDeeds(window)
        self.episode, self.view, self.help = EpisodeDeeds(window), ViewDeeds(window), HelpDeeds(window)
        self.due = DueDeeds(window)

    def of(self, menu: str) -> object:
        """The object that serves a menu."""
        found: object = getattr(self, menu)
        return found
