"""A form that works on files: one to read, one to make, a passphrase, and what came of it in words."""

from __future__ import annotations

from pathlib import Path
from typing import Any, cast

from PySide6.QtCore import Qt, Signal
from PySide6.QtWidgets import (
    QFileDialog,
    QHBoxLayout,
    QLabel,
    QLineEdit,
    QPlainTextEdit,
    QPushButton,
    QSizePolicy,
    QWidget,
)

from app.dialogs.asking import label_beside
from app.dialogs.passphrase import SecretDialog
from app.look.theme import Theme
from app.session.clock import Clock
from app.session.failure import Failure
from app.session.runner import Opener, Operation, Runner
from app.words import Reader, sentence
from storage.people import MOST_INITIALS


class _NoStore:
    """Stands where a runner wants a store: this work is on files alone."""

    def close(self) -> None:
        """Nothing is open."""


class FileWork(SecretDialog):
    """The work runs on a worker of its own. `made` carries the path of the store to be opened and its passphrase."""

    made = Signal(object, object)

    def __init__(
        self, title: str, word: str, who: str, clock: Clock, reader: Reader, theme: Theme, parent: QWidget | None
    ) -> None:
        super().__init__(title, word, theme, parent)
        self._who, self._clock, self._reader = who, clock, reader
        self.initials, self.pin = QLineEdit(), QLineEdit()
        """Who does it, where nobody is signed in to an open store."""
        self._runner: Runner | None = None
        self.source, self.new = QLineEdit(), QLineEdit()
        self.noted = QLabel()
        self.noted.setProperty("role", "caption")
        self.noted.setWordWrap(True)
        self.noted.setTextFormat(Qt.TextFormat.PlainText)
        self.noted.setSizePolicy(QSizePolicy.Policy.Expanding, QSizePolicy.Policy.Preferred)
        self.told = QPlainTextEdit()
        self.told.setReadOnly(True)
        self.told.setAccessibleName(self.tr("What came of it"))
        self.told.setMinimumHeight(theme.px(180))
        self.told.hide()
        self.open_new = QPushButton(self.tr("Open the new store"))
        self.open_new.setProperty("role", "primary")
        self.open_new.hide()
        self.open_new.clicked.connect(self._open_new)
        self.resize(theme.px(680), theme.px(320))

    def lay_out(self, told: str, source: str, new: str) -> None:
        """The form, with the words for its two files."""
        label = QLabel(told)
        label.setWordWrap(True)
        label.setTextFormat(Qt.TextFormat.PlainText)
        self.body.addWidget(label)
        self._path_row(source, self.source, self._choose_source)
        self.form.addRow("", self.noted)
        self._path_row(new, self.new, self._choose_new)
        self.secret_line = self.secret(self.tr("Passphrase"))
        self.secret_line.setPlaceholderText(self.tr("or the recovery code"))
        self.form.addRow("", self.show_typed)
        if not self._who:
            self.initials.setMaxLength(MOST_INITIALS)
            self.field(self.tr("Your initials"), self.initials)
        self._column.insertWidget(2, self.told, 1)
        self._column.insertWidget(3, self.open_new, 0, Qt.AlignmentFlag.AlignLeft)
        self.source.textChanged.connect(self.look_at_source)
        self.look_at_source()

    def _path_row(self, label: str, line: QLineEdit, choose: Any) -> None:
        button = QPushButton(self.tr("Choose..."))
        button.setProperty("role", "small")
        button.setAutoDefault(False)
        button.setAccessibleName(self.tr("Choose: {what}").format(what=label))
        button.clicked.connect(choose)
        row = QWidget()
        layout = QHBoxLayout(row)
        layout.setContentsMargins(0, 0, 0, 0)
        layout.addWidget(line, 1)
        layout.addWidget(button)
        line.setAccessibleName(label)
        self.form.addRow(label_beside(label, line), row)

    def look_at_source(self) -> None:
        """Ask for a passphrase only where the file needs one, and say what file it is."""
        path = Path(self.source.text().strip())
        needs = self.needs_passphrase(path)
        self.form.setRowVisible(self.secret_line, needs)
        self.form.setRowVisible(self.show_typed, needs)
        text = self.note_of(path) if path.is_file() else ""
        self.noted.setText(text)
        self.form.setRowVisible(self.noted, bool(text))
        self.source.setToolTip(self.source.text())

    def needs_passphrase(self, path: Path) -> bool:
        """Whether the file is encrypted; one that is not there yet may be."""
        from storage.store_file import is_encrypted

        try:
            return is_encrypted(path)
        except OSError:
            return not path.name

    def note_of(self, path: Path) -> str:
        """What is to be said of the file that is named."""
        del path
        return ""

    def start_of(self, line: QLineEdit) -> str:
        """Where choosing begins."""
        return line.text()

    def _choose_source(self) -> None:
        chosen, _ = QFileDialog.getOpenFileName(self, self.windowTitle(), self.start_of(self.source))
        if chosen:
            self.source.setText(chosen)

    def _choose_new(self) -> None:
        chosen, _ = QFileDialog.getSaveFileName(self, self.windowTitle(), self.start_of(self.new))
        if chosen:
            self.new.setText(chosen)

    @property
    def who(self) -> str:
        """Who does it: the person of the open store, else the initials that were typed."""
        return self._who or self.initials.text().strip().upper()

    def lacks_name(self) -> bool:
        """Say that initials are wanted, where they are; whether that is so."""
        if not self.who:
            self.refuse(self.tr("Type your initials: the new store keeps who made it."))
            self.initials.setFocus()
        return not self.who

    def paths(self) -> tuple[Path, Path] | None:
        """Both files; None, and a word of it, where one is not named."""
        if self.source.text().strip() and self.new.text().strip():
            return Path(self.source.text().strip()), Path(self.new.text().strip())
        self.refuse(self.tr("Name both files."))
        return None

    @property
    def passphrase(self) -> str | None:
        """What was typed; None for nothing."""
        return self.secret_line.text() or None

    def lacks_passphrase(self) -> bool:
        """Say that it is wanted, where it is and nothing was typed; whether that is so."""
        wanted = self.passphrase is None and self.needs_passphrase(Path(self.source.text().strip()))
        if wanted:
            self.refuse(self.tr("This file is encrypted. Type its passphrase, or the recovery code."))
            self.secret_line.setFocus()
        return wanted

    def work(self, operation: Operation, request: object, done: Any) -> None:
        """Do it; the form waits."""
        self.go.setEnabled(False)
        self.say(self.tr("Working..."))
        self._end_work()
        self._runner = Runner(cast(Opener, _NoStore), self)
        self._runner.submit(operation, request, who=self.who, now=self._clock.now(), done=done, failed=self.failed)

    def _end_work(self) -> None:
        if self._runner is not None:
            self._runner.close()
            self._runner = None

    def failed(self, failure: Failure) -> None:
        """Say why it was refused."""
        self._end_work()
        self.refuse(sentence(failure.message, self._reader))

    def show_told(self, lines: list[str]) -> None:
        """Say what came of it."""
        self._end_work()
        self.say("")
        self.told.setPlainText("\n".join(lines))
        self.told.show()
        self.open_new.show()
        self.open_new.setDefault(True)
        self.go.setEnabled(False)
        self.go.hide()
        for row in range(self.form.rowCount()):
            self.form.setRowVisible(row, False)
        told_at = self._column.indexOf(self.told)
        for n in range(self._column.count()):
            self._column.setStretch(n, int(n == told_at))
        self.resize(self.width(), max(self.height(), self.theme.px(420)))
        self.grow()
        self.open_new.setFocus()

    def _open_new(self) -> None:
        path, passphrase = Path(self.new.text().strip()), self.passphrase
        self.accept()
        self.made.emit(path, passphrase)

    def done(self, result: int) -> None:
        """The worker ends with the form."""
        self._end_work()
        super().done(result)


def free_name(path: Path) -> Path:
    """A name that nothing has yet: a second restore is proposed beside the first."""
    made, n = path, 1
    while made.exists():
        n += 1
        made = path.with_name(f"{path.stem}-{n}{path.suffix}")
    return made
