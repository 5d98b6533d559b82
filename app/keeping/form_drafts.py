"""Keeps what is being typed into a form, in the store and encrypted with it, so that a crash loses no field."""

from __future__ import annotations

import json
from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

from PySide6.QtCore import QObject, QTimer, Signal

from app.operations import draft as operations
from app.operations.draft import Draft
from app.operations.outcome import Outcome
from app.session.failure import Failure

if TYPE_CHECKING:
    from app.dialogs.drafted import DraftedDialog
    from app.forms.previewed_form import PreviewedForm
    from app.session.model import SessionModel

AFTER_MS = 1_200
"""How long a form rests before it is kept: not at every letter."""
FORM = "form "


@dataclass(frozen=True, slots=True)
class LostForm:
    """A form that was being filled in when its program ended: its kind, for which episode ("" for a new one), its
    title, and what was typed by field. `draft` is the name it is kept under."""

    kind: str
    episode: str
    title: str
    typed: Mapping[str, str]
    draft: str


class FormDrafts(QObject):
    """Follows the one form that is open in a window. `mark` is the window's own."""

    found = Signal(object)
    """`LostForm`, the newest one."""

    def __init__(self, model: SessionModel, mark: str, parent: QObject) -> None:
        super().__init__(parent)
        self._model, self._name = model, FORM + mark
        self._form: PreviewedForm | DraftedDialog | None = None
        self._episode, self._kept = "", ""
        self._rest = QTimer(self)
        self._rest.setSingleShot(True)
        self._rest.setInterval(AFTER_MS)
        self._rest.timeout.connect(self.keep)

    def follow(self, form: PreviewedForm | DraftedDialog, episode: str = "") -> None:
        """A form has opened."""
        self._form, self._episode = form, episode
        form.changed.connect(self._rest.start)
        form.finished.connect(self._ended)

    def keep(self) -> None:
        """Keep the form as it is now; forget it where nothing is typed."""
        self._rest.stop()
        if self._form is None or self._model.session.read_only:
            return
        typed = self._form.typed()
        fact = {"form": type(self._form).__name__, "episode": self._episode, "title": self._form.windowTitle(),
                "typed": typed, "who": self._model.session.person}  # fmt: skip
        self._put(json.dumps(fact, ensure_ascii=False) if typed else "")

    def close(self) -> None:
        """The store closes: what stands in the form is kept, and the next window may take it up."""
        self.keep()
        if self._form is not None:
            self._form.finished.disconnect(self._ended)
        self._form = None

    def _ended(self, _result: int) -> None:
        """Recorded, or left on purpose: it is no draft any more."""
        self._rest.stop()
        self._form = None
        self._put("")

    def _put(self, text: str) -> None:
        if text != self._kept:
            self._kept = text
            self._model.ask(operations.keep, Draft(self._name, text or None), done=self._done, failed=self._failed)

    # what was lost

    def take_lost(self, lost: Mapping[str, str]) -> None:
        """Tell of the newest of the drafts that programs which ended have left."""
        known = [form for name, text in lost.items() if (form := _read(name, text)) is not None]
        if known:
            self.found.emit(known[-1])

    def forget(self, lost: LostForm) -> None:
        """A lost form stands in a form again, or is wanted no more."""
        self._model.ask(operations.keep, Draft(lost.draft, None), done=self._done, failed=self._failed)

    def _done(self, _outcome: Outcome[None]) -> None:
        """Kept."""

    def _failed(self, _failure: Failure) -> None:
        """A draft that cannot be kept stops nobody from logging; what stops logging is said elsewhere."""
        self._kept = ""


def _read(name: str, text: str) -> LostForm | None:
    try:
        fact = json.loads(text)
        typed = {str(k): str(v) for k, v in fact["typed"].items()}
        return LostForm(str(fact["form"]), str(fact["episode"]), str(fact["title"]), typed, name)
    except (ValueError, KeyError, TypeError, AttributeError):
        return None
