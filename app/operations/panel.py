"""Operations on kept layouts: panels, their sets, the window's own. They live outside the ledger."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from typing import TYPE_CHECKING

from app.operations.outcome import Outcome
from core.record.instant import Instant

if TYPE_CHECKING:
    from storage.store import Store


@dataclass(frozen=True, slots=True)
class Layout:
    """A layout under its name; `text` None forgets it."""

    name: str
    text: str | None


def load(store: Store, who: str, now: Instant, request: None) -> Outcome[Mapping[str, str]]:
    """Every layout's text by name."""
    return Outcome(store.layouts(), store.head())


def keep(store: Store, who: str, now: Instant, request: Layout) -> Outcome[Layout]:
    """Keep a layout, or forget it; the value is what stood there before, which undoes it."""
    before = Layout(request.name, store.layout(request.name))
    store.put_layout(request.name, request.text)
    return Outcome(before, store.head())
