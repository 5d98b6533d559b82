"""The line on top of every page: where you are, as of when, and who logs."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QHBoxLayout, QLabel, QPushButton, QSizePolicy, QWidget

from app.look.choice_row import ChoiceRow
from app.look.flow_row import FlowRow
from app.look.formats import clock, wall
from app.look.theme import Theme
from app.session.state import Session


class TopBar(QWidget):
    """Pages at the left; at the right `who`: moment and person, which may stand elsewhere."""

    page_chosen = Signal(str)
    person_wanted = Signal()

    def __init__(self, theme: Theme) -> None:
        super().__init__()
        self._theme = theme
        self.pages = ChoiceRow(
            "",
            (
                ("ward", self.tr("Ward")),
                ("episode", self.tr("Episode")),
                ("map", self.tr("Map")),
                ("compare", self.tr("Compare")),
                ("handover", self.tr("Handover")),
                ("statistics", self.tr("Figures")),
            ),
            tight=True,
        )
        self.moment = QLabel()
        self.moment.setProperty("role", "strong")
        self.moment.setSizePolicy(QSizePolicy.Policy.Preferred, QSizePolicy.Policy.Maximum)
        self.person = QPushButton()
        self.person.setProperty("role", "small")
        self.person.setToolTip(self.tr("Change person (Ctrl+I)"))
        self.who = QWidget()
        self._beside = QHBoxLayout(self.who)
        self._beside.addWidget(self.moment)
        self._beside.addWidget(self.person)
        self.who.setSizePolicy(QSizePolicy.Policy.Maximum, QSizePolicy.Policy.Maximum)
        self._texts = ("", "")
        self._is_short = False
        self._row = FlowRow(self)
        self._row.addWidget(self.pages)
        self.take_who()
        self.pages.chosen.connect(self.page_chosen)
        self.person.clicked.connect(self._want_person)
        self.set_theme(theme)

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size."""
        self._theme = theme
        px = theme.px
        self._row.setContentsMargins(px(4), px(2), px(8), px(2))
        self._row.setSpacing(px(8))
        self._beside.setContentsMargins(0, 0, 0, 0)
        self._beside.setSpacing(px(4))

    @property
    def has_who(self) -> bool:
        """Whether moment and person stand in this row."""
        return self.who.parentWidget() is self

    def take_who(self) -> None:
        """Have moment and person in this row, at its right end."""
        self._row.add_right(self.who)

    def shorten(self, is_short: bool) -> None:
        """Say the moment by its clock alone, or with its date again; what points at it tells the date."""
        self._is_short = is_short
        self._say_moment()

    def _say_moment(self) -> None:
        full, short = self._texts
        self.moment.setText(short if self._is_short else full)
        self.moment.setAccessibleName(full)
        self.moment.updateGeometry()

    def show_session(self, session: Session) -> None:
        """Say moment and person."""
        zone, at = session.zone, session.moment()
        pretended = session.clock.pretended is not None
        self.moment.setProperty("pill", pretended or session.as_of is not None)
        form = "{time}"
        if session.as_known_at is not None and session.as_known_at == session.as_of:
            form = self.tr("As known at {time}")
        elif pretended:
            form = self.tr("Pretended: {time}")
        elif session.as_of is not None:
            form = self.tr("As of {time}")
        full, short = form.format(time=wall(at, zone)), form.format(time=clock(at, zone))
        if session.as_known_at is not None and session.as_known_at != session.as_of:
            known = self.tr(", as known {time}").format(time=wall(session.as_known_at, zone))
            full, short = full + known, short + known
        self._texts = (full, short)
        self._say_moment()
        stands = self.tr("The clock of the sample stands still in the past.") if pretended else ""
        self.moment.setToolTip(f"{full}. {stands}".strip())
        self.moment.style().unpolish(self.moment)
        self.moment.style().polish(self.moment)
        self.person.setText(session.person or self.tr("Who are you?"))
        self.person.setAccessibleName(
            self.tr("Person: {who}").format(who=session.person or self.tr("nobody signed in"))
        )

    def _want_person(self) -> None:
        self.person_wanted.emit()
