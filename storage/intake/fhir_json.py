"""Reads JSON of FHIR with numbers as they are written, in bounded memory and depth."""

from __future__ import annotations

import json
from collections.abc import Iterator
from pathlib import Path
from typing import Any, NoReturn

from storage.intake.findings import UnreadableFileError, unreadable
from storage.intake.steady_file import read_bounded

MOST = 32 << 20
MOST_WEIGHT = 280 << 20
"""Bytes of memory that a file may take when it is read; 32 MB of observations take about 230 MB."""
Json = dict[str, Any]


class Number(str):
    """A number as it was written: 7.40 stays 7.40."""

    __slots__ = ()


def read_resources(path: Path) -> tuple[list[Json], str, int]:
    """The resources of a file (one, or one a line in `.ndjson`), the file's SHA-256 and size.

    Raises:
        UnreadableFileError: too large, no UTF-8, no JSON, too deep, a key that stands twice, a file that changed.
        OSError: it cannot be read.
    """
    data, sha = read_bounded(path, MOST)
    if _weight(data) > MOST_WEIGHT:
        raise unreadable(0, path.name, "json.too_many_values", accepted=MOST_WEIGHT >> 20)
    try:
        text = data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = data.count(b"\n", 0, error.start) + 1
        shown = f"byte {data[error.start : error.start + 1].hex()}"
        raise unreadable(line, shown, "file.encoding", found="not UTF-8", accepted="UTF-8") from None
    if path.suffix.lower() == ".ndjson":
        found = [_parsed(line, n) for n, line in enumerate(text.splitlines(), 1) if line.strip()]
    else:
        found = [_parsed(text, 1)]
    for resource in found:
        if not isinstance(resource, dict) or not isinstance(resource.get("resourceType"), str):
            raise unreadable(1, "", "fhir.no_resource", accepted="a FHIR R4 resource in JSON")
    return found, sha, len(data)


def _weight(data: bytes) -> int:
    """The bytes of memory that a text of JSON takes at most when it is read: a million `[]` fit into 3 MB."""
    objects, others = data.count(b"{"), data.count(b"[") + data.count(b",")
    return 240 * objects + 60 * others + 2 * len(data)


def _parsed(text: str, line: int) -> Any:
    try:
        return json.loads(text, parse_float=Number, parse_int=Number, parse_constant=_no_constant,
                          object_pairs_hook=_object)  # fmt: skip
    except RecursionError:
        raise unreadable(line, "", "json.too_deep", accepted="FHIR R4 in JSON") from None
    except _WrongJsonError as error:
        raise unreadable(line, error.shown, error.key, accepted="JSON as RFC 8259 has it") from None
    except json.JSONDecodeError as error:
        where = line + error.lineno - 1
        shown = text[error.pos : error.pos + 40]
        raise unreadable(where, shown, "json.unreadable", detail=error.msg, accepted="JSON") from None


class _WrongJsonError(Exception):
    def __init__(self, key: str, shown: str) -> None:
        super().__init__(key)
        self.key, self.shown = key, shown[:40]


def _no_constant(text: str) -> NoReturn:
    raise _WrongJsonError("json.no_number", text)


def _object(pairs: list[tuple[str, Any]]) -> Json:
    made = dict(pairs)
    if len(made) != len(pairs):
        names = [k for k, _ in pairs]
        raise _WrongJsonError("json.double_key", next(n for n in names if names.count(n) > 1))
    return made


def objects(parent: Any, key: str) -> Iterator[Json]:
    """The objects of a list under a key; anything that is none is passed over."""
    found = parent.get(key) if isinstance(parent, dict) else None
    yield from (x for x in (found if isinstance(found, list) else ()) if isinstance(x, dict))


def child(parent: Any, key: str) -> Json:
    """The object under a key; an empty one where there is none."""
    found = parent.get(key) if isinstance(parent, dict) else None
    return found if isinstance(found, dict) else {}


def text(parent: Any, key: str) -> str:
    """The text or number under a key as written; empty where there is none."""
    found = parent.get(key) if isinstance(parent, dict) else None
    return str(found) if isinstance(found, str) else ""


__all__ = ["MOST", "Json", "Number", "UnreadableFileError", "child", "objects", "read_resources", "text"]
