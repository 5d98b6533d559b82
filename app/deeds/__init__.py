"""What each action does, one object for each menu. They act on the window by its public methods, and where one needs
another it is given it, so that what rests on what is seen here."""

from __future__ import annotations

from app.deeds.due import DueDeeds
from app.deeds.episode import EpisodeDeeds
from app.deeds.file import FileDeeds
from app.deeds.help import HelpDeeds
from app.deeds.log import LogDeeds
from app.deeds.policy import PolicyDeeds
from app.deeds.recovery_codes import RecoveryCodes
from app.deeds.review import ReviewDeeds
from app.deeds.store import StoreDeeds
from app.deeds.view import ViewDeeds
from app.deeds.ward import WardDeeds
from app.keeping.keeper import Keeping
from app.window.shell import Shell


class Doers:
    """The objects that serve the menus, by menu."""

    def __init__(self, window: Shell, keeping: Keeping) -> None:
        self.episode, self.view, self.help = EpisodeDeeds(window), ViewDeeds(window), HelpDeeds(window)
        self.ward, self.due, self.policy = WardDeeds(window), DueDeeds(window), PolicyDeeds(window)
        self.codes = RecoveryCodes(window)
        self.log = LogDeeds(window, keeping, self.due)
        self.review = ReviewDeeds(window, self.ward, self.policy)
        self.file = FileDeeds(window, keeping, self.ward, self.review, self.codes)
        self.store = StoreDeeds(window, keeping, self.file, self.codes)

    def of(self, menu: str) -> object:
        """The object that serves a menu."""
        found: object = getattr(self, menu)
        return found
