"""A question is not answered by the second half of a double press, as gloves make them."""

from __future__ import annotations

from collections.abc import Callable
from time import monotonic

SETTLE_S = 0.7
"""How long a question stands before a yes counts, in seconds: longer than a double press, shorter than reading it."""


class SettleTime:
    """Starts when a question appears. `clock` gives seconds that never run backwards."""

    def __init__(self, clock: Callable[[], float] = monotonic) -> None:
        self.clock = clock
        self._since: float | None = None

    def start(self) -> None:
        """A question has just appeared."""
        self._since = self.clock()

    def clear(self) -> None:
        """Nothing is asked."""
        self._since = None

    @property
    def is_over(self) -> bool:
        """Whether an answer counts.

        >>> seconds = iter([0.0, 0.69, 0.7])
        >>> asked = SettleTime(lambda: next(seconds))
        >>> asked.start()
        >>> asked.is_over, asked.is_over
        (False, True)
        """
        return self._since is None or self.clock() - self._since >= SETTLE_S
