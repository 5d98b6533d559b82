"""The policy: every threshold, window and noise limit, read from one TOML text a ward can change.

Each number is a `Limit`: the value, its source, and how sure that is. The text is the policy; its SHA-256 is
its name in every flag.
"""

from __future__ import annotations

import hashlib
import tomllib
from functools import lru_cache
from importlib import resources
from typing import Any

import msgspec

from core.judgement.policy_sections import (
    DueRule,
    EntryRules,
    Freshness,
    LeakRules,
    Levers,
    MarkerRule,
    Noise,
    OxygenRules,
    ResponseRules,
    ScoreRules,
    StartClocks,
    StateRules,
    TrendRules,
)
from core.record.message import refuse


def _start_clocks() -> StartClocks:
    """Those shipped: a ward's copy that is older than the section stands without it."""
    return shipped_policy().start_clocks


def _entry() -> EntryRules:
    """Likewise."""
    return shipped_policy().entry


class Policy(msgspec.Struct, frozen=True, forbid_unknown_fields=True, kw_only=True):
    """A whole policy. `hash` names the text it was read from."""

    name: str
    version: int
    response: ResponseRules
    noise: Noise
    state: StateRules
    oxygen: OxygenRules
    freshness: Freshness
    trend: TrendRules
    leak: LeakRules
    scores: ScoreRules
    levers: Levers
    markers: dict[str, MarkerRule]
    due: dict[str, DueRule]
    start_clocks: StartClocks = msgspec.field(default_factory=_start_clocks)
    entry: EntryRules = msgspec.field(default_factory=_entry)
    hash: str = ""


@lru_cache(maxsize=16)
def read_policy(text: str) -> Policy:
    """Read a policy's TOML text. A marker or due item that the text does not name is as shipped.

    A ward that wants one off says `on = false`: what is only missing (a copy older than the marker) must not go
    silent.

    Raises:
        RecordError: `policy.unreadable` (not TOML) or `policy.invalid` (unknown key, wrong type, missing
            value), with the parser's words. `policy_check.check` names every fault with its line.
    """
    policy, shipped = _converted(text), shipped_policy()
    for kind, own, ours in (("markers", policy.markers, shipped.markers), ("due", policy.due, shipped.due)):
        for key, rule in own.items():
            if key not in ours:
                raise refuse("policy.invalid", detail=f"{kind}.{key} is not known")
            lacking = _lacking(rule, ours[key])
            if lacking:
                raise refuse("policy.invalid", detail=f"{kind}.{key} lacks {', '.join(lacking)}")
    own_markers = {key: _with_detail(rule, shipped.markers[key]) for key, rule in policy.markers.items()}
    return msgspec.structs.replace(
        policy, markers={**shipped.markers, **own_markers}, due={**shipped.due, **policy.due}
    )


def _with_detail(rule: MarkerRule, shipped: MarkerRule) -> MarkerRule:
    """A rule that does not say how sure its durations are is no surer of them than the shipped one.

    A ward's copy may be older than the word; one that has confirmed its durations writes so.
    """
    if rule.detail_sure is not None or shipped.detail_sure is None:
        return rule
    return msgspec.structs.replace(rule, detail_sure=shipped.detail_sure)


def _lacking(rule: MarkerRule | DueRule, shipped: MarkerRule | DueRule) -> list[str]:
    """The numbers that the code of a rule reads and that it does not give."""
    lacking = [f"limits.{k}" for k in shipped.limits if k not in rule.limits]
    if isinstance(rule, MarkerRule) and isinstance(shipped, MarkerRule):
        lacking += [f"pressures.{k}" for k in shipped.pressures if k not in rule.pressures]
    return lacking


def _converted(text: str) -> Policy:
    try:
        tables: dict[str, Any] = tomllib.loads(text)
    except tomllib.TOMLDecodeError as error:
        raise refuse("policy.unreadable", detail=str(error)) from None
    tables["hash"] = policy_hash(text)
    try:
        return msgspec.convert(tables, Policy)
    except msgspec.ValidationError as error:
        raise refuse("policy.invalid", detail=str(error)) from None


def policy_hash(text: str) -> str:
    """The SHA-256 of a policy's text, line ends as LF, in hex."""
    return hashlib.sha256(text.replace("\r\n", "\n").encode()).hexdigest()


def shipped_text() -> str:
    """The TOML text of the shipped policy."""
    return resources.files("core.judgement").joinpath("policy.toml").read_text("utf-8")


@lru_cache(maxsize=1)
def shipped_policy() -> Policy:
    """The policy that a new store begins with."""
    return _converted(shipped_text())
