"""The window: menu, top line, pages, log strip. It joins views to the session and holds nothing of its own."""

from __future__ import annotations

from dataclasses import replace
from pathlib import Path

from PySide6.QtCore import QRect, Signal
from PySide6.QtGui import QCloseEvent, QResizeEvent
from PySide6.QtWidgets import QApplication, QStackedWidget, QVBoxLayout, QWidget

from app.deeds import Doers
from app.episode.feed import EpisodeFeed
from app.episode.on_screen import EpisodeOnScreen
from app.keeping import preferences as kept
from app.keeping.keeper import Keeping
from app.keeping.preferences import Preferences
from app.look.style_sheet import apply_theme
from app.session.failure import Failure
from app.session.model import SessionModel
from app.session.readers import speak_through_qt
from app.session.state import Changed, What
from app.strip.known_strip import KnownStrip
from app.strip.log_strip import LogStrip
from app.ward.feed import WardFeed
from app.ward.moves import label_told_apart
from app.ward.view import WardContent
from app.window.action_table import DEEDS
from app.window.actions import fill_menus, make_actions
from app.window.first_page import FirstPage
from app.window.opened import Opened, leave_dialogs, let_go
from app.window.page_turner import PageTurner
from app.window.pages import Pages
from app.window.progress_line import ProgressLine
from app.window.shell import Shell
from app.window.top_bar import TopBar
from app.window.top_line import TopLine
from app.window.troubles import Troubles

LEAST_SIZE = (1000, 640)
USUAL_SIZE = (1280, 800)


