"""The clock of a session: the real one, or a pretended one that is stated on the screen."""

from __future__ import annotations

import time
from dataclasses import dataclass

from core.record.instant import Instant

_NANOSECONDS_PER_MICROSECOND = 1000


@dataclass(frozen=True, slots=True)
class Clock:
    """Tells now. `pretended` is the moment it pretends, or None; `began` the real moment it began to run on
    from there, or None where it stands still (pictures)."""

    pretended: Instant | None = None
    began: Instant | None = None

    def now(self) -> Instant:
        """The moment the session takes for now.

        >>> Clock(pretended=5).now()
        5
        """
        if self.pretended is None:
            return real_now()
        return self.pretended if self.began is None else self.pretended + real_now() - self.began

    @property
    def is_running(self) -> bool:
        """Whether it moves on."""
        return self.pretended is None or self.began is not None


REAL = Clock()


def still(at: Instant) -> Clock:
    """A clock that stands at `at`."""
    return Clock(at)


def running_from(at: Instant) -> Clock:
    """A clock that shows `at` now and runs on from there."""
    return Clock(at, real_now())


def real_now() -> Instant:
    """The computer's clock, as an instant."""
    return time.time_ns() // _NANOSECONDS_PER_MICROSECOND
