"""Lines that were sent to be recorded: one that fails comes back for its patient, so that nothing typed is lost."""

from __future__ import annotations

from collections import deque
from dataclasses import dataclass, field


@dataclass(frozen=True, slots=True)
class Sent:
    """A line on its way: the episode, what the episode is called, and the words."""

    episode: str
    label: str
    line: str


@dataclass(slots=True)
class SentLines:
    """Answers come in the order in which lines were sent: there is one worker, and it does them in turn.

    >>> lines = SentLines()
    >>> lines.send(Sent("E1", "Bed 1", "22/6"))
    >>> lines.failed().line, lines.back_for("E2"), lines.back_for("E1"), lines.back_for("E1")
    ('22/6', '', '22/6', '')
    """

    _on_the_way: deque[Sent] = field(default_factory=deque)
    _failed: dict[str, str] = field(default_factory=dict)

    def send(self, sent: Sent) -> None:
        """A line was sent."""
        self._on_the_way.append(sent)

    def taken(self) -> Sent:
        """The oldest on its way was recorded."""
        return self._on_the_way.popleft()

    def failed(self) -> Sent:
        """The oldest on its way was not recorded; it is kept for its episode."""
        sent = self._on_the_way.popleft()
        self._failed[sent.episode] = sent.line
        return sent

    def back_for(self, episode: str) -> str:
        """The line that failed for an episode, handed out once; "" where there is none."""
        return self._failed.pop(episode, "")
