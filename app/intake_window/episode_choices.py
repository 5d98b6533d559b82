"""The episodes a person may say that values are of: chosen by what the ward calls them, or typed by their key."""

from __future__ import annotations

from collections.abc import Mapping

from PySide6.QtWidgets import QComboBox


def choices(labels: Mapping[str, str]) -> list[tuple[str, str]]:
    """What is shown of each episode, with its key; `labels` are what the ward calls them, by key.

    >>> choices({"T-01": "Bed 21", "bed-7": "bed-7"})
    [('Bed 21 (T-01)', 'T-01'), ('bed-7', 'bed-7')]
    """
    return [(key if label == key else f"{label} ({key})", key) for key, label in labels.items()]


def chosen_or_typed(box: QComboBox) -> str:
    """The key that is chosen, or what was typed into a box that takes text.

    Typing what the ward calls one episode means that one; where two are called so, it says nothing.
    """
    if not box.isEditable() or box.currentText() == box.itemText(box.currentIndex()):
        return str(box.currentData() or "")
    typed = box.currentText().strip()
    called = typed.casefold()
    texts = [(box.itemText(i).casefold(), str(box.itemData(i) or "")) for i in range(box.count())]
    meant = {
        key for text, key in texts if called and (called in (text, key.casefold()) or text.startswith(f"{called} ("))
    }
    return typed if not meant else meant.pop() if len(meant) == 1 else ""
