"""The window as those know it who act on it: what is open in it, whom it speaks to, and what can be asked of it.

`app.window.main` builds the window on this. Deeds, the lock and its kind see this much and no more.
"""

from __future__ import annotations

from PySide6.QtGui import QAction
from PySide6.QtWidgets import QMainWindow, QStackedWidget

from app.episode.feed import EpisodeFeed
from app.keeping.preferences import Preferences
from app.look.theme import THEMES, Theme
from app.session.failure import Failure
from app.session.model import SessionModel
from app.session.readers import reader_at
from app.session.shift import Shift, shift_of
from app.strip.known_strip import KnownStrip
from app.strip.log_strip import LogStrip
from app.ward.feed import WardFeed
from app.window.first_page import FirstPage
from app.window.opened import Opened
from app.window.pages import Pages
from app.words import Reader


class Shell(QMainWindow):
    """What is open, and the look and the reader it is told in. What is not done here the built window does."""

    actions_by_key: dict[str, QAction]
    known: KnownStrip
    """The line that tells which moment is looked at."""
    cover: QStackedWidget
    """What the window shows, and the page that stands before it while it is locked."""

    def __init__(self, preferences: Preferences) -> None:
        super().__init__()
        self.preferences = preferences
        self.opened: Opened | None = None
        self.first: FirstPage | None = None

    # what is open

    @property
    def model(self) -> SessionModel | None:
        """The session, or None before a store is open."""
        return self.opened.model if self.opened is not None else None

    @property
    def feed(self) -> WardFeed | None:
        """The ward's figures."""
        return self.opened.feed if self.opened is not None else None

    @property
    def episode_feed(self) -> EpisodeFeed | None:
        """What the episode view shows."""
        return self.opened.episode_feed if self.opened is not None else None

    @property
    def pages(self) -> Pages | None:
        """The pages."""
        return self.opened.pages if self.opened is not None else None

    @property
    def strip(self) -> LogStrip | None:
        """The log strip."""
        return self.opened.strip if self.opened is not None else None

    def now_open(self) -> Opened:
        """What is open, for whoever acts only where a store is.

        Raises:
            RuntimeError: no store is open.
        """
        if self.opened is None:
            raise RuntimeError("no store is open")
        return self.opened

    def shift(self) -> Shift:
        """The shift that is looked at."""
        session = self.now_open().model.session
        return shift_of(session.moment(), session.zone, self.preferences.shift_starts)

    # look and reader

    @property
    def theme(self) -> Theme:
        """The look of the preferences."""
        return THEMES[self.preferences.theme].scaled(self.preferences.text_scale)

    @property
    def reader(self) -> Reader:
        """For whom sentences are written."""
        if self.opened is None:
            return Reader("UTC", self.preferences.gas_unit)
        session = self.opened.model.session
        return reader_at(session.zone, self.preferences.gas_unit, session.moment())

    @property
    def plain_reader(self) -> Reader:
        """For whom files are written: every time with its date."""
        zone = self.opened.model.session.zone if self.opened is not None else "UTC"
        return Reader(zone, self.preferences.gas_unit)

    def say(self, text: str) -> None:
        """Say something in the strip."""
        if self.strip is not None:
            self.strip.say(text)

    # what can be asked

    def prefer(self, **values: object) -> None:
        """Change preferences, keep them, and show what they change."""
        raise NotImplementedError

    def show_first_page(self) -> None:
        """The page before any store is open."""
        raise NotImplementedError

    def show_model(self, model: SessionModel) -> None:
        """Show a session; the one before it is closed."""
        raise NotImplementedError

    def close_model(self) -> None:
        """Close the session; what was typed and sent is recorded first."""
        raise NotImplementedError

    def show_page(self, name: str) -> None:
        """Show a page and give it the focus."""
        raise NotImplementedError

    def fill_page(self, name: str) -> None:
        """Give a page what it shows once more."""
        raise NotImplementedError

    def open_episode(self, key: str) -> None:
        """Take an episode in hand and show it."""
        raise NotImplementedError

    def show_failure(self, failure: Failure) -> None:
        """Say what did not succeed, where it belongs."""
        raise NotImplementedError

    def close_or_open_strip(self) -> None:
        """The strip takes a line only where it can be recorded, and says why where not."""
        raise NotImplementedError

    def tell_locked(self) -> None:
        """The window was locked or unlocked: title and actions follow."""
        raise NotImplementedError

    def forget_handovers(self) -> bool:
        """Throw away the closed handovers that were opened in another program. Whether there were any."""
        raise NotImplementedError
