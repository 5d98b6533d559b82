"""Operations on files taken in: what a file would bring, taking it whole or not at all, withdrawing it whole."""

from __future__ import annotations

from collections.abc import Mapping as Map
from dataclasses import dataclass, field, replace
from pathlib import Path
from typing import TYPE_CHECKING

from app.operations.outcome import Outcome, report
from core.record.instant import Instant
from core.record.message import refuse
from storage.intake.writing import AS_FOUND, Writing

if TYPE_CHECKING:
    from storage.intake.findings import Intake
    from storage.intake.mapping import Mapping
    from storage.intake.recognising import Recognised
    from storage.intake.withdrawal import Withdrawn
    from storage.reading_sources import TakenSource
    from storage.store import Store


@dataclass(frozen=True, slots=True)
class ReadRequest:
    """A file with what a person says of it.

    `mapping` is how a table is read (`mapping_name`: one that is kept; neither: one recognised by its header).
    `episode` is whose the file is, where it does not say; `patients` gives single identifiers their episode, and
    what a table's own column calls a bed.
    `zone` is for times without an offset; `clock_shift_s` is added to a device's times. `said` is how a table is
    written; what it leaves open the mapping says, and then what is found. `episodes`, by key what the
    ward calls them, are offered to a person who has to say whose an identifier is.
    """

    path: Path
    mapping: Mapping | None = None
    mapping_name: str = ""
    episode: str = ""
    patients: Map[str, str] = field(default_factory=dict)
    zone: str = ""
    clock_shift_s: float = 0.0
    leak_definition: str = ""
    said: Writing = AS_FOUND
    episodes: Map[str, str] = field(default_factory=dict)


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
    aside: int = 0
    source_id: str = ""
    new_episodes: tuple[str, ...] = ()
    overlaid: int = 0
    """Device samples of earlier files that lie under it now."""


def read(store: Store, who: str, now: Instant, request: Path | ReadRequest) -> Outcome[Intake]:
    """Read a file of any kind against the clock and the store. Nothing is written; refusals are in the result.

    Raises:
        RecordError: `mapping.*` where a table is not mapped to the end; `intake.episode_not_asked`.
        OSError: the file cannot be read.
    """
    wanted = ReadRequest(request) if isinstance(request, Path) else request
    head = store.head()
    return Outcome(replace(_read(store, now, wanted), head=head), head)


def _read(store: Store, now: Instant, wanted: ReadRequest) -> Intake:
    from storage.intake.file_kinds import FileKind, kind_of

    kind = kind_of(wanted.path)
    if kind is FileKind.LOG_CSV and wanted.mapping is None and not wanted.mapping_name:
        from storage.intake.log_csv import read_log_csv

        if wanted.episode:
            raise refuse("intake.episode_not_asked", value=wanted.episode, accepted="a log file without --episode")
        return read_log_csv(wanted.path, now=now, existing=store, progress=report)
    if kind in (FileKind.LOG_CSV, FileKind.TABLE):
        return _read_table(store, now, wanted)
    return _read_results(store, now, wanted, is_hl7=kind is FileKind.HL7V2)


def _read_table(store: Store, now: Instant, wanted: ReadRequest) -> Intake:
    from storage.intake.findings import UnreadableFileError
    from storage.intake.table_reading import read_table, unreadable_table
    from storage.intake.table_rows import Answers

    try:
        found = _table(store, wanted)
    except UnreadableFileError as error:
        return unreadable_table(wanted.path, error)
    table, mapping = found.table, found.mapping
    if mapping is None and found.several:
        raise refuse("mapping.several_fit", path=wanted.path.name, names=" | ".join(found.several)[:300],
                     accepted="one of them, named by --mapping")  # fmt: skip
    if mapping is None:
        raise refuse("mapping.none_fits", path=wanted.path.name, columns=" | ".join(table.header)[:300],
                     accepted="a mapping, by name, or made in the window or by luffmark mapping propose")  # fmt: skip
    if wanted.leak_definition:
        mapping = replace(mapping, leak_definition=wanted.leak_definition)
    if wanted.zone and not mapping.time.zone:
        mapping = replace(mapping, time=replace(mapping.time, zone=wanted.zone))
    answers = Answers(wanted.episode, wanted.clock_shift_s, wanted.patients)
    return read_table(table, mapping, now=now, answers=answers, existing=store, progress=report)


