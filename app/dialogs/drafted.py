"""A small form whose fields outlive a crash: what is half typed is kept as a draft and can be put back."""

from __future__ import annotations

from collections.abc import Mapping

from PySide6.QtCore import Signal
from PySide6.QtWidgets import QComboBox, QLineEdit

from app.dialogs.asking import AskingDialog
from app.forms.typed import fields_of, put, read


class DraftedDialog(AskingDialog):
    """Call `begin_draft` once the fields stand, and again with the names of those that the dialog fills itself."""

    changed = Signal()
    """A field was edited."""
    _opened_as: Mapping[str, str] | None = None
    is_recording = False
    """What was sent is on its way: whoever leaves now would believe that nothing was recorded."""

    def reject(self) -> None:
        """Leave, but not before the answer to what was sent."""
        if self.is_recording:
            self.say(self.tr("It is being recorded. Leave once it stands here what came of it."))
        else:
            super().reject()

    def begin_draft(self, *names: str) -> None:
        """What stands in these fields now, in all at first, is not typed by anybody."""
        fields = fields_of(self)
        there = {name: read(field) for name, field in fields.items()}
        if self._opened_as is not None:
            self._opened_as = {**self._opened_as, **{name: there[name] for name in names}}
            return
        self._opened_as = there
        for field in fields.values():
            if isinstance(field, QLineEdit):
                field.textChanged.connect(self.changed)
            elif isinstance(field, QComboBox):
                field.currentIndexChanged.connect(self.changed)

    def typed(self) -> dict[str, str]:
        """What a person has changed since then, by field, to be kept as a draft."""
        before = self._opened_as or {}
        there = {name: read(field) for name, field in fields_of(self).items()}
        return {name: text for name, text in there.items() if text != before.get(name, "")}

    def put(self, typed: Mapping[str, str]) -> None:
        """Put a draft back into the fields; nothing of it is recorded."""
        put(fields_of(self), typed)
