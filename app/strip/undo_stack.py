"""What was recorded in this window and can be taken back, the newest first."""

from __future__ import annotations

from collections import deque
from dataclasses import dataclass, field

from app.operations.recording import Recorded

MOST = 50


@dataclass(slots=True)
class UndoStack:
    """Answers come in the order in which recordings were taken up: there is one worker. One that could not be
    taken back goes on top again."""

    _kept: list[Recorded] = field(default_factory=list)
    _on_the_way: deque[Recorded] = field(default_factory=deque)

    def __bool__(self) -> bool:
        return bool(self._kept)

    @property
    def newest(self) -> Recorded | None:
        """What would be taken back."""
        return self._kept[-1] if self._kept else None

    def push(self, recorded: Recorded) -> None:
        """Something was recorded."""
        self._kept = [*self._kept, recorded][-MOST:]

    def take(self) -> Recorded:
        """The newest, which is now being taken back."""
        self._on_the_way.append(self._kept.pop())
        return self._on_the_way[-1]

    def taken_back(self) -> Recorded:
        """The oldest on its way was taken back, or can never be."""
        return self._on_the_way.popleft()

    def failed(self) -> None:
        """The oldest on its way was not taken back and may be tried again."""
        self._kept.append(self._on_the_way.popleft())
