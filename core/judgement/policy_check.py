"""Checks a ward's policy before it is put in force: every fault with its line, and what differs from the shipped one.

`read_policy` stops at the first fault; here all of them are named, with what is accepted. Text that is no TOML gives
that one fault.
"""

from __future__ import annotations

import re
import tomllib
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from difflib import get_close_matches
from typing import Any, get_args, get_origin

import msgspec

from core.judgement.policy import Policy, policy_hash, shipped_policy, shipped_text
from core.judgement.policy_limits import impossible
from core.judgement.policy_sections import DueRule, MarkerRule
from core.record.message import Message, Value

Table = Mapping[str, Any]
ERROR, NOTE = "error", "note"
_HEADER = re.compile(r"^\s*\[\s*([^\[\]]+?)\s*\]")
_KEY = re.compile(r'^\s*("[^"]+"|[\w-]+)\s*=')


@dataclass(frozen=True, slots=True)
class PolicyFinding:
    """One fault (`error`) or remark (`note`) of a policy's text. `line` counts from 1; 0 where there is none."""

    line: int
    path: str
    kind: str
    message: Message


@dataclass(frozen=True, slots=True)
class PolicyDifference:
    """A value that differs from the shipped policy. None: the other side does not have it."""

    path: str
    shipped: Value
    own: Value


@dataclass(frozen=True, slots=True)
class PolicyCheck:
    """The result: `usable` when no finding is an error."""

    hash: str
    findings: tuple[PolicyFinding, ...]
    differences: tuple[PolicyDifference, ...]

    @property
    def usable(self) -> bool:
        """Whether the policy may be put in force."""
        return not any(f.kind == ERROR for f in self.findings)


def check(text: str) -> PolicyCheck:
    """Check a policy's TOML text.

    >>> check(shipped_text()).usable, check("name = 1").usable
    (True, False)
    """
    try:
        tables = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        said = Message("policy.unreadable", {"detail": str(error)})
        return PolicyCheck(policy_hash(text), (PolicyFinding(_line_of_error(str(error)), "", ERROR, said),), ())
    lines = key_lines(text)
    faults = [*_faults(tables, Policy, ""), *_rules(tables)]
    if not faults:
        faults += impossible(msgspec.convert(tables | {"hash": ""}, Policy))
    findings = [PolicyFinding(_line(lines, path), path, kind, message) for path, kind, message in faults]
    findings.sort(key=lambda f: (f.line, f.path))
    return PolicyCheck(policy_hash(text), tuple(findings), tuple(differences(tables)))


def _line_of_error(text: str) -> int:
    found = re.search(r"line (\d+)", text)
    return int(found[1]) if found else 0


def key_lines(text: str) -> dict[str, int]:
    """The line of each table and key, by its path.

    >>> key_lines("a = 1\\n[noise]\\nph = { value = 1 }\\n")
    {'a': 1, 'noise': 2, 'noise.ph': 3}
    """
    lines: dict[str, int] = {}
    table = ""
    for number, line in enumerate(text.splitlines(), 1):
        if header := _HEADER.match(line):
            table = header[1].replace('"', "").replace(" ", "")
            lines.setdefault(table, number)
        elif key := _KEY.match(line):
            lines.setdefault(f"{table}.{key[1].strip(chr(34))}".lstrip("."), number)
    return lines


def _line(lines: Mapping[str, int], path: str) -> int:
    """The line of a path, or of the nearest table above it."""
    while path:
        if path in lines:
            return lines[path]
        path = path.rpartition(".")[0]
    return 0


Fault = tuple[str, str, Message]


