"""Operations on due items: a person's word that one is done, or not needed here."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from app.operations.episode import load
from app.operations.outcome import Outcome
from app.operations.policy import in_force
from app.operations.recording import Recorded
from core.figures.episode_figures import episode_figures
from core.record.entries import Action, NewEntry
from core.record.instant import Instant
from core.record.message import refuse

if TYPE_CHECKING:
    from storage.store import Store

DONE, NOT_NEEDED = "done", "not needed"


@dataclass(frozen=True, slots=True)
class DueRequest:
    """A due item of an episode by its key. `reason` is needed where it is not needed."""

    episode: str
    what: str
    words: str = DONE
    reason: str = ""


def close(store: Store, who: str, now: Instant, request: DueRequest) -> Outcome[Recorded]:
    """Close a due item that is open, soon, overdue or awaiting its result. The word is an entry.

    Raises:
        RecordError: `episode.unknown`, `due_word.not_due`, `due_word.no_reason`.
    """
    record = load(store, request.episode)
    figures = episode_figures(record, now, in_force(store))
    known = sorted({d.what for d in figures.due if d.state != "done"})
    if request.what not in known:
        raise refuse("due_word.not_due", due=request.what, episode=request.episode,
                     accepted=", ".join(known) or "nothing is due")  # fmt: skip
    if request.words == NOT_NEEDED and not request.reason.strip():
        raise refuse("due_word.no_reason", due=request.what, accepted="a few words")
    words = NOT_NEEDED if request.words == NOT_NEEDED else DONE
    said = NewEntry(request.episode, request.what, now, words=words, by=who, action=Action.DUE,
                    reason=request.reason.strip())  # fmt: skip
    receipt = store.append((said,), by=who, operation="due.close", now=now)
    return Outcome(Recorded(request.episode, receipt.ids[-1:], (said,)), receipt.last_seq)
