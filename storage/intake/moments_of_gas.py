"""The sample site of gases as files state it: one per moment, since values of one moment are one sample."""

from __future__ import annotations

from core.record.channels import CHANNELS, Group
from core.record.entries import NewEntry
from core.record.instant import Instant
from core.record.message import refuse
from storage.intake.result_versions import Result, ResultVersions, Standing, identity
from storage.intake.row_reading import EntryRow


class SampleSites:
    """Notes the site of each gas; `rows` gives the entries that keep them."""

    def __init__(self) -> None:
        self._sites: dict[tuple[str, Instant], tuple[str, Result | None]] = {}
        self._stated: set[tuple[str, Instant]] = set()

    def note(self, entry: NewEntry, site: str, line: int, issued: Instant | None) -> None:
        """Note what site a value was measured in; an empty site says nothing.

        Raises:
            RecordError: `gas.two_sites`, where values of one moment come from two sites.
        """
        key = (entry.episode, entry.at)
        if entry.channel == "site":
            self._stated.add(key)
        if CHANNELS[entry.channel].group is not Group.GAS or entry.channel == "site":
            return
        held, row = self._sites.get(key, ("", None))
        if held and site and held != site:
            raise refuse("gas.two_sites", channel=entry.channel, first=held, second=site,
                         accepted="one site per moment")  # fmt: skip
        if site and not held:
            new = NewEntry(entry.episode, "site", entry.at, words=site, raw=site, zone=entry.zone, by=entry.by)
            base = identity("site", entry.episode, str(entry.at), site)
            row = Result(line, base, ("site",), new, Standing.GIVEN, "", issued)
        self._sites[key] = (site or held, row)

    def rows(self, versions: ResultVersions) -> list[EntryRow]:
        """The entries of the sites that codes and specimens name, where no entry of the file states one."""
        named = [row for key, (_site, row) in self._sites.items() if row is not None and key not in self._stated]
        return [row for row in map(versions.add, named) if row is not None]