def _faults(value: Any, kind: Any, path: str) -> Iterator[Fault]:
    """Unknown keys, missing values and wrong types, all of them."""
    if isinstance(kind, type) and issubclass(kind, msgspec.Struct):
        if not isinstance(value, dict):
            yield path, ERROR, Message("policy.not_a_table", {"path": path, "value": str(value)})
            return
        known = {f.encode_name: f for f in msgspec.structs.fields(kind) if f.encode_name != "hash"}
        for name in value.keys() - known.keys():
            yield _join(path, name), ERROR, _unknown(path, name, list(known))
        for name, field in known.items():
            if name in value:
                yield from _faults(value[name], field.type, _join(path, name))
            elif field.required:
                yield path, ERROR, Message("policy.missing", {"path": _join(path, name)})
        return
    if get_origin(kind) is dict and isinstance(value, dict) and _is_struct(get_args(kind)[1]):
        for name, inner in value.items():
            yield from _faults(inner, get_args(kind)[1], _join(path, name))
        return
    try:
        msgspec.convert(value, kind)
    except msgspec.ValidationError as error:
        accepted = ", ".join(map(str, get_args(kind))) or getattr(kind, "__name__", str(kind))
        values: dict[str, Value] = {"path": path, "value": str(value), "detail": str(error), "accepted": accepted}
        yield path, ERROR, Message("policy.wrong_value", values)
    if path.rpartition(".")[2] == "source" and isinstance(value, str) and not value.strip():
        yield path, ERROR, Message("policy.no_source", {"path": path})


def _is_struct(kind: Any) -> bool:
    return isinstance(kind, type) and issubclass(kind, msgspec.Struct)


def _join(path: str, name: str) -> str:
    return f"{path}.{name}" if path else name


def _unknown(path: str, name: str, accepted: list[str]) -> Message:
    near = get_close_matches(name, accepted, 3, 0.6) or accepted
    return Message("policy.unknown_key", {"path": _join(path, name), "accepted": ", ".join(near)})


def _rules(tables: Table) -> Iterator[Fault]:
    """Markers and due items that are not known, lack a number, or name one that nothing reads."""
    shipped = shipped_policy()
    known: tuple[tuple[str, Mapping[str, MarkerRule | DueRule]], ...] = (
        ("markers", shipped.markers),
        ("due", shipped.due),
    )
    for section, ours in known:
        own = tables.get(section, {})
        if not isinstance(own, dict):
            continue
        for key, rule in own.items():
            if key not in ours:
                yield f"{section}.{key}", ERROR, _unknown(section, key, list(ours))
            elif isinstance(rule, dict):
                yield from _numbers(f"{section}.{key}", rule, ours[key])
        for key in ours.keys() - own.keys():
            yield section, NOTE, Message("policy.as_shipped", {"path": f"{section}.{key}"})


def _numbers(path: str, rule: Table, shipped: MarkerRule | DueRule) -> Iterator[Fault]:
    groups: dict[str, Mapping[str, Any]] = {"limits": shipped.limits}
    if isinstance(shipped, MarkerRule):
        groups["pressures"] = shipped.pressures
    for group, wanted in groups.items():
        given = rule.get(group, {})
        if not isinstance(given, dict):
            continue
        for name in wanted.keys() - given.keys():
            yield path, ERROR, Message("policy.missing", {"path": f"{path}.{group}.{name}"})
        for name in given.keys() - wanted.keys():
            yield f"{path}.{group}.{name}", ERROR, _unknown(f"{path}.{group}", name, list(wanted) or ["none"])


def differences(own: Table, other: str | None = None) -> Iterator[PolicyDifference]:
    """What differs from another policy's text (the shipped one), by path; name and version included."""
    shipped = dict(_leaves(tomllib.loads(shipped_text() if other is None else other), ""))
    mine = dict(_leaves(own, ""))
    for path in sorted(shipped.keys() | mine.keys()):
        if shipped.get(path) != mine.get(path):
            yield PolicyDifference(path, shipped.get(path), mine.get(path))


def between(text: str, other: str) -> tuple[PolicyDifference, ...]:
    """What a readable policy's text has otherwise than another one; `shipped` of each is the other's.

    >>> between(shipped_text().replace("version = 1", "version = 2"), shipped_text())
    (PolicyDifference(path='version', shipped=1, own=2),)
    """
    return tuple(differences(tomllib.loads(text), other))


def _leaves(value: Any, path: str) -> Iterator[tuple[str, Value]]:
    if isinstance(value, dict):
        for name, inner in value.items():
            yield from _leaves(inner, _join(path, str(name)))
    elif isinstance(value, (str, int, float, bool)):
        yield path, value
    else:
        yield path, str(value)
