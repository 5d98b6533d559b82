"""What the readers of results share: versions, sites, patients, and the intake they end with."""

from __future__ import annotations

from collections.abc import Iterable
from dataclasses import replace

from core.record.instant import Instant
from core.record.message import Message, RecordError
from storage.draft_batch import SourceFacts
from storage.intake.findings import Findings, Intake, check_entry_count
from storage.intake.judged import judged_intake
from storage.intake.moments_of_gas import SampleSites
from storage.intake.patients import Patients
from storage.intake.result_versions import Result, ResultVersions
from storage.intake.row_reading import EntryRow
from storage.intake.said import Aside, Said
from storage.intake.sample_spool import SampleSpool
from storage.store import Store


class ResultsIntake:
    """Gathers the results of one file."""

    def __init__(self, said: Said, now: Instant, existing: Store | None) -> None:
        self.findings, self.aside, self.spool = Findings(), Aside(), SampleSpool()
        self.patients = Patients(existing, said.episodes, now)
        self._existing = existing
        self._versions, self._sites = ResultVersions(existing), SampleSites()
        self._made: list[EntryRow] = []

    def take(self, results: Iterable[tuple[Result, str]], column: str) -> None:
        """Take results, each with the sample site it names; `column` is where a site stands."""
        for result, site in results:
            try:
                self._sites.note(result.entry, site, result.line, result.issued)
            except RecordError as error:
                self.findings.refuse(result.line, column, site, error.message)
                continue
            row = self._versions.add(result)
            if row is not None:
                self._made.append(row)
                check_entry_count(self._made, result.line)

    def finished(self, source: SourceFacts, by: str, column: str, *, whole: bool = True) -> Intake:
        """The intake; `column` is where a result's status stands."""
        for gone in self._versions.nothing_to_withdraw:
            message = Message("result.nothing_to_withdraw", {"channel": gone.entry.channel, "status": gone.why})
            self.aside.put(gone.line, column, gone.why, message)
        made = [*self._sites.rows(self._versions), *self.patients.confirmations(by), *self._made]
        intake = judged_intake(
            source, made, self.spool, self.findings, self._existing, whole=whole,
            repeated=self._versions.repeated, aside=self.aside.listed, aside_count=self.aside.count,
        )  # fmt: skip
        codes = tuple(self.aside.codes.values())
        return replace(intake, unknown_patients=tuple(self.patients.unknown), unknown_codes=codes)
