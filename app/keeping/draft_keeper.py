"""Keeps what is being typed, in the store and encrypted with it, so that a crash loses no word: the log strip's line,
and by `form_drafts` the form that is open.

Each window holds a lock file in the temporary folder, named by a random number alone. A draft whose window's lock is
free belongs to a program that ended, and is put back on the line.
"""

from __future__ import annotations

import json
from collections.abc import Mapping
from pathlib import Path
from typing import TYPE_CHECKING
from uuid import uuid4

from PySide6.QtCore import QDir, QObject, QTimer, Signal

from app.keeping.form_drafts import AFTER_MS, FORM, FormDrafts
from app.keeping.left_behind import is_free, own_lock
from app.operations import draft as operations
from app.operations.draft import Draft
from app.operations.outcome import Outcome
from app.session.failure import Failure

if TYPE_CHECKING:
    from app.window.opened import Opened

PREFIX = "strip "


class DraftKeeper(QObject):
    """Follows the strip of one open store."""

    recovered = Signal(str)
    """The label of the patient whose half-typed line is back."""

    def __init__(self, opened: Opened, parent: QObject) -> None:
        super().__init__(parent)
        self._o = opened
        mark = uuid4().hex
        self._name = PREFIX + mark
        self.forms = FormDrafts(opened.model, mark, self)
        self._guard = own_lock(_lock_path(mark))
        self._kept = ""
        self._found: dict[str, str] | None = None
        self._rest = QTimer(self)
        self._rest.setSingleShot(True)
        self._rest.setInterval(AFTER_MS)
        self._rest.timeout.connect(self._keep_line)
        opened.strip.line.textChanged.connect(self._typed)
        opened.feed.refreshed.connect(self._look)

    def look_for_lost(self) -> None:
        """Ask for what windows that ended early were typing."""
        self._o.model.ask(operations.load, None, done=self._loaded, failed=self._failed)

    def keep(self) -> None:
        """Keep the line and the form as they are now; forget what is empty."""
        self.forms.keep()
        self._keep_line()

    def _keep_line(self) -> None:
        self._rest.stop()
        session, text = self._o.model.session, self._o.strip.line.text().strip()
        if session.read_only or text == self._kept:
            return
        self._kept = text
        fact = {"episode": self._o.strip.patient or "", "line": text, "who": session.person}
        kept = Draft(self._name, json.dumps(fact, ensure_ascii=False) if text else None)
        self._o.model.ask(operations.keep, kept, done=self._done, failed=self._failed)

    def close(self) -> None:
        """The store closes: what is still on the line is kept, and may be taken up by the next window."""
        self.keep()
        self.forms.close()
        self._o.strip.line.textChanged.disconnect(self._typed)
        self._guard.unlock()

    def _typed(self, text: str) -> None:
        if text.strip():
            self._rest.start()
        elif self._kept:
            self._keep_line()

    def _loaded(self, outcome: Outcome[Mapping[str, str]]) -> None:
        lost = {n: t for n, t in outcome.value.items() if n.startswith((PREFIX, FORM)) and self._is_lost(n)}
        self._found = {n: t for n, t in lost.items() if n.startswith(PREFIX)}
        self._look()
        self.forms.take_lost({n: t for n, t in lost.items() if n.startswith(FORM)})

    def _is_lost(self, name: str) -> bool:
        """Whether the window that kept it is gone."""
        mark = name.partition(" ")[2]
        return mark != self._name.removeprefix(PREFIX) and is_free(_lock_path(mark))

    def _look(self, _content: object = None) -> None:
        """Put the newest lost line back, once its patient is on the ward's page."""
        if not self._found or not self._o.feed.is_ready:
            return
        found, self._found = self._found, None
        fact = _fact(list(found.values())[-1])
        answer = self._o.feed.answers.get(fact.get("episode", ""))
        if answer is None or self._o.strip.line.text():
            return
        self._o.model.select(fact["episode"])  # the strip follows, in the units of this window
        self._o.strip.set_text(fact.get("line", ""))
        self._keep_line()
        for name in found:
            self._o.model.ask(operations.keep, Draft(name, None), done=self._done, failed=self._failed)
        self.recovered.emit(self._o.strip.whom.text())

    def _done(self, _outcome: Outcome[None]) -> None:
        """Kept."""

    def _failed(self, _failure: Failure) -> None:
        """A draft that cannot be kept stops nobody from logging; what stops logging is said elsewhere."""
        self._kept = ""


def _lock_path(mark: str) -> Path:
    return Path(QDir.temp().filePath(f"luffmark-{mark}.lock"))


def _fact(text: str) -> dict[str, str]:
    try:
        found = json.loads(text)
    except ValueError:
        return {}
    return {str(k): str(v) for k, v in found.items()} if isinstance(found, dict) else {}
