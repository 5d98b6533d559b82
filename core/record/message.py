"""A sentence before it has words: a key with named values. `app.words` turns it into language."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field
from types import MappingProxyType

Value = str | float | int | bool | None


@dataclass(frozen=True, slots=True)
class Message:
    """A message key and the values its sentence needs.

    >>> Message("gas.fio2_unknown", {"at": 3}).values["at"]
    3
    """

    key: str
    values: Mapping[str, Value] = field(default_factory=lambda: MappingProxyType({}))

    def __hash__(self) -> int:
        return hash((self.key, tuple(sorted((k, str(v)) for k, v in self.values.items()))))


class RecordError(ValueError):
    """Refused input. Carries the message that says what failed, which value, what is accepted."""

    def __init__(self, message: Message) -> None:
        super().__init__(f"{message.key} {dict(message.values)}")
        self.message = message


def refuse(key: str, **values: Value) -> RecordError:
    """The error to raise for a refused value.

    >>> refuse("unit.unknown", unit="psi").message.key
    'unit.unknown'
    """
    return RecordError(Message(key, values))
