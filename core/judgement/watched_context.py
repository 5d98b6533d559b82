"""A context that notes whether what moves with the clock was read in it.

What was found in a record without reading any of that stands for every later moment, until something is logged or a
window turns: nothing else can change it. So it may be kept, and nobody has to declare it, or to be right about it.
"""

from __future__ import annotations

from dataclasses import fields
from typing import Any, Final

from core.judgement.context import Context

MOVING: Final = ("as_of", "pf", "sf", "rox", "leak", "scores")
"""The fields that are made anew at every moment; the others stand with the record (`stands_with`)."""


def _noted(name: str) -> Any:
    def read(self: WatchedContext) -> Any:
        self.__dict__["moved"] = True
        return self.__dict__[name]

    return property(read)


class WatchedContext(Context):
    """A context whose `moved` turns True when a moving field is read. Made by `watched`; `replace` cannot copy it."""

    moved: bool


for _name in MOVING:
    setattr(WatchedContext, _name, _noted(_name))


def watched(ctx: Context) -> WatchedContext:
    """The same context, watched."""
    made = object.__new__(WatchedContext)
    made.__dict__.update(ctx.__dict__)
    made.__dict__["moved"] = False
    return made


_STANDING: Final = tuple(f.name for f in fields(Context) if f.name not in MOVING)


def stands_with(later: Context, earlier: Context) -> bool:
    """Whether two contexts share everything that does not move: the very same objects."""
    return all(getattr(later, name) is getattr(earlier, name) for name in _STANDING)
