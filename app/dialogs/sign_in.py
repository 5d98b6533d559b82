"""Who logs from now on, by initials. Proving it is another matter than saying it."""

from __future__ import annotations

from collections.abc import Iterable, Sequence

from PySide6.QtWidgets import QLabel, QLineEdit, QPushButton, QWidget

from app.dialogs.asking import AskingDialog
from app.look.flow_row import FlowRow
from app.look.theme import Theme
from core.record.episode import Episode

MOST = 12
MOST_RECENT = 9


class SignInDialog(AskingDialog):
    """Asks for initials. Who logged lately stands there with a digit: that key alone is enough."""

    def __init__(
        self, person: str, theme: Theme, parent: QWidget | None = None, *, recent: Sequence[str] = ()
    ) -> None:
        super().__init__(self.tr("Change person"), self.tr("Log as this person"), theme, parent)
        self.recent = tuple(recent[:MOST_RECENT])
        self.initials = QLineEdit(person)
        self.initials.setMaxLength(MOST)
        self.initials.selectAll()
        self.initials.textEdited.connect(self._typed)
        if self.recent:
            self._add_recent()
        self.field(self.tr("Initials"), self.initials)
        self.resize(theme.px(420), theme.px(160))

    def _add_recent(self) -> None:
        told = QLabel(self.tr("Logged lately: the digit alone changes to them."))
        told.setProperty("role", "caption")
        row = QWidget()
        flow = FlowRow(row, self.theme.px(8))
        flow.setContentsMargins(0, 0, 0, 0)
        for number, person in enumerate(self.recent, 1):
            button = QPushButton(f"{number}  {person}")
            button.setAccessibleName(self.tr("{person}, key {number}").format(person=person, number=number))
            button.setProperty("role", "small")
            button.setAutoDefault(False)
            button.setProperty("person", person)
            button.clicked.connect(self._pressed)
            flow.addWidget(button)
        self.body.addWidget(told)
        self.body.addWidget(row)

    @property
    def person(self) -> str:
        """What was typed, in capitals."""
        return self.initials.text().strip().upper()

    def _typed(self, text: str) -> None:
        """A digit alone is one of those who logged lately; initials that begin with a digit are typed on."""
        if text.isdigit() and len(text) == 1 and 1 <= int(text) <= len(self.recent):
            self._become(self.recent[int(text) - 1])

    def _pressed(self) -> None:
        button = self.sender()
        if button is not None:
            self._become(str(button.property("person")))

    def _become(self, person: str) -> None:
        self.initials.setText(person)
        self.accept()

    def submit(self) -> None:
        if not self.person:
            self.refuse(self.tr("Type your initials: one to {most} letters.").format(most=MOST))
            return
        self.accept()


def logged_lately(records: Iterable[Episode], person: str) -> tuple[str, ...]:
    """Who recorded something on these episodes, the newest first, without the person who logs now."""
    newest: dict[str, int] = {}
    for record in records:
        for s in record.standing:
            by = s.entry.by.strip().upper()
            if by and by != person.upper() and by != "DEVICE":
                newest[by] = max(newest.get(by, 0), s.entry.recorded_at)
    return tuple(sorted(newest, key=lambda by: (-newest[by], by)))
