"""Open episodes that a file would put under one label: two patients of one bed, told apart by their keys alone."""

from __future__ import annotations

from collections import Counter
from collections.abc import Callable, Iterable, Iterator, Sequence
from typing import TYPE_CHECKING

from core.record.entries import Action, Entry, NewEntry
from core.record.episode import build_episode
from core.record.instant import Instant
from core.record.knowledge import standing
from core.record.labels import alike
from core.record.message import Message
from core.record.settings import SettingsInForce
from core.record.support import support_time

if TYPE_CHECKING:
    from storage.store import Store


def shared_labels(
    entries: Sequence[NewEntry], combined: Callable[[str], list[Entry]], existing: Store | None
) -> Iterator[tuple[int, Message]]:
    """A doubt for each label of the file that another open episode bears, with the index of the label's row.

    Of two in one file the later row is told of; labels are compared without case and extra blanks. `combined` gives
    an episode's whole record, the file's rows among it.
    """
    rows = {e.episode: i for i, e in enumerate(entries) if e.channel == "label" and e.action is not Action.WITHDRAW}
    if not rows:
        return
    label_of = {key: alike(entries[i].words or "") for key, i in rows.items()}
    bears: dict[str, list[str]] = {}
    for key, label in _held(existing).items():
        if key not in rows:
            bears.setdefault(label, []).append(key)
    shared = {label for label, count in Counter(label_of.values()).items() if count > 1} | bears.keys()
    for key, i in sorted(rows.items(), key=lambda item: item[1]):
        if label_of[key] in shared and end_of_support(combined(key), key) is None:
            others = bears.setdefault(label_of[key], [])
            for other in others:
                yield i, Message("row.label_shared", {"label": entries[i].words, "episode": other})
            others.append(key)


def _held(existing: Store | None) -> dict[str, str]:
    """The labels of the store's open episodes, as people compare them."""
    return dict(labels_of_open(existing))


def labels_of_open(existing: Store | None) -> Iterator[tuple[str, str]]:
    """Each label that an open episode of the store bears or bore, as people compare them: (key, label), in order."""
    if existing is None:
        return
    still_open = set(existing.open_episode_keys())
    yield from ((key, alike(words)) for key, words in existing.texts_of("label") if key in still_open)


def end_of_support(entries: Iterable[Entry], key: str) -> Instant | None:
    """When the support of an episode ended, by its entries; None where it goes on."""
    record = build_episode(key, standing(entries))
    return support_time(record, SettingsInForce(record)).end
