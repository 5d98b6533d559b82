"""Restoring a backup: a new store of it, with what the old store holds beyond it, to be entered again."""

from __future__ import annotations

from pathlib import Path

from PySide6.QtCore import QCoreApplication, QTimer
from PySide6.QtWidgets import QCheckBox, QLineEdit, QWidget

from app.dialogs.file_work import FileWork, free_name
from app.look.formats import as_typed, wall
from app.look.theme import Theme
from app.operations import backup as backups
from app.operations.outcome import Outcome
from app.session.clock import Clock
from app.session.failure import Failure
from app.telling.phrases import channel_name
from app.words import Reader, sentence
from storage.backup_rotation import taken_at
from storage.people import MOST_PIN
from storage.restore_report import MOST_TOLD, NewerEntry

WAIT_MS = 3_000
"""How long the next try waits after a wrong PIN: a backup cannot keep how many there were."""


class RestoreDialog(FileWork):
    """A new store of a backup. An encrypted one asks for its passphrase; without it, that is a choice of its own."""

    def __init__(
        self, backup: Path | None, against: Path | None, who: str, clock: Clock, reader: Reader, theme: Theme,
        parent: QWidget | None = None, *, folder: Path | None = None,
    ) -> None:  # fmt: skip
        super().__init__("", "", who, clock, reader, theme, parent)
        self.setWindowTitle(self.tr("Restore a backup"))
        self.go.setText(self.tr("Restore"))
        self._against, self._folder = against, folder
        self.unchecked = QCheckBox(self.tr("Nobody knows the passphrase: restore the copy unchecked"))
        if backup is not None:
            self.source.setText(str(backup))
        if against is not None:
            self.new.setText(str(free_name(against.with_name(f"{against.stem}-restored{against.suffix}"))))
        told = self.tr(
            "A backup is checked and made a new store beside the old one; nothing is overwritten. What the old store "
            "holds beyond it is listed, to be entered again."
        )
        self.lay_out(told, self.tr("Backup"), self.tr("New store"))

    def lay_out(self, told: str, source: str, new: str) -> None:
        super().lay_out(told, source, new)
        if not self._who:
            self.pin.setEchoMode(QLineEdit.EchoMode.Password)
            self.pin.setMaxLength(MOST_PIN)
            self.pin.setPlaceholderText(self.tr("a ward lead's, where people sign in; none with the recovery code"))
            self.field(self.tr("PIN"), self.pin)
        self.form.addRow("", self.unchecked)
        self.look_at_source()

    def look_at_source(self) -> None:
        super().look_at_source()
        needs = self.needs_passphrase(Path(self.source.text().strip()))
        if self.form.indexOf(self.unchecked) >= 0:
            self.form.setRowVisible(self.unchecked, needs)

    def note_of(self, path: Path) -> str:
        at = taken_at(path)
        if at is None:
            return ""
        told = self.tr("Taken {time}.").format(time=wall(at, self._reader.zone))
        kept = self.tr("It opens with the passphrase that the store had then.")
        return f"{told} {kept}" if self.needs_passphrase(path) else told

    def start_of(self, line: QLineEdit) -> str:
        if line is self.source and not line.text() and self._folder is not None:
            return str(self._folder)
        return super().start_of(line)

    def submit(self) -> None:
        if (found := self.paths()) is None:
            return
        if (not self.unchecked.isChecked() and self.lacks_passphrase()) or self.lacks_name():
            return
        passphrase = None if self.unchecked.isChecked() else self.passphrase
        request = backups.RestoreRequest(*found, passphrase, self._against, bool(self._who), self.pin.text())
        self.work(backups.restore, request, self._restored)

    def failed(self, failure: Failure) -> None:
        """Say why it was refused; after a wrong PIN the next try waits."""
        super().failed(failure)
        if failure.message.key == "people.wrong_pin":
            self.pin.clear()
            self.go.setEnabled(False)
            QTimer.singleShot(WAIT_MS, self, self._may_try_again)

    def _may_try_again(self) -> None:
        self.go.setEnabled(self.told.isHidden())

    def _restored(self, outcome: Outcome[backups.Restored]) -> None:
        self.show_told(restored_words(outcome.value, self._reader))


def restored_words(made: backups.Restored, reader: Reader) -> list[str]:
    """What came of a restore, line by line."""
    if made.unchecked is not None:
        first = _tr("{store} was made. It was NOT checked.").format(store=made.new.name)
        return [first, sentence(made.unchecked, reader)]
    lines = [_tr("{store} was made and checked: pages, chain and rules.").format(store=made.new.name)]
    if made.not_compared is not None:
        lines.append(_tr("The old store could not be compared: what it holds beyond this backup is not known."))
        return [*lines, sentence(made.not_compared, reader)]
    if made.newer is None:
        return lines
    lines.append(_tr("The old store and its backups are left as they are, until somebody removes them."))
    if not made.same:
        lines.append(_tr("The old store does not continue this backup: their chains differ."))
    if made.newer.damaged:
        lines.append(_tr("The old store is damaged and was read as far as it can be: there may be more."))
    if not made.newer.batches and not made.newer.episodes:
        return [*lines, _tr("The old store holds nothing beyond this backup.")]
    return [*lines, *_newer_words(made, reader)]


def _newer_words(made: backups.Restored, reader: Reader) -> list[str]:
    assert made.newer is not None
    lines = ["", _tr("The old store holds more, which is to be entered again:")]
    told = 0
    for e in made.newer.episodes:
        head = _tr("{label}: {entries} logged, {samples} device samples")
        line = head.format(label=made.labels.get(e.episode, e.episode), entries=e.entries, samples=e.samples)
        if e.last_recorded:
            line += _tr(", last recorded {time}").format(time=wall(e.last_recorded, reader.zone))
        lines += [line, *(f"    {_entry_words(t, reader)}" for t in e.told)]
        told += len(e.told)
    if told >= MOST_TOLD:
        lines.append(_tr("Only the newest {count} entries are listed one by one.").format(count=MOST_TOLD))
    if made.newer.others:
        lines.append(_tr("Beside these, documents, policies and sign-ins: {count}").format(count=made.newer.others))
    lines += ["", _tr("'Save from a damaged store' keeps these entries too.")]
    return lines


def _entry_words(entry: NewerEntry, reader: Reader) -> str:
    value = " ".join(part for part in (as_typed(entry.raw, entry.raw_unit), entry.note) if part)
    kinds = {"correct": _tr("corrected"), "withdraw": _tr("withdrawn"), "move": _tr("moved here")}
    what = " ".join(part for part in (channel_name(entry.channel), value) if part)
    if entry.action in kinds:
        what += f" ({kinds[entry.action]})"
    return f"{wall(entry.at, reader.zone)}  {what}, {entry.by}"


def _tr(text: str) -> str:
    return QCoreApplication.translate("restore", text)