class MainWindow(Shell):
    """Shows the first page until `show_model` gives it a session."""

    shown_ward = Signal()
    """The ward's figures are on the screen."""

    def __init__(self, preferences: Preferences, keep_at: Path | None = None) -> None:
        super().__init__(preferences)
        self._keep_at = keep_at
        self.keeping = Keeping(self)
        self.doers = Doers(self, self.keeping)
        self.actions_by_key = make_actions(self, self.doers.of)
        fill_menus(self.menuBar(), self.actions_by_key)
        self.top = TopBar(self.theme)
        self.top.page_chosen.connect(self.show_page)
        self.top.person_wanted.connect(self.actions_by_key["sign_in"].trigger)
        self.turner = PageTurner(self, self.top, self.doers)
        self.progress = ProgressLine(self)
        self.known = KnownStrip(self.theme)
        self.troubles = Troubles(self, self.doers.file.ask_passphrase)
        self._connect_known()
        self._connect_keeping()
        self._middle = QWidget()
        self._column = QVBoxLayout(self._middle)
        self._column.setContentsMargins(0, 0, 0, 0)
        self._column.setSpacing(0)
        self._top_line = TopLine(self.top, self.menuBar(), self._column)
        self.cover = QStackedWidget()
        self.cover.addWidget(self._middle)
        self.cover.addWidget(self.keeping.lock.page)
        self.setCentralWidget(self.cover)
        self.setWindowTitle("Luffmark")
        speak_through_qt()
        self.setMinimumSize(*LEAST_SIZE)
        self._set_ticks()
        self.resize(*(preferences.window[2:] or USUAL_SIZE))
        if preferences.window and _is_on_a_screen(preferences.window):
            self.move(*preferences.window[:2])
        self.show_first_page()

    # look

    def prefer(self, **values: object) -> None:
        """Change preferences, keep them, and show what they change."""
        before = self.preferences
        self.preferences = replace(before, **values)  # type: ignore[arg-type]
        if self._keep_at is not None:
            kept.save(self._keep_at, self.preferences)
        if (before.theme, before.text_scale) != (self.preferences.theme, self.preferences.text_scale):
            self._dress()
        if self.opened is not None:
            self.opened.feed.set_preferences(self.preferences)
            self.opened.episode_feed.set_gas_unit(self.preferences.gas_unit)
        self._set_ticks()

    def _dress(self) -> None:
        app = QApplication.instance()
        if isinstance(app, QApplication):
            apply_theme(app, self.theme)
        self.top.set_theme(self.theme)
        self.known.set_theme(self.theme)
        self.keeping.set_theme(self.theme)
        if self.opened is not None:
            self.opened.pages.set_theme(self.theme)
            self.opened.strip.set_theme(self.theme)
        elif self.first is not None:
            self.show_first_page()
        self._place_top()

    def _place_top(self) -> None:
        if self.model is not None:
            self._top_line.place(self.theme, self.width())

    def resizeEvent(self, event: QResizeEvent) -> None:
        super().resizeEvent(event)
        self._place_top()
        self.progress.place()

    def _set_ticks(self) -> None:
        self.actions_by_key["dark"].setChecked(self.preferences.theme == "dark")
        self.actions_by_key["pressure_unit"].setChecked(self.preferences.gas_unit == "kPa")
        has_store = self.model is not None
        has_episode = has_store and self.model is not None and self.model.session.selection is not None
        looks_back = self.opened is not None and not self.opened.model.session.is_live
        for deed in DEEDS:
            allowed = (has_store or not deed.needs_store) and (has_episode or not deed.needs_episode)
            kept = (looks_back or self.keeping.forbids_recording) and deed.records
            locked = self.keeping.lock.is_locked and deed.key != "quit"
            self.actions_by_key[deed.key].setEnabled(allowed and not kept and not locked)

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
        page.step_wanted.connect(self.doers.store.take_step)
        page.cautions_read.connect(self._cautions_read)
        self.first = page
        self._column.addWidget(page)
        self.setWindowTitle(self.keeping.title(None))
        self._set_ticks()

    def _cautions_read(self) -> None:
        self.prefer(cautions_seen=True)

    def show_model(self, model: SessionModel) -> None:
        """Show a session; the one before it is closed."""
        self.close_model()
        self._clear_column()
        self.first = None
        feed = WardFeed(model, self.preferences, self)
        episode_feed = EpisodeFeed(model, feed, self.preferences.gas_unit, self)
        self.opened = Opened(model, feed, episode_feed, Pages(self.theme), LogStrip(self.theme, model))
        self._column.addWidget(self.keeping.notices)
        self._column.addWidget(self.known)
        self._column.addWidget(self.opened.pages, 1)
        self.progress.stand_over(self.opened.pages)
        foot = QVBoxLayout()
        px = self.theme.px
        foot.setContentsMargins(px(12), 0, px(12), px(8))
        foot.addWidget(self.opened.strip)
        self._column.addLayout(foot)
        self._connect(self.opened)
        self.keeping.opened(self.opened)
        self._tell_session()
        self._place_top()
        self.opened.pages.ward.lanes.setFocus()
        model.start()

    def _connect(self, o: Opened) -> None:
        o.model.changed.connect(self._model_changed)
        o.model.failed.connect(self.show_failure)
        o.model.runner.progressed.connect(self.progress.show_progress)
        o.model.runner.busy_changed.connect(self.progress.busy_changed)
        self.progress.cancelled.connect(o.model.runner.cancel)
        o.feed.refreshed.connect(self._ward_refreshed)
        o.episode_feed.refreshed.connect(self._episode_refreshed)
        o.episode_feed.gone.connect(self._episode_gone)
        o.pages.ward.opened.connect(self.open_episode)
        o.pages.ward.selected.connect(self.select)
        o.pages.made.connect(self.turner.page_made)
        o.strip.left.connect(self.turner.focus)

    def _connect_known(self) -> None:
        review = self.doers.review
        self.known.step_wanted.connect(review.step)
        self.known.recording_wanted.connect(review.look_beside)
        self.known.moment_typed.connect(review.look_at_typed)
        self.known.live_wanted.connect(review.do_known_live)
        self.known.later_wanted.connect(review.do_came_later)

    def _connect_keeping(self) -> None:
        self.keeping.step_wanted.connect(self.doers.store.take_step)
        self.keeping.form_found.connect(self.doers.log.keep_lost)
        self.keeping.form_wanted.connect(self.doers.log.open_lost)
        self.keeping.locking.code_made.connect(self.doers.codes.show_of_people)

    def show_page(self, name: str) -> None:
        """Show a page and give it the focus."""
        self.turner.show(name)

    def fill_page(self, name: str) -> None:
        """Give a page what it shows once more."""
        self.turner.fill(name)

    # intents

    def select(self, key: str) -> None:
        """Take an episode in hand."""
        if self.model is not None:
            self.model.select(key or None)

    def open_episode(self, key: str) -> None:
        """Take an episode in hand and show it."""
        self.select(key)
        self.show_page("episode")

    # news

    def _model_changed(self, changed: Changed) -> None:
        if changed.touches(What.SELECTION, What.STORE):
            self._selection_changed()
        if changed.touches(What.CLOCK, What.AS_OF, What.AS_KNOWN_AT, What.PERSON, What.ZONE, What.STORE):
            self._tell_session()
        if changed.touches(What.AS_OF, What.AS_KNOWN_AT):
            self._moment_changed()

    def _moment_changed(self) -> None:
        """Another moment is looked at: nothing can be logged into the past, and no screen may stay behind."""
        o = self.now_open()
        self.close_or_open_strip()
        self.doers.review.count_later()
        if o.pages.name in ("handover", "statistics"):
            self.turner.fill(o.pages.name)

    def close_or_open_strip(self) -> None:
        """The strip takes a line only where it can be recorded, and says why where not."""
        o = self.now_open()
        looking_back = self.tr("Looking back: nothing can be logged. Alt+Home goes back to now.")
        o.strip.set_closed(self.keeping.why_closed() if o.model.session.is_live else looking_back)
        self._set_ticks()

    def tell_locked(self) -> None:
        """The window was locked or unlocked: title and actions follow."""
        if self.opened is not None:
            self._tell_session()
        self._set_ticks()

    def _tell_session(self) -> None:
        session = self.now_open().model.session
        self.top.show_session(session)
        self.known.show_session(session)
        self._place_top()
        self.setWindowTitle(self.keeping.title(session))

    def _ward_refreshed(self, content: WardContent) -> None:
        o = self.now_open()
        o.pages.ward.show_ward(content)
        chosen, live = o.model.session.selection, o.model.session.is_live
        gone = chosen == o.strip.patient and chosen not in o.feed.answers
        if chosen is None or (gone and live):  # nobody was chosen yet, or what was begun was taken back
            first = next(iter(o.pages.ward.shown_keys()), None)
            if chosen is not None and first is not None:
                o.strip.say_of(first, o.strip.plain())  # that it was taken back must not go with its patient
            o.model.select(first)
        else:  # of a moment before it began, too: another patient never takes its place unasked
            self._selection_changed()
        if o.pages.name == "compare":
            o.pages.compare.show_ward(content, o.feed.answers)
        self.shown_ward.emit()

    def _selection_changed(self) -> None:
        o, unit = self.now_open(), self.preferences.gas_unit
        session = o.model.session
        answer = o.feed.answers.get(session.selection or "")
        if answer is None:
            o.strip.set_patient(None, "", session.zone, unit)
        else:
            off_mask = answer.figures.support.break_since is not None
            label = label_told_apart(o.feed.answers, answer.figures.episode, session.moment(), session.zone)
            o.strip.set_patient(answer.record, label, session.zone, unit, off_mask=off_mask)
            o.pages.ward.select(answer.figures.episode)
        self._set_ticks()

    def _episode_refreshed(self, on: EpisodeOnScreen) -> None:
        o = self.now_open()
        if o.pages.name == "episode":
            o.pages.episode.show_episode(on, o.model.session.moment())
        elif o.pages.name == "map":
            o.pages.map.show_episode(on)

    def _episode_gone(self) -> None:
        o = self.now_open()
        then, now = self.tr("Nothing of this episode was recorded by then"), self.tr("This episode is shown no more")
        if o.pages.name in ("episode", "map"):
            page = o.pages.episode if o.pages.name == "episode" else o.pages.map
            page.show_nothing(now if o.model.session.is_live else then)

    def forget_handovers(self) -> bool:
        """Throw away the closed handovers that were opened in another program. Whether there were any."""
        return self.doers.review.forget_opened()

    def show_failure(self, failure: Failure) -> None:
        """Say what did not succeed, where it belongs."""
        self.troubles.show(failure)

    # the end

    def close_model(self) -> None:
        """Close the session; what was typed and sent is recorded first."""
        if self.opened is None:
            return
        o, self.opened = self.opened, None
        self.keeping.closing()  # what is half typed in a form is kept before the form is left
        leave_dialogs(self)
        self.progress.stand_over(None)
        o.model.close()
        for part in (o.episode_feed, o.feed, o.model):
            part.deleteLater()

    def closeEvent(self, event: QCloseEvent) -> None:
        box = self.geometry()
        if not self.isMaximized():
            self.prefer(window=(box.x(), box.y(), box.width(), box.height()))
        self.close_model()
        self.doers.file.forget_sample()
        self.doers.review.forget_opened()
        super().closeEvent(event)

    def _clear_column(self) -> None:
        while self._column.count():
            let_go(self._column.takeAt(0))
        self.top.hide()


def _is_on_a_screen(box: tuple[int, ...]) -> bool:
    """Whether a kept window would be seen: a screen may have gone since."""
    middle = QRect(*box).center()
    return any(screen.availableGeometry().contains(middle) for screen in QApplication.screens())
