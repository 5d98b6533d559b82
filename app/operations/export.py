"""Operations that write what the store holds into files: for intake elsewhere, for a spreadsheet, for others."""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass, replace
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import TYPE_CHECKING

from app.operations.episode import check_known
from app.operations.outcome import Outcome
from core.record.channels import channel
from core.record.instant import Instant
from core.record.message import refuse

if TYPE_CHECKING:
    from storage.export.deidentified import Statement
    from storage.export.selection import Selection
    from storage.store import Store


@dataclass(frozen=True, slots=True)
class ExportRequest:
    """Where to and what: episodes and channels (empty: all), a span (None: open), as known at a moment (None: all).

    `dictionary`: the data dictionary goes beside it, into `FILE.dictionary.csv`. `replace`: over what is there.
    """

    path: Path
    episodes: tuple[str, ...] = ()
    as_known_at: Instant | None = None
    channels: tuple[str, ...] = ()
    start: Instant | None = None
    end: Instant | None = None
    dictionary: bool = False
    replace: bool = False

    @property
    def dictionary_path(self) -> Path:
        """Where the data dictionary goes."""
        return self.path.with_name(f"{self.path.stem}.dictionary.csv")

    @property
    def about_path(self) -> Path:
        """Where a de-identified export says what it is."""
        return self.path.with_name(f"{self.path.stem}.about.txt")


def write(store: Store, who: str, now: Instant, request: ExportRequest) -> Outcome[int]:
    """Write a log file (CSV) of what stands; the number of its rows.

    Raises:
        RecordError: `episode.unknown`, `channel.unknown`, `export.backwards`, `file.exists`.
        StoreError: `store.export_failed`.
    """
    from storage.export.selection import write_selection

    selection, head = _selection(store, request), _head(store, request)
    with _together(request) as placed:
        rows = write_selection(store, placed.path, selection, head)
        _write_dictionary(placed)
    _note(store, who, now, f"{request.path.name}: {rows} rows")
    return Outcome(rows, store.head())


def write_fhir(store: Store, who: str, now: Instant, request: ExportRequest) -> Outcome[int]:
    """Write whole episodes as one FHIR R4 Bundle of what stands; the number of its observations.

    Raises:
        RecordError: `episode.unknown`, `file.exists`.
        StoreError: `store.export_failed`.
    """
    from storage.export.fhir import write_fhir

    selection, head = _selection(store, request), _head(store, request)
    with _together(request) as placed:
        count = write_fhir(store, placed.path, episodes=selection.episodes or None, head=head)
    _note(store, who, now, f"{request.path.name}: {count} observations")
    return Outcome(count, store.head())


def write_deidentified(store: Store, who: str, now: Instant, request: ExportRequest) -> Outcome[Statement]:
    """Write what stands de-identified, and beside it in words what was left out and what remains.

    Raises:
        RecordError: `episode.unknown`, `channel.unknown`, `export.backwards`, `file.exists`.
        StoreError: `store.export_failed`.
    """
    from app.telling.export_words import statement_text
    from storage.export import deidentified
    from storage.export.whole_file import whole_file

    selection, head = _selection(store, request), _head(store, request)
    with _together(request) as placed:
        told = deidentified.write_deidentified(store, placed.path, selection, head)
        with whole_file(placed.about_path) as file:
            file.write(statement_text(told))
        _write_dictionary(placed)
    _note(store, who, now, f"{request.path.name}: {told.rows} rows, de-identified")
    return Outcome(told, store.head())


@contextmanager
def _together(request: ExportRequest) -> Iterator[ExportRequest]:
    """The request with its files in a folder of their own, from which all of them go into place, or none does.

    Raises:
        RecordError: `file.exists`, unless the request replaces.
        OSError: the folder cannot be written to.
    """
    target = request.path
    for path in (target, request.about_path, request.dictionary_path):
        if path.exists() and not request.replace:
            raise refuse("file.exists", path=str(path))
    try:
        with TemporaryDirectory(prefix=".unfinished-", dir=target.parent) as folder:
            yield replace(request, path=Path(folder) / target.name)
            for made in Path(folder).iterdir():
                made.replace(target.with_name(made.name))
    except OSError as error:
        raise type(error)(error.errno, error.strerror, str(target)) from error


def _selection(store: Store, request: ExportRequest) -> Selection:
    from storage.export.selection import Selection

    for key in request.episodes:
        check_known(store, key)
    for name in request.channels:
        channel(name)
    if request.start is not None and request.end is not None and request.end <= request.start:
        raise refuse("export.backwards", start=request.start, end=request.end)
    return Selection(request.episodes, frozenset(request.channels), request.start, request.end)


def _head(store: Store, request: ExportRequest) -> int | None:
    return None if request.as_known_at is None else store.head_known_at(request.as_known_at)


def _write_dictionary(request: ExportRequest) -> None:
    if request.dictionary:
        from storage.export.selection import write_dictionary

        write_dictionary(request.dictionary_path, request.channels)


def _note(store: Store, who: str, now: Instant, detail: str) -> None:
    """An export is kept in the chain, where the store can be written to."""
    if not store.read_only:
        store.record_event("export", person=who, now=now, detail=detail)