def _table(store: Store, wanted: ReadRequest) -> Recognised:
    """The table as it is written, with the mapping given, named or recognised."""
    from storage.intake.mapping import kept_mapping, kept_mappings
    from storage.intake.recognising import Recognised, recognise
    from storage.intake.table import open_table

    mapping = wanted.mapping
    if mapping is None and wanted.mapping_name:
        mapping = kept_mapping(store, wanted.mapping_name)
    if mapping is None:
        return recognise(wanted.path, kept_mappings(store), wanted.said)
    said = wanted.said.over(mapping.written)
    return Recognised(open_table(wanted.path, said), said, mapping)


def _read_results(store: Store, now: Instant, wanted: ReadRequest, *, is_hl7: bool) -> Intake:
    from storage.intake.kept_codes import kept_codes
    from storage.intake.mapping import kept_mapping
    from storage.intake.said import Said

    episodes = dict(wanted.patients) | ({"*": wanted.episode} if wanted.episode else {})
    codes = kept_codes(store)
    if wanted.mapping_name:
        codes |= kept_mapping(store, wanted.mapping_name).codes
    if wanted.mapping is not None:
        codes |= wanted.mapping.codes
    said = Said(wanted.zone, episodes, codes)
    if is_hl7:
        from storage.intake.hl7v2 import read_hl7

        return read_hl7(wanted.path, now=now, said=said, existing=store, progress=report)
    from storage.intake.fhir import read_fhir

    return read_fhir(wanted.path, now=now, said=said, existing=store, progress=report)


def take(store: Store, who: str, now: Instant, request: TakeRequest) -> Outcome[Taken]:
    """Take a read file into the store.

    Raises:
        RecordError: `intake.refused` when rows are refused; `intake.overtaken` when something was recorded of its
            episodes since it was read, so that it has to be read again. The store is untouched.
    """
    from storage.intake.batch import take_in

    intake = request.intake
    report(0, 0)
    receipt = take_in(store, intake, by=who, now=now, without_refused=request.without_refused, progress=report)
    taken = Taken(
        intake.source.name,
        len(intake.entries),
        intake.sample_count,
        intake.repeated_in_store,
        len(intake.doubts),
        intake.refused_rows if request.without_refused else 0,
        intake.episodes,
        intake.aside_count,
        intake.source.id if receipt else "",
        intake.new_episodes,
        intake.overlaid,
    )
    return Outcome(taken, receipt.last_seq if receipt else store.head())


def taken(store: Store, who: str, now: Instant, request: None) -> Outcome[tuple[TakenSource, ...]]:
    """The files that were taken in, in order, with what each brought."""
    return Outcome(tuple(s for s in store.sources() if s.kind != "stream"), store.head())


def origins(store: Store, who: str, now: Instant, request: str) -> Outcome[dict[str, str]]:
    """The files that an episode's entries came from, by the entry's id; what was typed is left out."""
    return Outcome(store.origins(request), store.head())


def withdraw(store: Store, who: str, now: Instant, request: str) -> Outcome[Withdrawn]:
    """Withdraw all that a file brought, by the id of its source; what lay under its samples comes back.

    Raises:
        RecordError: `intake.unknown_source`, `intake.withdrawn_already`.
    """
    from storage.intake.withdrawal import withdraw_source

    made = withdraw_source(store, request, by=who, now=now)
    return Outcome(made, made.receipt.last_seq)
