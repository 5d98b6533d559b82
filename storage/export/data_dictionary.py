"""The data dictionary: every channel with its unit, limits and codes, as a table and as a FHIR CodeSystem."""

from __future__ import annotations

from typing import Any

from core.record.channels import CHANNELS, SITES, Channel, Group
from storage.codes import LOCAL_SYSTEM, LOINC_NOTICE, loinc_of, ucum_of

COLUMNS = ("channel", "name", "group", "kind", "unit", "ucum", "hard_low", "hard_high", "soft_low", "soft_high",
           "decimals", "choices", "loinc")  # fmt: skip


def rows() -> list[dict[str, str]]:
    """One row per channel, as texts.

    >>> next(r["loinc"] for r in rows() if r["channel"] == "rr")
    '9279-1'
    """
    return [_row(c) for c in CHANNELS.values()]


def _row(c: Channel) -> dict[str, str]:
    hard, soft = c.hard or ("", ""), c.soft or ("", "")
    return {
        "channel": c.key, "name": c.name, "group": c.group.value, "kind": c.kind.value, "unit": c.unit,
        "ucum": ucum_of(c.unit), "hard_low": str(hard[0]), "hard_high": str(hard[1]), "soft_low": str(soft[0]),
        "soft_high": str(soft[1]), "decimals": str(c.decimals), "choices": " | ".join(c.choices), "loinc": _loinc(c),
    }  # fmt: skip


def _loinc(c: Channel) -> str:
    if c.group is not Group.GAS:
        return loinc_of(c.key)
    found = {site: loinc_of(c.key, site) for site in SITES}
    named = [f"{site} {code}" for site, code in found.items() if code]
    blood = loinc_of(c.key)
    return "; ".join([*named, *([f"blood {blood}"] if blood else [])])


def _definition(c: Channel) -> str:
    unit = f", in {c.unit}" if c.unit else ""
    return f"{c.name}{unit} ({c.group.value})"


def code_system() -> dict[str, Any]:
    """Our own codes as a FHIR R4 CodeSystem: the keys of channels, for what has no sure LOINC code and beside it."""
    concepts = [{"code": c.key, "display": c.name, "definition": _definition(c)} for c in CHANNELS.values()]
    choices = sorted({choice for c in CHANNELS.values() for choice in c.choices} - CHANNELS.keys())
    concepts += [{"code": choice, "display": choice, "definition": "a choice of a channel"} for choice in choices]
    return {
        "resourceType": "CodeSystem", "url": LOCAL_SYSTEM, "name": "LuffmarkChannels", "status": "active",
        "content": "complete", "caseSensitive": True, "copyright": LOINC_NOTICE,
        "description": "Quantities, settings and events of mask ventilation as the log keeps them.",
        "concept": concepts,
    }  # fmt: skip
