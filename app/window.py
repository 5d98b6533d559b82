"""The window: menu, top line, pages, log strip. It joins views to the session and holds nothing of its own."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

from PySide6.QtCore import Signal
from PySide6.QtGui import QCloseEvent, QResizeEvent
from PySide6.QtWidgets import QApplication, QLayoutItem, QMainWindow, QVBoxLayout, QWidget

from app import preferences as kept
from app.actions import DEEDS, fill_menus, make_actions
from app.deeds import Doers
from app.episode_feed import EpisodeFeed
from app.failure import Failure
from app.first_page import FirstPage
from app.log_strip import LogStrip
from app.pages import Pages
from app.preferences import Preferences
from app.progress_line import ProgressLine
from app.session import Changed, SessionModel, What
from app.shift import Shift, shift_of
from app.theme import THEMES, Theme, apply_theme
from app.top_bar import TopBar
from app.ward_feed import WardFeed
from app.ward_view import WardContent
from app.words import Reader, sentence

LEAST_SIZE = (1000, 640)
USUAL_SIZE = (1280, 800)
ASK_PASSPHRASE = ("store.needs_passphrase", "key.wrong_passphrase")


class MainWindow(QMainWindow):
    """Shows the first page until `show_model` gives it a session."""

    shown_ward = Signal()
    """The ward's figures are on the screen."""

    def __init__(self, preferences: Preferences, keep_at: Path | None = None) -> None:
        super().__init__()
        self.preferences, self._keep_at = preferences, keep_at
        self.model: SessionModel | None = None
        self.feed: WardFeed | None = None
        self.episode_feed: EpisodeFeed | None = None
        self.pages: Pages | None = None
        self.strip: LogStrip | None = None
        self.doers = Doers(self)
        self.actions_by_key = make_actions(self, self.doers.of)
        fill_menus(self.menuBar(), self.actions_by_key)
        self.top = TopBar(self.theme)
        self.top.page_chosen.connect(self.show_page)
        self.top.person_wanted.connect(self.actions_by_key["sign_in"].trigger)
        self._no_corner = QWidget(self)
        self._no_corner.hide()
        self.progress = ProgressLine(self)
        self._middle = QWidget()
        self._column = QVBoxLayout(self._middle)
        self._column.setContentsMargins(0, 0, 0, 0)
        self._column.setSpacing(0)
        self.setCentralWidget(self._middle)
        self.setWindowTitle("Luffmark")
        self.setMinimumSize(*LEAST_SIZE)
        self._set_ticks()
        self.resize(*(preferences.window[2:] or USUAL_SIZE))
        if preferences.window:
            self.move(*preferences.window[:2])
        self.first: FirstPage | None = None
        self.show_first_page()

    # look

    @property
    def theme(self) -> Theme:
        """The look of the preferences."""
        return THEMES[self.preferences.theme].scaled(self.preferences.text_scale)

    @property
    def reader(self) -> Reader:
        """For whom sentences are written."""
        zone = self.model.session.zone if self.model is not None else "UTC"
        return Reader(zone, self.preferences.gas_unit)

    def prefer(self, **values: object) -> None:
        """Change preferences, keep them, and show what they change."""
        before = self.preferences
        self.preferences = replace(before, **values)  # type: ignore[arg-type]
        if self._keep_at is not None:
            kept.save(self._keep_at, self.preferences)
        if (before.theme, before.text_scale) != (self.preferences.theme, self.preferences.text_scale):
            self._dress()
        if self.feed is not None and self.episode_feed is not None:
            self.feed.set_preferences(self.preferences)
            self.episode_feed.set_gas_unit(self.preferences.gas_unit)
        self._set_ticks()

    def _dress(self) -> None:
        app = QApplication.instance()
        if isinstance(app, QApplication):
            apply_theme(app, self.theme)
        self.top.set_theme(self.theme)
        if self.pages is not None and self.strip is not None:
            self.pages.set_theme(self.theme)
            self.strip.set_theme(self.theme)
        elif self.first is not None:
            self.show_first_page()
        self._place_top()

    def _place_top(self) -> None:
        """The top line stands in the menu's row where there is room, else in a row of its own."""
        if self.model is None:
            return
        bar = self.menuBar()
        menus = sum(bar.actionGeometry(action).width() for action in bar.actions()) + self.theme.px(24)
        fits = menus + self.top.sizeHint().width() <= self.width()
        if fits and bar.cornerWidget() is not self.top:
            bar.setCornerWidget(self.top)
        elif not fits and self._column.indexOf(self.top) < 0:
            bar.setCornerWidget(self._no_corner)
            self._column.insertWidget(0, self.top)
        self.top.show()

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._place_top()

    def _set_ticks(self) -> None:
        self.actions_by_key["dark"].setChecked(self.preferences.theme == "dark")
        self.actions_by_key["pressure_unit"].setChecked(self.preferences.gas_unit == "kPa")
        has_store = self.model is not None
        has_episode = has_store and self.model is not None and self.model.session.selection is not None
        for deed in DEEDS:
            allowed = (has_store or not deed.needs_store) and (has_episode or not deed.needs_episode)
            self.actions_by_key[deed.key].setEnabled(allowed)

    # what is shown

    def show_first_page(self) -> None:
        """The page before any store is open."""
        self._clear_column()
        file_deeds = self.doers.file
        page = FirstPage(self.theme, self.preferences.recent_stores, self.preferences.cautions_seen)
        page.sample_wanted.connect(file_deeds.do_sample_shift)
        page.new_wanted.connect(file_deeds.do_new_store)
        page.open_wanted.connect(file_deeds.do_open_store)
        page.file_wanted.connect(file_deeds.do_take_in)
        page.recent_wanted.connect(file_deeds.open_recent)
        page.cautions_read.connect(self._cautions_read)
        self.first = page
        self._column.addWidget(page)

    def _cautions_read(self) -> None:
        self.prefer(cautions_seen=True)

    def show_model(self, model: SessionModel) -> None:
        """Show a session; the one before it is closed."""
        self.close_model()
        self._clear_column()
        self.first = None
        self.model = model
        self.feed = WardFeed(model, self.preferences, self)
        self.episode_feed = EpisodeFeed(model, self.feed, self.preferences.gas_unit, self)
        self.pages = Pages(self.theme)
        self.strip = LogStrip(self.theme, model)
        self._column.addWidget(self.pages, 1)
        self._column.addWidget(self.progress)
        foot = QVBoxLayout()
        px = self.theme.px
        foot.setContentsMargins(px(12), 0, px(12), px(8))
        foot.addWidget(self.strip)
        self._column.addLayout(foot)
        self._connect(model)
        self._tell_session()
        self._place_top()
        self.pages.ward.lanes.setFocus()
        model.start()

    def _connect(self, model: SessionModel) -> None:
        assert self.feed is not None and self.pages is not None and self.strip is not None
        assert self.episode_feed is not None
        model.changed.connect(self._model_changed)
        model.failed.connect(self.show_failure)
        model.runner.progressed.connect(self.progress.show_progress)
        model.runner.busy_changed.connect(self.progress.busy_changed)
        self.progress.cancelled.connect(model.runner.cancel)
        self.feed.refreshed.connect(self._ward_refreshed)
        self.episode_feed.refreshed.connect(self._episode_refreshed)
        self.pages.ward.opened.connect(self.open_episode)
        self.pages.ward.selected.connect(self.select)
        self.pages.made.connect(self._page_made)
        self.strip.left.connect(self._focus_page)

    def _page_made(self, name: str) -> None:
        assert self.pages is not None
        if name == "episode":
            view = self.pages.episode
            view.back.connect(self._to_ward)
            view.explain_wanted.connect(self.doers.view.explain)
            view.panels_wanted.connect(self.actions_by_key["panels"].trigger)
        elif name == "handover":
            self.pages.handover.save_wanted.connect(self.actions_by_key["save_handover"].trigger)
            self.pages.handover.back.connect(self._to_ward)
        elif name == "compare":
            self.pages.compare.back.connect(self._to_ward)
            self.pages.compare.opened.connect(self.open_episode)

    def show_page(self, name: str) -> None:
        """Show a page and give it the focus."""
        if self.pages is None or (name == "episode" and self.model is not None and self.model.session.selection is None):
            self.top.pages.choose(self.pages.name if self.pages is not None else "ward")
            return
        page = self.pages.page(name)
        self.pages.setCurrentWidget(page)
        self.top.pages.choose(name)
        if name == "episode" and self.episode_feed is not None:
            self.episode_feed.show_selection()
        elif name == "handover":
            self.doers.ward.show_handover_text()
        elif name == "compare" and self.feed is not None:
            self.pages.compare.show_ward(self.feed.content(), self.feed.answers)
        self._focus_page()

    def _focus_page(self) -> None:
        assert self.pages is not None
        focus = {"ward": "lanes", "episode": "stack", "handover": "text", "compare": "list"}
        getattr(self.pages.page(self.pages.name), focus[self.pages.name]).setFocus()

    def _to_ward(self) -> None:
        self.show_page("ward")

    # intents

    def select(self, key: str) -> None:
        """Take an episode in hand."""
        if self.model is not None:
            self.model.select(key or None)

    def open_episode(self, key: str) -> None:
        """Take an episode in hand and show it."""
        self.select(key)
        self.show_page("episode")

    def shift(self) -> Shift:
        """The shift that is looked at."""
        assert self.model is not None
        session = self.model.session
        return shift_of(session.moment(), session.zone, self.preferences.shift_starts)

    # news

    def _model_changed(self, changed: Changed) -> None:
        if changed.touches(What.SELECTION, What.STORE):
            self._selection_changed()
        if changed.touches(What.CLOCK, What.AS_OF, What.AS_KNOWN_AT, What.PERSON, What.ZONE, What.STORE):
            self._tell_session()

    def _tell_session(self) -> None:
        assert self.model is not None
        self.top.show_session(self.model.session)
        self._place_top()
        name = self.model.session.store_path.name
        self.setWindowTitle(self.tr("{store} - Luffmark").format(store=name))

    def _ward_refreshed(self, content: WardContent) -> None:
        assert self.pages is not None and self.model is not None
        self.pages.ward.show_ward(content)
        if self.model.session.selection is None and self.pages.ward.keys():
            self.model.select(self.pages.ward.keys()[0])
        else:
            self._selection_changed()
        if self.pages.name == "compare" and self.feed is not None:
            self.pages.compare.show_ward(content, self.feed.answers)
        self.shown_ward.emit()

    def _selection_changed(self) -> None:
        assert self.model is not None and self.feed is not None and self.strip is not None and self.pages is not None
        key = self.model.session.selection
        answer = self.feed.answers.get(key) if key is not None else None
        if answer is None or key is None:
            self.strip.set_patient(None, "", self.model.session.zone, self.preferences.gas_unit)
        else:
            f = answer.figures
            self.strip.set_patient(answer.record, f.label, self.model.session.zone, self.preferences.gas_unit,
                                   off_mask=f.support.break_since is not None)  # fmt: skip
            self.pages.ward.select(key)
        self._set_ticks()

    def _episode_refreshed(self, on: object) -> None:
        assert self.pages is not None and self.model is not None
        if self.pages.name == "episode":
            self.pages.episode.show_episode(on, self.model.session.moment())  # type: ignore[arg-type]

    def show_failure(self, failure: Failure) -> None:
        """Say in the strip what did not succeed; a store that wants its passphrase asks for it."""
        if failure.message.key in ASK_PASSPHRASE:
            self.doers.file.ask_passphrase()
        else:
            self.say(sentence(failure.message, self.reader))

    def say(self, text: str) -> None:
        """Say something in the strip."""
        if self.strip is not None:
            self.strip.say(text)

    # the end

    def close_model(self) -> None:
        """Close the session; what was typed and sent is recorded first."""
        if self.model is None:
            return
        self.model.close()
        self.model.deleteLater()
        self.model = self.feed = self.episode_feed = self.pages = self.strip = None

    def closeEvent(self, event: QCloseEvent) -> None:
        box = self.geometry()
        if not self.isMaximized():
            self.prefer(window=(box.x(), box.y(), box.width(), box.height()))
        self.close_model()
        self.doers.file.forget_sample()
        super().closeEvent(event)

    def _clear_column(self) -> None:
        while self._column.count():
            item = self._column.takeAt(0)
            _let_go(item)
        self.top.hide()


def _let_go(item: QLayoutItem) -> None:
    widget, layout = item.widget(), item.layout()
    if isinstance(widget, TopBar | ProgressLine):
        widget.hide()
    elif widget is not None:
        widget.hide()
        widget.deleteLater()
    elif layout is not None:
        while layout.count():
            _let_go(layout.takeAt(0))
