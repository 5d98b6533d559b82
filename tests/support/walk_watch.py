"""What may never happen while somebody walks through the window: collected as it happens, checked at rest.

An exception in a slot, a warning of Qt or Python, a dialog of a store that is gone, another patient in hand than
shown, an entry for another than shown, an entry that was acknowledged and is not in the store.
"""

from __future__ import annotations

import sys
import threading
import traceback
from collections.abc import Callable
from pathlib import Path
from typing import Any

from PySide6.QtCore import QtMsgType, qInstallMessageHandler
from PySide6.QtWidgets import QApplication, QDialog, QWidget

from app.operations import correction, device_span, due, entry, flag
from app.operations.outcome import Outcome
from app.operations.recording import Recorded
from app.session.model import SessionModel
from app.strip.log_strip import LogStrip
from app.strip.state import State
from app.window.main import MainWindow
from storage.store import Store

ABOUT_ONE = frozenset({
    entry.log_line, flag.see, flag.settle, due.close, correction.correct, correction.withdraw, correction.move,
    correction.undo, device_span.record,
})  # fmt: skip
"""What records for the patient in hand."""
OTHERS = "ZZ"
"""Who logs in other programs."""
BY_ITSELF = ("flag.transitions",)
SAID_BY_THE_PLATFORM = "This plugin does not support"


