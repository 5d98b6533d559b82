"""What can be done when a store cannot be opened or read: each trouble with the steps that lead out of it."""

from __future__ import annotations

from enum import StrEnum
from typing import Final

from PySide6.QtCore import QCoreApplication


class Step(StrEnum):
    """One way on."""

    RESTORE = "restore"
    SALVAGE = "salvage"
    KEY_FILE = "key_file"
    AGAIN = "again"
    OPEN = "open_other"
    NEW = "new"


_DAMAGE: Final = (Step.RESTORE, Step.SALVAGE)
_STEPS: Final[dict[str, tuple[Step, ...]]] = {
    "store.damaged": _DAMAGE,
    "store.damaged_chunk": _DAMAGE,
    "store.episode_not_as_written": _DAMAGE,
    "store.not_as_written": _DAMAGE,
    "store.disk_error": (Step.AGAIN, *_DAMAGE),
    "key.envelope_altered": (Step.KEY_FILE, Step.RESTORE),
    "key.envelope_missing": (Step.KEY_FILE, Step.RESTORE),
    "key.envelope_newer": (Step.OPEN,),
    "store.missing": (Step.OPEN, Step.RESTORE),
    "store.file_gone": (Step.AGAIN, Step.RESTORE),
    "store.cannot_open": (Step.AGAIN, Step.OPEN),
    "store.busy": (Step.AGAIN,),
    "store.disk_full": (Step.AGAIN,),
    "store.network_share": (Step.NEW, Step.OPEN),
    "store.not_a_store": (Step.OPEN, Step.RESTORE),
    "store.newer": (Step.OPEN, Step.NEW),
    "store.older": (Step.OPEN, Step.NEW),
}
DAMAGE: Final = frozenset(key for key, steps in _STEPS.items() if Step.SALVAGE in steps)
"""Troubles that a damaged file makes, whenever they are met."""
STANDING: Final = DAMAGE | {"store.file_gone"}
"""Troubles that stay until something is done: they are said for as long as the store is open."""


def steps_out_of(key: str) -> tuple[Step, ...]:
    """What leads on from a trouble, the best first; empty where words are enough.

    >>> steps_out_of("store.damaged")[0].value
    'restore'
    """
    return _STEPS.get(key, ())


def word_of(step: Step) -> str:
    """What its button says."""
    words = {
        Step.RESTORE: _t("Restore a backup..."),
        Step.SALVAGE: _t("Save what can be read..."),
        Step.KEY_FILE: _t("Put back a backup's key file..."),
        Step.AGAIN: _t("Try again"),
        Step.OPEN: _t("Open another store..."),
        Step.NEW: _t("New store..."),
    }
    return words[step]


def _t(text: str) -> str:
    return QCoreApplication.translate("step", text)
