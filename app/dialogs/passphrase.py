"""Passphrases: one for a new store (or none, on purpose), opening with it, changing it, and the recovery code."""

from __future__ import annotations

from collections.abc import Callable

from PySide6.QtCore import Qt
from PySide6.QtGui import QFontDatabase, QGuiApplication, QTextDocument
from PySide6.QtWidgets import QCheckBox, QHBoxLayout, QLabel, QLineEdit, QPushButton, QWidget

from app.dialogs.asking import AskingDialog
from app.look.theme import Theme
from app.session.failure import Failure
from app.words import DEFAULT, sentence
from core.record.message import RecordError
from storage.keys import MIN_PASSPHRASE, check_passphrase


def _text(text: str) -> QLabel:
    label = QLabel(text)
    label.setWordWrap(True)
    label.setTextFormat(Qt.TextFormat.PlainText)
    return label


def _secret() -> QLineEdit:
    line = QLineEdit()
    line.setEchoMode(QLineEdit.EchoMode.Password)
    return line


class SecretDialog(AskingDialog):
    """A form with secrets, and a tick that shows what is typed."""

    def __init__(self, title: str, accept_word: str, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(title, accept_word, theme, parent)
        self._secrets: list[QLineEdit] = []
        self.show_typed = QCheckBox(self.tr("Show what is typed"))
        self.show_typed.toggled.connect(self._shown)

    def secret(self, label: str) -> QLineEdit:
        """A field for a secret."""
        line = _secret()
        self._secrets.append(line)
        self.field(label, line)
        return line

    def _shown(self, shown: bool) -> None:
        mode = QLineEdit.EchoMode.Normal if shown else QLineEdit.EchoMode.Password
        for line in self._secrets:
            line.setEchoMode(mode)

    def refuse_new(self, new: str, again: str) -> bool:
        """Say what is wrong with a new passphrase typed twice; whether anything is."""
        try:
            check_passphrase(new)
        except RecordError as error:
            self.refuse(sentence(error.message, DEFAULT))
            return True
        if new != again:
            self.refuse(self.tr("The two are not the same. Type the passphrase twice."))
            return True
        return False


class NewStoreDialog(SecretDialog):
    """Asks for the passphrase of a new store. Going without is a tick of its own, never the default."""

    def __init__(self, name: str, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(self.tr("New store"), self.tr("Make the store"), theme, parent)
        title = QLabel(self.tr("Protect {store}").format(store=name))
        title.setProperty("role", "emphasis")
        self.body.addWidget(title)
        for told in (
            self.tr("The store is encrypted with a passphrase. Without it, or the recovery code that you are "
                    "shown next, nobody can open it: not you, not the maker of this program."),
            self.tr("Four or five words that the ward can remember are better than one hard word. The store asks "
                    "when it is opened, not for each entry."),
        ):  # fmt: skip
            self.body.addWidget(_text(told))
        self._new = self.secret(self.tr("Passphrase"))
        self._new.setPlaceholderText(self.tr("{least} characters or more").format(least=MIN_PASSPHRASE))
        self._again = self.secret(self.tr("Once more"))
        self.form.addRow("", self.show_typed)
        self.without = QCheckBox(self.tr("No passphrase: I know that who gets at the file can read it"))
        self.form.addRow(self.without)
        self.without.toggled.connect(self._without_toggled)
        self.resize(theme.px(560), theme.px(380))

    @property
    def passphrase(self) -> str | None:
        """What was typed; None where the store goes without, on purpose."""
        return None if self.without.isChecked() else self._new.text()

    def _without_toggled(self, without: bool) -> None:
        for line in (self._new, self._again):
            line.setEnabled(not without)
            line.clear()
        self.show_typed.setEnabled(not without)
        note = self.tr("The file will not be encrypted, and the window's title will say so.")
        self.say(note if without else "")

    def submit(self) -> None:
        if self.without.isChecked() or not self.refuse_new(self._new.text(), self._again.text()):
            self.accept()


class OpenStoreDialog(SecretDialog):
    """Asks for the passphrase of a store; the recovery code opens it too."""

    def __init__(self, name: str, said: str, theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__(self.tr("Passphrase"), self.tr("Open"), theme, parent)
        title = QLabel(self.tr("{store} is encrypted").format(store=name))
        title.setProperty("role", "emphasis")
        self.body.addWidget(title)
        self._typed = self.secret(self.tr("Passphrase"))
        self.form.addRow("", self.show_typed)
        told = self.tr(
            "Nobody here knows it? Type the recovery code instead: it was shown when the store was made, and lies "
            "where the ward keeps its keys."
        )
        self.body.addWidget(_text(told))
        self.refuse(said)
        self.resize(theme.px(500), theme.px(240))

    @property
    def passphrase(self) -> str:
        """What was typed."""
        return self._typed.text()

    def submit(self) -> None:
        if not self.passphrase:
            self.refuse(self.tr("Type the passphrase or the recovery code."))
            return
        self.accept()


class ChangePassphraseDialog(SecretDialog):
    """Hands the old secret, the new passphrase and whether a new code is wanted to `change`."""

    def __init__(self, change: Callable[[str, str, bool], None], theme: Theme, parent: QWidget | None = None) -> None:
        super().__init__("", "", theme, parent)
        self.setWindowTitle(self.tr("Change passphrase"))
        self.go.setText(self.tr("Change it"))
        self._change = change
        told = self.tr(
            "Entries stay as they are and nothing is written anew. Backups made before keep the passphrase they were "
            "made with."
        )
        self.body.addWidget(_text(told))
        self._old = self.secret(self.tr("Passphrase now, or recovery code"))
        self._new = self.secret(self.tr("New passphrase"))
        self._again = self.secret(self.tr("Once more"))
        self.form.addRow("", self.show_typed)
        self.new_code = QCheckBox(self.tr("Make a new recovery code too; the old one stops working"))
        self.form.addRow("", self.new_code)
        self.resize(theme.px(560), theme.px(320))

    def submit(self) -> None:
        if not self.refuse_new(self._new.text(), self._again.text()):
            self.go.setEnabled(False)
            self._change(self._old.text(), self._new.text(), self.new_code.isChecked())

    def failed(self, failure: Failure) -> None:
        """Say why it was refused."""
        self.refuse(sentence(failure.message, DEFAULT))


class RecoveryCodeDialog(AskingDialog):
    """Shows a recovery code once. It closes when the person says that it is kept; it is written nowhere."""

    def __init__(
        self, name: str, code: str, theme: Theme, parent: QWidget | None = None, *, opens: bool = True
    ) -> None:
        super().__init__("", "", theme, parent)
        self.setWindowTitle(self.tr("Recovery code"))
        self.go.setText(self.tr("Done"))
        self._name, self._code, self._opens = name, code, opens
        self._say_what_it_is()
        self.code = QLineEdit(code)
        self.code.setReadOnly(True)
        family = QFontDatabase.systemFont(QFontDatabase.SystemFont.FixedFont).family()
        self.code.setStyleSheet(f"font-family: '{family}'; font-size: {theme.px(theme.type.emphasis)}px;")
        self.code.setAccessibleName(self.tr("Recovery code"))
        self.code.setCursorPosition(0)
        self.body.addWidget(self.code)
        self.copy, self.print = QPushButton(self.tr("Copy")), QPushButton(self.tr("Print..."))
        row = QHBoxLayout()
        row.addWidget(self.copy)
        row.addWidget(self.print)
        row.addStretch(1)
        self.body.addLayout(row)
        self.kept = QCheckBox(self.tr("It is written down or printed, and I know where it will lie"))
        self.body.addWidget(self.kept)
        self.buttons.removeButton(self.leave)
        self.go.setEnabled(False)
        self.kept.toggled.connect(self.go.setEnabled)
        self.copy.clicked.connect(self._copy)
        self.print.clicked.connect(self._print)
        self.resize(theme.px(560), theme.px(300))

    def _say_what_it_is(self) -> None:
        title = QLabel(
            self.tr("The way in when nobody knows the passphrase") if self._opens
            else self.tr("The way in when nobody has a PIN that fits")
        )  # fmt: skip
        title.setProperty("role", "emphasis")
        self.body.addWidget(title)
        told = (
            self.tr("This code opens {store} as the passphrase does, and gives a PIN to who has none.") if self._opens
            else self.tr("This code gives a PIN for {store} to who has none, or has forgotten theirs.")
        )  # fmt: skip
        keep = self.tr(
            "It is shown this once and kept nowhere in the computer. Write it down or print it, seal it, and put it "
            "where the ward keeps its keys."
        )
        self.body.addWidget(_text(f"{told.format(store=self._name)} {keep}"))

    def reject(self) -> None:
        """Esc and the window's cross close nothing before the code is kept."""
        if self.kept.isChecked():
            super().reject()
        else:
            self.refuse(self.tr("Keep the code first: it cannot be shown again."))
            self.go.setEnabled(False)

    def _copy(self) -> None:
        QGuiApplication.clipboard().setText(self._code)
        self.say(self.tr("Copied. The clipboard keeps it until something else is copied."))

    def _print(self) -> None:
        from PySide6.QtPrintSupport import QPrintDialog, QPrinter

        printer = QPrinter()
        dialog = QPrintDialog(printer, self)
        if dialog.exec():
            self.page().print_(printer)
        dialog.deleteLater()

    def page(self) -> QTextDocument:
        """What is printed: the store's name, the code, and what it is for."""
        document = QTextDocument()
        told = self.tr("Recovery code of {store}").format(store=self._name)
        why = (
            self.tr("Opens the store when nobody knows its passphrase, and gives a PIN to who has none.")
            if self._opens else self.tr("Gives a PIN to who has none, or has forgotten theirs.")
        ) + " " + self.tr("Keep it sealed, away from the computer.")  # fmt: skip
        document.setPlainText(f"Luffmark\n\n{told}\n\n{self._code}\n\n{why}\n")
        return document
