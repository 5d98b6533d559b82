"""Two patients under one bed: asked about before the second is recorded, for an entry could go to the wrong one."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from app.operations.episode_shelf import shelf_of
from core.record.labels import alike
from core.record.message import Message
from core.record.reading import Reading

if TYPE_CHECKING:
    from storage.store import Store


def label_questions(store: Store, key: str, readings: Sequence[Reading]) -> tuple[Message, ...]:
    """A question for each open episode that bears a label given here, compared without case and extra blanks."""
    given = {alike(r.words) for r in readings if r.channel.key == "label" and r.words}
    if not given:
        return ()
    shelf = shelf_of(store)
    others = (shelf.get_if_sound(store, k) for k in store.open_episode_keys() if k != key)
    taken = [o for o in others if o is not None and o.standing and alike(o.label) in given]
    return tuple(
        Message("doubt.label_in_use", {"label": o.label, "episode": o.key, "since": o.first_at}) for o in taken
    )
