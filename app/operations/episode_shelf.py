"""Episodes that were built already, and the early stages of their figures, kept while nothing new was recorded."""

from __future__ import annotations

from collections import OrderedDict
from typing import TYPE_CHECKING

from core.figures.stage_cache import StageCache
from core.record.episode import Episode
from storage.errors import StoreError

if TYPE_CHECKING:
    from storage.store import Store

OF_ONE_EPISODE = frozenset({"store.episode_not_as_written", "store.damaged_chunk"})
"""Damage that is found in the record of one episode and says nothing of others."""
_MOST = 200
"""Some 0.5 MB each for three days of one-minute device data."""


class EpisodeShelf:
    """The episodes of one store by key, as known at its head."""

    def __init__(self) -> None:
        self._head = -1
        self._kept: OrderedDict[str, Episode] = OrderedDict()
        self.stages = StageCache(_MOST)
        """For `episode_figures` of the episodes that this shelf gives."""

    def get(self, store: Store, key: str) -> Episode:
        """The episode as the store holds it now; built anew only when it changed."""
        self._forget_changed(store)
        found = self._kept.get(key)
        if found is None:
            found = store.episode(key, self._head)
            self._kept[key] = found
            if len(self._kept) > _MOST:
                self._kept.popitem(last=False)
        self._kept.move_to_end(key)
        return found

    def get_if_sound(self, store: Store, key: str) -> Episode | None:
        """The same; None where what a damaged store keeps of this one episode is not what was written.

        Raises:
            StoreError: damage that is not of one episode alone.
        """
        try:
            return self.get(store, key)
        except StoreError as error:
            if error.message.key not in OF_ONE_EPISODE:
                raise
            return None

    def _forget_changed(self, store: Store) -> None:
        if self._head < 0:
            self._head = store.head()
            return
        news = store.changes_since(self._head)
        if news.erased:
            self._kept.clear()
        for key in news.episodes:
            self._kept.pop(key, None)
        self._head = news.head


_shelves: OrderedDict[tuple[str, str], EpisodeShelf] = OrderedDict()
_MOST_STORES = 2


def shelf_of(store: Store) -> EpisodeShelf:
    """The shelf of a store; those of stores opened before are let go."""
    name = (store.store_id, str(store.path))
    shelf = _shelves.setdefault(name, EpisodeShelf())
    _shelves.move_to_end(name)
    if len(_shelves) > _MOST_STORES:
        _shelves.popitem(last=False)
    return shelf
