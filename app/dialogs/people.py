"""The people who sign in to the store: add, give a new PIN, retire. Only a ward lead changes them."""

from __future__ import annotations

from PySide6.QtCore import Qt
from PySide6.QtWidgets import (
    QCheckBox,
    QFormLayout,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QPushButton,
    QTableWidget,
    QTableWidgetItem,
    QWidget,
)

from app.dialogs.asking import AskingDialog
from app.look.formats import day
from app.look.read_table import read_table
from app.look.theme import Theme
from app.operations import people as operations
from app.operations.outcome import Outcome
from app.session.failure import Failure
from app.session.model import SessionModel
from app.words import Reader, sentence
from storage.people import LEAD, LEAST_PIN, MOST_INITIALS, MOST_PIN, STAFF, Person


class PeopleDialog(AskingDialog):
    """Lists the people of an open store and changes them; each change is an event of the ledger."""

    def __init__(self, model: SessionModel, reader: Reader, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__("", "", theme, parent)
        self.setWindowTitle(self.tr("People"))
        self.setAttribute(Qt.WidgetAttribute.WA_DeleteOnClose)
        self._model, self._reader = model, reader
        self.people: tuple[Person, ...] = ()
        self.told = QLabel()
        self.told.setWordWrap(True)
        self.told.setTextFormat(Qt.TextFormat.PlainText)
        self.table = self._make_table()
        self.retire, self.renew = QPushButton(self.tr("Retire")), QPushButton(self.tr("Give new PIN"))
        self.initials, self.pin, self.again = QLineEdit(), QLineEdit(), QLineEdit()
        self.lead = QCheckBox(self.tr("Ward lead: policy, people, restore and removal"))
        self._lay_out()
        self.go.setText(self.tr("Add"))
        self.retire.clicked.connect(self._retire)
        self.renew.clicked.connect(self._renew)
        self.table.itemSelectionChanged.connect(self._chosen_changed)
        self.resize(theme.px(620), theme.px(520))
        self._ask_list()

    def _make_table(self) -> QTableWidget:
        heads = [self.tr("Initials"), self.tr("Role"), self.tr("Since"), self.tr("Signs in")]
        return read_table(self.tr("People"), heads)

    def _lay_out(self) -> None:
        row = QHBoxLayout()
        row.addWidget(self.renew)
        row.addWidget(self.retire)
        row.addStretch(1)
        self.body.addWidget(self.told)
        self.add_body(self.table)
        self.body.addLayout(row)
        self.initials.setMaxLength(MOST_INITIALS)
        for line in (self.pin, self.again):
            line.setEchoMode(QLineEdit.EchoMode.Password)
            line.setMaxLength(MOST_PIN)
        self.pin.setPlaceholderText(self.tr("{least} to {most} digits").format(least=LEAST_PIN, most=MOST_PIN))
        self.form.setFieldGrowthPolicy(QFormLayout.FieldGrowthPolicy.ExpandingFieldsGrow)
        self.field(self.tr("Initials"), self.initials)
        self.field(self.tr("PIN"), self.pin)
        self.field(self.tr("Once more"), self.again)
        self.form.addRow("", self.lead)

    # the list

    def _ask_list(self) -> None:
        self._model.ask(operations.listed, None, done=self._listed, failed=self.failed)

    def _listed(self, outcome: Outcome[tuple[Person, ...]]) -> None:
        self.people = outcome.value
        some = self.tr("Initials and PIN are asked for when the store opens and after a lock, not for each entry.")
        none = self.tr(
            "Nobody signs in with a PIN yet: initials alone are asked for. The first person is a ward lead, and "
            "from then on everybody signs in."
        )
        self.told.setText(some if self.people else none)
        self.table.setRowCount(len(self.people))
        for r, person in enumerate(self.people):
            role = self.tr("ward lead") if person.role == LEAD else self.tr("staff")
            state = self.tr("no, retired") if person.retired else self.tr("yes")
            for c, text in enumerate((person.initials, role, day(person.since, self._reader.zone), state)):
                self.table.setItem(r, c, QTableWidgetItem(text))
        self.grow()
        self.lead.setChecked(not self.people)
        self.lead.setEnabled(bool(self.people))
        self._chosen_changed()

    def _chosen_changed(self) -> None:
        person = self.chosen()
        for button in (self.retire, self.renew):
            button.setEnabled(person is not None and not person.retired)

    def chosen(self) -> Person | None:
        """The person whose row is chosen."""
        rows = self.table.selectionModel().selectedRows()
        return self.people[rows[0].row()] if rows else None

    # changes

    def submit(self) -> None:
        if self._pins_differ():
            return
        role = LEAD if self.lead.isChecked() else STAFF
        self.go.setEnabled(False)
        request = operations.NewPerson(self.initials.text(), self.pin.text(), role)
        self._model.ask(operations.add, request, done=self._added, failed=self.failed)

    def _renew(self) -> None:
        person = self.chosen()
        if person is not None and not self._pins_differ():
            request = operations.NewPin(person.initials, self.pin.text())
            self._model.ask(operations.set_pin, request, done=self._renewed, failed=self.failed)

    def _retire(self) -> None:
        person = self.chosen()
        if person is not None:
            self._model.ask(operations.retire, person.initials, done=self._retired, failed=self.failed)

    def _pins_differ(self) -> bool:
        if self.pin.text() == self.again.text():
            return False
        self.refuse(self.tr("The two PINs are not the same."))
        return True

    def _added(self, outcome: Outcome[str]) -> None:
        self._done(self.tr("{person} was added.").format(person=outcome.value))
        self.initials.clear()

    def _renewed(self, _outcome: Outcome[None]) -> None:
        self._done(self.tr("The PIN was changed."))

    def _retired(self, _outcome: Outcome[None]) -> None:
        self._done(self.tr("Signing in was taken away; what was recorded stays."))

    def _done(self, text: str) -> None:
        for line in (self.pin, self.again):
            line.clear()
        self.refuse(text)
        self._ask_list()

    def failed(self, failure: Failure) -> None:
        """Say why it was refused."""
        self.refuse(sentence(failure.message, self._reader))
