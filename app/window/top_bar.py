"""The line on top of every page: where you are, as of when, and who logs."""

from __future__ import annotations

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QLabel, QPushButton, QSizePolicy, QWidget

from app.look.choice_row import ChoiceRow
from app.look.flow_row import FlowRow
from app.look.formats import wall
from app.look.theme import Theme
from app.session.state import Session


class TopBar(QWidget):
    """Pages at the left, moment and person at the right."""

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
        self._row = FlowRow(self)
        self._row.addWidget(self.pages)
        self._row.add_right(self.moment)
        self._row.add_right(self.person)
        self.pages.chosen.connect(self.page_chosen)
        self.person.clicked.connect(self._want_person)
        self.set_theme(theme)

    def set_theme(self, theme: Theme) -> None:
        """Take another look or text size."""
        self._theme = theme
        px = theme.px
        self._row.setContentsMargins(px(4), px(2), px(8), px(2))
        self._row.setSpacing(px(8))

    def show_session(self, session: Session) -> None:
        """Say moment and person."""
        zone, at = session.zone, session.moment()
        pretended = session.clock.pretended is not None
        self.moment.setProperty("pill", pretended or session.as_of is not None)
        if pretended:
            text = self.tr("Pretended: {time}").format(time=wall(at, zone))
        elif session.as_of is not None:
            text = self.tr("As of {time}").format(time=wall(at, zone))
        else:
            text = wall(at, zone)
        if session.as_known_at is not None and session.as_known_at == session.as_of:
            text = self.tr("As known at {time}").format(time=wall(at, zone))
        elif session.as_known_at is not None:
            text += self.tr(", as known {time}").format(time=wall(session.as_known_at, zone))
        self.moment.setText(text)
        self.moment.setAccessibleName(text)
        self.moment.setToolTip(self.tr("The clock of the sample stands still in the past.") if pretended else "")
        self.moment.style().unpolish(self.moment)
        self.moment.style().polish(self.moment)
        self.moment.updateGeometry()
        self.person.setText(session.person or self.tr("Who are you?"))
        self.person.setAccessibleName(
            self.tr("Person: {who}").format(who=session.person or self.tr("nobody signed in"))
        )

    def _want_person(self) -> None:
        self.person_wanted.emit()
