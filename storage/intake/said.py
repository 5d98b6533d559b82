"""What a person says of a file of results, and what is set aside of it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType

from core.record.message import Message
from storage.intake.findings import MAX_LISTED, Refusal, UnknownCode

_MOST_CODES = 1_000


@dataclass(frozen=True, slots=True)
class Said:
    """What a person said of a file of results.

    `zone` for times without an offset; `episodes` by identifier ('*' for every patient of the file); `codes`
    gives local codes a channel, or an empty text where a code is not wanted.
    """

    zone: str = ""
    episodes: Mapping[str, str] = field(default_factory=lambda: MappingProxyType({}))
    codes: Mapping[str, str] = field(default_factory=lambda: MappingProxyType({}))


@dataclass(slots=True)
class Aside:
    """What is not for this record, with its reasons; listed up to a limit, counted beyond it."""

    listed: list[Refusal] = field(default_factory=list)
    count: int = 0
    codes: dict[str, UnknownCode] = field(default_factory=dict)

    def note_code(self, key: str, name: str, example: str, unit: str) -> None:
        """Note a code that nobody has said anything of."""
        if key and key not in self.codes and len(self.codes) < _MOST_CODES:
            self.codes[key] = UnknownCode(key, name[:80], example[:40], unit[:20])
        if key in self.codes:
            self.codes[key].count += 1

    def put(self, line: int, column: str, value: str, message: Message) -> None:
        """Note one."""
        self.count += 1
        if len(self.listed) < MAX_LISTED:
            self.listed.append(Refusal(line, column, value[:200], message))