class Watch:
    """Stands beside one walk. `wrong` holds every fault in words."""

    def __init__(self, say: Callable[[str], None], secret_of: Callable[[Path], str | None]) -> None:
        self._say, self._secret_of = say, secret_of
        self.wrong: list[str] = []
        self.window: MainWindow | None = None
        self.recorded = 0
        self._acknowledged: list[tuple[Path, Recorded]] = []
        self._previewed: Any = None
        self._model: SessionModel | None = None
        self._untold: dict[str, str] = {}
        """What a person recorded here and was not told of yet: how, by the id of its last entry."""

    def fault(self, told: str) -> None:
        """Keep a fault and say it at once: a crash may come next."""
        self.wrong.append(told)
        self._say(f"WRONG: {told}")

    # as it happens

    def stand(self) -> None:
        """Listen to everything from now on."""
        sys.excepthook = lambda kind, error, trace: self.fault(
            "".join(traceback.format_exception(kind, error, trace))
        )
        sys.unraisablehook = lambda told: self.fault(
            f"unraisable in {told.object!r}: " + "".join(traceback.format_exception(told.exc_value))
        )
        threading.excepthook = lambda told: self.fault(
            f"in a thread: {''.join(traceback.format_exception(told.exc_value))}"
        )
        qInstallMessageHandler(self._qt_says)
        self._listen_to_asking()
        self._listen_to_recording()

    def _qt_says(self, kind: QtMsgType, _context: object, text: str) -> None:
        if kind not in (QtMsgType.QtDebugMsg, QtMsgType.QtInfoMsg) and SAID_BY_THE_PLATFORM not in text:
            self.fault(f"Qt says: {text}\n{''.join(traceback.format_stack(limit=12))}")

    def _listen_to_asking(self) -> None:
        ask = SessionModel.ask

        def heard(model: SessionModel, operation: Any, request: Any = None, **how: Any) -> int:
            self._asked(model, operation, request)
            return ask(model, operation, request, **how)

        SessionModel.ask = heard  # type: ignore[method-assign]

    def _listen_to_recording(self) -> None:
        remember = LogStrip.remember

        def heard(strip: LogStrip, recorded: Recorded) -> None:
            self._acknowledged.append((strip._model.session.store_path, recorded))
            remember(strip, recorded)

        LogStrip.remember = heard  # type: ignore[method-assign]
        undone, append = LogStrip._undone, Store.append

        def heard_undone(strip: LogStrip, outcome: Outcome[Recorded]) -> None:
            self._acknowledged.append((strip._model.session.store_path, outcome.value))
            undone(strip, outcome)

        def heard_append(store: Store, entries: Any, *, by: str, operation: str, **more: Any) -> Any:
            receipt = append(store, entries, by=by, operation=operation, **more)
            if by != OTHERS and operation not in BY_ITSELF:
                self._untold[receipt.ids[-1]] = f"{operation} by {by}: {entries}"
            return receipt

        LogStrip._undone = heard_undone  # type: ignore[method-assign]
        Store.append = heard_append  # type: ignore[method-assign]

    def _asked(self, model: SessionModel, operation: Any, request: Any) -> None:
        window = self.window
        if window is None or window.model is not model or window.strip is None:
            if operation in ABOUT_ONE:
                self.fault(f"{operation.__name__} {request} is asked of a store that is gone")
            return
        front = front_dialog()
        if operation is entry.preview and front is None:
            self._previewed = request
        if operation not in ABOUT_ONE:
            return
        if front is not None:
            self._asked_in(front, operation, request)
        elif operation is correction.undo:
            words = f"{window.strip.whom.text()} {window.strip.plain()}"
            if not self._named(request.episode, words):
                self.fault(f"undo of {request.episode} while '{words}' is shown")
        else:
            self._asked_by_strip(window, operation, request)

    def _asked_in(self, front: QDialog, operation: Any, request: Any) -> None:
        told_for = front.property("walk_for")
        if told_for is not None and told_for != request.episode:
            what = f"{type(front).__name__} opened for {told_for}"
            self.fault(f"{operation.__name__} for {request.episode} in {what}")

    def _asked_by_strip(self, window: MainWindow, operation: Any, request: Any) -> None:
        assert window.strip is not None
        if request.episode != window.strip.patient or not self._named(request.episode, window.strip.whom.text()):
            self.fault(f"{operation.__name__} for {request.episode} while '{window.strip.whom.text()}' is shown")
        seen = self._previewed
        if operation is entry.log_line and (
            seen is None or (seen.episode, seen.line) != (request.episode, request.line)
        ):
            self.fault(f"'{request.line}' for {request.episode} is recorded, shown was {seen}")

    def _named(self, episode: str, words: str) -> bool:
        assert self.window is not None
        assert self.window.feed is not None
        answer = self.window.feed.answers.get(episode)
        return answer is None or answer.record.label in words

    # at rest

    def note_dialogs(self) -> None:
        """Keep of each dialog for whom it was opened."""
        strip = self.window.strip if self.window is not None else None
        for dialog in dialogs_seen():
            if strip is not None and not dialog.property("walk_noted"):
                dialog.setProperty("walk_noted", True)
                dialog.setProperty("walk_for", strip.patient)

    def look(self) -> None:
        """Everything that must hold when the window is at rest."""
        if self.window is None:
            return
        self._look_at_dialogs(self.window)
        self._look_at_patient(self.window)
        self._look_at_store()

    def _look_at_dialogs(self, window: MainWindow) -> None:
        for dialog in dialogs_seen():
            name = f"{type(dialog).__name__} '{dialog.windowTitle()}'"
            if dialog.isModal() and dialog.parentWidget() is None:
                self.fault(f"{name} is modal and has no parent")
            gone = [v for v in vars(dialog).values() if isinstance(v, SessionModel) and v is not window.model]
            if gone:
                self.fault(f"{name} is of a store that is gone")
            if window.keeping.lock.is_locked and dialog is not window.keeping.lock.over:
                self.fault(f"{name} is seen while the window is locked")

    def _look_at_patient(self, window: MainWindow) -> None:
        o = window.opened
        if o is None or not o.feed.is_ready:
            return
        key = o.model.session.selection
        here = key if key in o.feed.answers else None
        if o.strip.patient != here:
            self.fault(f"{key} is in hand, the strip is for {o.strip.patient}")
        if here is not None and not self._named(here, o.strip.whom.text()):
            self.fault(f"{key} is in hand, the strip names {o.strip.whom.text()}")
        if here is None:
            return
        on = getattr(o.pages.currentWidget(), "_on", None)
        if o.pages.name in ("episode", "map") and on is not None and on.figures.episode != key:
            self.fault(f"{key} is in hand, the {o.pages.name} shows {on.figures.episode}")
        lane = o.pages.ward.lanes.selected_key
        if lane != key and key in o.pages.ward.shown_keys():
            self.fault(f"{key} is in hand, the lane of {lane} is chosen")
        if o.strip.state is State.READY and o.strip._preview is not None and not o.strip.line.text():
            self.fault("a preview stands there and no line")

    def _look_at_store(self) -> None:
        """Each recording that was acknowledged stands in the ledger, as another connection reads it."""
        told, self._acknowledged = self._acknowledged, []
        assert self.window is not None
        if self._model is not self.window.model:  # what was on its way when a store was closed is told nobody
            self._model, self._untold = self.window.model, {}
        for recorded in (r for _, r in told):
            self._untold.pop(recorded.ids[-1], None)
        for how in self._untold.values():
            self.fault(f"recorded, and nobody was told: {how}")
        self._untold.clear()
        for path in {path for path, _ in told if path.exists()}:
            with Store.open(path, passphrase=self._secret_of(path), read_only=True) as store:
                for recorded in (r for p, r in told if p == path):
                    there = {e.id for e in store.entries(recorded.episode)}
                    if not there.issuperset(recorded.ids):
                        self.fault(f"acknowledged and not in the store: {recorded}")
                    self.recorded += len(recorded.ids)

    def behind(self) -> str:
        """What the ward shows that is not what the store holds by now; "" where it looks back, or all is there."""
        o = self.window.opened if self.window is not None else None
        if o is None or not o.feed.is_ready or not o.model.session.is_live:
            return ""
        path, shown = o.model.session.store_path, dict(o.feed.answers)
        with Store.open(path, passphrase=self._secret_of(path), read_only=True) as store:
            for key, answer in shown.items():
                there = {s.entry for s in store.episode(key).standing} if store.has_episode(key) else set()
                seen = {s.entry for s in answer.record.standing}
                if there != seen:
                    told = f"not shown: {there - seen}, shown and not there: {seen - there}"
                    return f"what is shown of {key} is not what stands in the store, {told}"
        return ""

    def look_whole(self, path: Path) -> None:
        """The store is sound."""
        with Store.open(path, passphrase=self._secret_of(path), read_only=True) as store:
            if found := store.verify():
                self.fault(f"{path.name} is not sound: {found}")


def dialogs_seen() -> list[QDialog]:
    """Every dialog on show."""
    return [w for w in QApplication.topLevelWidgets() if isinstance(w, QDialog) and w.isVisible()]


def front_dialog() -> QDialog | None:
    """The dialog that takes the keys."""
    front: QWidget | None = QApplication.activeModalWidget()
    return front if isinstance(front, QDialog) else None
