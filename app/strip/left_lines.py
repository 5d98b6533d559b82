"""Lines that were left half typed: each waits for its own patient and is shown when that patient is in hand again."""

from __future__ import annotations

from dataclasses import dataclass, field


@dataclass(slots=True)
class LeftLines:
    """By episode. A line is handed out to the patient it was typed for, once, and to nobody else.

    >>> left = LeftLines()
    >>> left.keep("E1", "22/6 ")
    >>> left.back_for("E2"), left.back_for("E1"), left.back_for("E1")
    ('', '22/6 ', '')
    """

    _by_episode: dict[str, str] = field(default_factory=dict)

    def keep(self, episode: str, line: str) -> None:
        """Keep what stands on the line of a patient that is left; an empty line is none."""
        if line.strip():
            self._by_episode[episode] = line

    def back_for(self, episode: str) -> str:
        """The line that was left for an episode; "" where there is none."""
        return self._by_episode.pop(episode, "")
