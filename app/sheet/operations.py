"""Operations that print a handover: gathered, laid out, written or kept; each page is told and can be the last."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from app.operations import handover
from app.operations.handover import ClosedHandover, HandoverRequest
from app.operations.outcome import Outcome
from core.record.instant import Instant

if TYPE_CHECKING:
    from app.words import Reader
    from storage.store import Store


@dataclass(frozen=True, slots=True)
class SheetRequest:
    """A shift on paper, for a reader, to be written to a file."""

    shift: HandoverRequest
    reader: Reader
    path: Path
    paper: str = "A4"
    given_by: str = ""


@dataclass(frozen=True, slots=True)
class CloseRequest:
    """A shift on paper, to be kept as it is printed now."""

    shift: HandoverRequest
    reader: Reader
    given_by: str
    taken_by: str
    paper: str = "A4"


def write(store: Store, who: str, now: Instant, request: SheetRequest) -> Outcome[int]:
    """Write the sheet of a shift, and keep in the chain that it was printed; the number of its pages.

    Raises:
        RecordError: as `handover.prepare`; `handover.paper`.
        OSError: the file cannot be written; what was there before stays.
    """
    from app.sheet.content import sheet_content
    from app.sheet.printing import write_pdf

    gathered = handover.prepare(store, who, now, request.shift).value
    content = sheet_content(gathered, request.reader, given_by=request.given_by)
    pages = write_pdf(content, request.path, request.paper)
    handover.note_print(store, who, now, f"{content.ward.shift}, {content.head}")
    return Outcome(pages, store.head())


def close(store: Store, who: str, now: Instant, request: CloseRequest) -> Outcome[str]:
    """Print a shift and keep the print in the ledger; its document's id.

    Raises:
        RecordError: as `handover.prepare`; `handover.paper`.
    """
    from app.sheet.content import sheet_content
    from app.sheet.printing import pdf_bytes

    gathered = handover.prepare(store, who, now, request.shift).value
    content = sheet_content(gathered, request.reader, given_by=request.given_by, taken_by=request.taken_by)
    data, _ = pdf_bytes(content, request.paper)
    name = handover.closed_name(content.ward.shift, request.given_by, request.taken_by)
    return handover.close(store, who, now, ClosedHandover(name, data, handover.facts_of(gathered)))
