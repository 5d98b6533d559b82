"""Operations on files taken in: what a file would bring, and taking it, whole or not at all."""

from __future__ import annotations

from dataclasses import dataclass
from pathlib import Path
from typing import TYPE_CHECKING

from app.operations.outcome import Outcome, report
from core.record.instant import Instant

if TYPE_CHECKING:
    from storage.intake.findings import Intake
    from storage.store import Store


@dataclass(frozen=True, slots=True)
class TakeRequest:
    """A file that was read. `without_refused`: a person decided to leave the refused rows out."""

    intake: Intake
    without_refused: bool = False


@dataclass(frozen=True, slots=True)
class Taken:
    """What a file brought. `entries` and `samples` are counts; `repeated` were in the store already."""

    path: str
    entries: int
    samples: int
    repeated: int
    doubtful: int
    left_out: int
    episodes: tuple[str, ...]


def read(store: Store, who: str, now: Instant, request: Path) -> Outcome[Intake]:
    """Read a log file against the clock and the store. Nothing is written; refusals are in the result.

    Raises:
        OSError: the file cannot be read.
    """
    from storage.intake.log_csv import read_log_csv

    return Outcome(read_log_csv(request, now=now, existing=store, progress=report), store.head())


def take(store: Store, who: str, now: Instant, request: TakeRequest) -> Outcome[Taken]:
    """Take a read file into the store.

    Raises:
        RecordError: `intake.refused` when rows are refused; the store is untouched.
    """
    from storage.intake.batch import take_in

    intake = request.intake
    receipt = take_in(store, intake, by=who, now=now, without_refused=request.without_refused)
    taken = Taken(
        intake.source.name, len(intake.entries), intake.sample_count, intake.repeated_in_store,
        len(intake.doubts), intake.refused_rows if request.without_refused else 0, intake.episodes,
    )  # fmt: skip
    return Outcome(taken, receipt.last_seq if receipt else store.head())
