"""What a ward has said of its senders' own codes: kept once, and used for every file of results after that.

They are kept as a mapping of a fixed name, so that they are listed, shown and forgotten as any other.
"""

from __future__ import annotations

from collections.abc import Mapping as Map
from dataclasses import replace

from core.record.channels import CHANNELS
from core.record.message import refuse
from storage.intake.mapping import Layouts, Mapping, keep_mapping, kept_mappings

NAME = "codes of results"


def kept_codes(store: Layouts) -> dict[str, str]:
    """Channels by code ('system|code' or 'code'); an empty channel says that a code is not wanted."""
    found = kept_mappings(store).get(NAME)
    return dict(found.codes) if found is not None else {}


def keep_codes(store: Layouts, codes: Map[str, str]) -> dict[str, str]:
    """Keep what was said of some codes beside what was said of others before; all that is kept now.

    Raises:
        RecordError: `channel.unknown` where one is no channel.
    """
    for channel in codes.values():
        if channel and channel not in CHANNELS:
            raise refuse("mapping.channel_unknown", column=NAME, channel=channel[:80])
    found = kept_mappings(store).get(NAME, Mapping(NAME))
    together = {**found.codes, **codes}
    keep_mapping(store, replace(found, codes=together))
    return together
