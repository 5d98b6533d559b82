"""The policy: read it, take another in from a file, save the one in force."""

from __future__ import annotations

from pathlib import Path
from typing import TYPE_CHECKING

from PySide6.QtWidgets import QFileDialog

from app.deeds.writer import Writer
from app.operations.outcome import Outcome
from app.session.failure import Failure, failure_of

if TYPE_CHECKING:
    from app.dialogs.policy_file import PolicyFileDialog
    from app.operations.policy import PolicyInForce
    from app.policy.view import PolicyDialog
    from core.judgement.policy import Policy

KINDS = "Policy (*.toml)"


class PolicyDeeds(Writer):
    """Shows one dialog of the policy at a time."""

    shown: PolicyDialog | None = None
    asking: PolicyFileDialog | None = None

    def show(self) -> None:
        """The policy in force."""
        from app.operations import policy

        self.model.ask(policy.show, None, done=self._found, subject="policy")

    def _found(self, outcome: Outcome[PolicyInForce]) -> None:
        from app.policy.view import PolicyDialog

        if self.shown is not None:
            self.shown.show_policy(outcome.value, self.window.plain_reader)
            return
        dialog = PolicyDialog(outcome.value, self.window.plain_reader, self.window.theme, self.window)
        session = self.model.session
        dialog.take_in.setEnabled(session.is_live and not session.read_only)
        dialog.file_wanted.connect(self.ask_file)
        dialog.save_wanted.connect(self.ask_where)
        dialog.finished.connect(self._closed)
        self.shown = dialog
        dialog.open()

    def _closed(self, _result: int) -> None:
        self.shown = None

    # a file

    def ask_file(self) -> None:
        """Ask which file, look at it."""
        parent = self.shown or self.window
        chosen, _ = QFileDialog.getOpenFileName(parent, self.tr("Take in a policy"), str(Path.home()),
                                                f"{KINDS};;{self.tr('All files (*)')}")  # fmt: skip
        if chosen:
            self.look_at(Path(chosen))

    def look_at(self, path: Path) -> None:
        """Show what a file holds; the dialog puts it in force."""
        from app.dialogs.policy_file import PolicyFileDialog
        from app.policy.file import text_of
        from core.record.message import RecordError

        if self.shown is None:
            return
        try:
            text = text_of(path)
        except (OSError, RecordError) as error:
            self.window.show_failure(failure_of(error))
            return
        self.asking = PolicyFileDialog(path, text, self.shown.found.text, self.window.plain_reader, self._put,
                                       self.window.theme, self.shown)  # fmt: skip
        self.asking.finished.connect(self._left)
        self.asking.open()

    def _left(self, _result: int) -> None:
        """Left, perhaps before the answer came: what came of it is told in the window."""
        self.asking = None

    def _put(self, text: str) -> None:
        from app.operations import policy

        self.model.ask(policy.put, text, done=self._is_put, failed=self._not_put)

    def _is_put(self, outcome: Outcome[Policy]) -> None:
        if self.asking is not None:
            self.asking.accept()
        name = self.tr("{name}, version {version}").format(name=outcome.value.name, version=outcome.value.version)
        self.window.say(self.tr("In force now: {name}").format(name=name))
        if self.shown is not None:
            self.show()

    def _not_put(self, failure: Failure) -> None:
        if self.asking is not None:
            self.asking.failed(failure)
        else:
            self.window.show_failure(failure)

    # saving

    def ask_where(self) -> None:
        """Ask where, write the policy in force for editing."""
        parent, usual = self.shown or self.window, str(Path.home() / "policy.toml")
        chosen, _ = QFileDialog.getSaveFileName(parent, self.tr("Save policy"), usual, KINDS)
        if chosen:
            self.save(Path(chosen))

    def save(self, path: Path) -> None:
        """Write the policy in force, byte for byte as it is kept."""
        if self.shown is not None:
            self.write(path, self.shown.found.text.encode("utf-8"))
