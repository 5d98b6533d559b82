"""Gases in a file whose values do not belong together: taken and marked, since nobody is there to ask."""

from __future__ import annotations

from collections.abc import Callable, Iterator, Sequence
from typing import TYPE_CHECKING

from core.record.channels import CHANNELS, Group
from core.record.entries import Action, Entry, NewEntry
from core.record.episode import Episode, build_episode
from core.record.instant import Instant
from core.record.knowledge import standing
from core.record.message import Message
from core.record.reading import Reading
from core.record.settings import SettingsInForce
from storage.store import Store

if TYPE_CHECKING:
    from core.judgement.policy import Policy


def gas_row_doubts(
    entries: Sequence[NewEntry], combined: Callable[[str], list[Entry]], existing: Store | None
) -> Iterator[tuple[int, Message]]:
    """The doubts that a file's gas rows raise, each with the index of a row to mark.

    `combined` gives an episode's whole record, the file's rows among it.
    """
    samples: dict[tuple[str, Instant], list[int]] = {}
    for i, e in enumerate(entries):
        known = CHANNELS.get(e.channel)
        if known is not None and known.group is Group.GAS and e.action is Action.ASSERT:
            samples.setdefault((e.episode, e.at), []).append(i)
    if not samples:
        return
    from core.judgement.entry_doubts import gas_doubts

    policy = _policy(existing)
    episodes: dict[str, tuple[Episode, SettingsInForce]] = {}
    for (key, at), rows in samples.items():
        if key not in episodes:
            episode = build_episode(key, standing(combined(key)))
            episodes[key] = (episode, SettingsInForce(episode))
        episode, settings = episodes[key]
        readings = [_reading(entries[i]) for i in rows]
        already = next((g for g in episode.gases if g.at == at), None)
        for message in gas_doubts(readings, settings.at(at), policy, already):
            for i in rows:
                yield i, message


def _policy(existing: Store | None) -> Policy:
    from core.judgement.policy import read_policy, shipped_policy

    stored = existing.policy() if existing is not None else None
    return shipped_policy() if stored is None else read_policy(stored[1])


def _reading(e: NewEntry) -> Reading:
    return Reading(CHANNELS[e.channel], e.number, e.words, e.raw, e.raw_unit, e.decimals)
