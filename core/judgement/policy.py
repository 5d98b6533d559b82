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
    Freshness,
    LeakRules,
    Levers,
    MarkerRule,
    Noise,
    OxygenRules,
    ResponseRules,
    ScoreRules,
    StateRules,
    TrendRules,
)
from core.record.message import refuse


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
    hash: str = ""


def read_policy(text: str) -> Policy:
    """Read a policy's TOML text.

    Raises:
        RecordError: `policy.unreadable` (not TOML) or `policy.invalid` (unknown key, wrong type, missing
            value), with the parser's words.
    """
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
    return read_policy(shipped_text())
