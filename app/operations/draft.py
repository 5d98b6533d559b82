"""Operations on drafts: what is being typed and must outlive a crash (a handover remark, a log line)."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

from app.operations.outcome import Outcome
from core.record.instant import Instant

if TYPE_CHECKING:
    from storage.store import Store


@dataclass(frozen=True, slots=True)
class Draft:
    """A draft under its name; `text` None forgets it."""

    name: str
    text: str | None


def load(store: Store, who: str, now: Instant, request: None) -> Outcome[Mapping[str, str]]:
    """Every draft's text by name."""
    return Outcome(store.drafts(), store.head())


def keep(store: Store, who: str, now: Instant, request: Draft) -> Outcome[None]:
    """Keep a draft, or forget it."""
    store.put_draft(request.name, request.text, now)
    return Outcome(None, store.head())
