"""A policy file before it is put in force: every fault with its line, and what would change."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path

from PySide6.QtCore import Qt
from PySide6.QtWidgets import QAbstractItemView, QHeaderView, QLabel, QTableWidget, QTableWidgetItem, QWidget

from app.dialogs.asking import AskingDialog
from app.look.copying import can_be_copied
from app.look.plain_label import plain_label
from app.look.theme import Theme
from app.policy.words import rules
from app.session.failure import Failure
from app.words import Reader, sentence
from core.judgement.policy import read_policy
from core.judgement.policy_check import ERROR, PolicyDifference, between, check

Put = Callable[[str], None]


class PolicyFileDialog(AskingDialog):
    """Shows what a text holds beside the policy in force; hands it to `put` when the person says so."""

    def __init__(
        self, path: Path, text: str, in_force: str, reader: Reader, put: Put, theme: Theme,
        parent: QWidget | None = None,
    ) -> None:  # fmt: skip
        super().__init__("", "", theme, parent)
        self.setWindowTitle(self.tr("Policy file {name}").format(name=path.name))
        self.go.setText(self.tr("Put in force"))
        self._text, self._reader, self._put = text, reader, put
        self.found = check(text)
        self.head = plain_label()
        self.head.setProperty("role", "emphasis")
        self.head.setWordWrap(True)
        self.body.addWidget(self.head)
        self.table = self._made_table()
        self.add_body(self.table)
        self.note = QLabel(self.tr("A policy in force is recorded in the ledger with your initials. It can be taken "
                                   "back by putting the earlier text in force again."))  # fmt: skip
        self.note.setWordWrap(True)
        self.note.setProperty("role", "quiet")
        self.body.addWidget(self.note)
        self._show(path, in_force)
        self.resize(theme.px(860), theme.px(560))

    def _made_table(self) -> QTableWidget:
        table = QTableWidget(0, 3)
        can_be_copied(table)
        table.setEditTriggers(QAbstractItemView.EditTrigger.NoEditTriggers)
        table.setSelectionBehavior(QAbstractItemView.SelectionBehavior.SelectRows)
        table.verticalHeader().hide()
        table.setShowGrid(False)
        table.setWordWrap(True)
        table.horizontalHeader().setDefaultAlignment(Qt.AlignmentFlag.AlignLeft | Qt.AlignmentFlag.AlignVCenter)
        return table

    def _show(self, path: Path, in_force: str) -> None:
        faults = [f for f in self.found.findings if f.kind == ERROR]
        if faults:
            refused = self.tr("{name} cannot be put in force: {count} fault(s). The policy in force stays.")
            self.head.setText(refused.format(name=path.name, count=len(faults)))
            rows = [(str(f.line) if f.line else "", sentence(f.message, self._reader), "") for f in faults]
            self._fill((self.tr("Line"), self.tr("What is wrong, and what is accepted"), ""), rows)
            self.go.setEnabled(False)
            self.note.hide()
            return
        policy, changes = read_policy(self._text), between(self._text, in_force)
        name = self.tr("{name}, version {version}").format(name=policy.name, version=policy.version)
        one = self.tr("{name}: usable. One value is other than in force.")
        many = self.tr("{name}: usable. {count} values are other than in force.")
        said = (one if len(changes) == 1 else many).format(name=name, count=len(changes))
        self.head.setText(said if changes else self.tr("{name}: the same as in force.").format(name=name))
        self._fill((self.tr("Rule"), self.tr("In force now"), self.tr("In the file")), self._rows(changes))
        self.go.setEnabled(bool(changes))

    def _rows(self, changes: tuple[PolicyDifference, ...]) -> list[tuple[str, str, str]]:
        """Rule by rule in the order of the policy; its name and version first."""
        found = [(d.path, _plain(d.shipped), _plain(d.own)) for d in changes if d.path in ("name", "version")]
        for rule in rules(read_policy(self._text), changes):
            found += [(f"{rule.group}: {rule.name}, {d.what}", d.shipped or self.tr("none"), d.own or self.tr("none"))
                      for d in rule.differs]  # fmt: skip
        notes = [f for f in self.found.findings if f.kind != ERROR]
        return found + [("", sentence(f.message, self._reader), "") for f in notes]

    def _fill(self, heads: tuple[str, str, str], rows: list[tuple[str, str, str]]) -> None:
        self.table.setHorizontalHeaderLabels(list(heads))
        self.table.setAccessibleName(self.tr("Findings"))
        self.table.setRowCount(len(rows))
        for r, row in enumerate(rows):
            for c, text in enumerate(row):
                item = QTableWidgetItem(text)
                item.setToolTip(text)
                self.table.setItem(r, c, item)
        header, narrow = self.table.horizontalHeader(), not heads[2]
        header.setSectionResizeMode(0, QHeaderView.ResizeMode.ResizeToContents)
        header.setSectionResizeMode(1, QHeaderView.ResizeMode.Stretch)
        header.setSectionResizeMode(2, QHeaderView.ResizeMode.Stretch)
        self.table.setColumnHidden(2, narrow)
        self.table.resizeRowsToContents()

    def submit(self) -> None:
        self.go.setEnabled(False)
        self._put(self._text)

    def failed(self, failure: Failure) -> None:
        """Say why it was refused."""
        self.refuse(sentence(failure.message, self._reader))


def _plain(value: object) -> str:
    return "" if value is None else str(value)
