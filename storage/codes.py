"""Codes of open standards for our channels: LOINC for what was measured, UCUM for units, and our own where
neither has one.

This material contains content from LOINC (http://loinc.org). LOINC is copyright (c) Regenstrief Institute, Inc.
and the Logical Observation Identifiers Names and Codes (LOINC) Committee and is available at no cost under the
license at http://loinc.org/license. LOINC is a registered United States trademark of Regenstrief Institute, Inc.
UCUM is copyright (c) Regenstrief Institute, Inc., used under the license at https://ucum.org/license.

A code is given out only where its meaning was confirmed against the published name. Where no code exists (IPAP,
leak, events), or only a near one (EPAP: PEEP set), our own code system stands: the channel's key under
`LOCAL_SYSTEM`. `storage.export.data_dictionary` writes it out.
"""

from __future__ import annotations

import re
from collections.abc import Mapping
from dataclasses import dataclass
from functools import lru_cache
from types import MappingProxyType

from core.record.channels import CHANNELS, Channel
from core.record.units import Unit

LOINC = "http://loinc.org"
UCUM = "http://unitsofmeasure.org"
LOCAL_SYSTEM = "urn:uuid:5d9b5ec4-6f5b-5f0a-9f0b-7a6c1d2e4f10"
"""Our own code system; codes are keys of channels. A fixed UUID, since we own no web address."""
LOCAL_EPISODE = "urn:uuid:5d9b5ec4-6f5b-5f0a-9f0b-7a6c1d2e4f11"
"""The system of identifiers that are keys of episodes."""
LOINC_NOTICE = (
    "This material contains content from LOINC (http://loinc.org). LOINC is copyright \N{COPYRIGHT SIGN} "
    "Regenstrief Institute, Inc. and the Logical Observation Identifiers Names and Codes (LOINC) Committee and is "
    "available at no cost under the license at http://loinc.org/license. LOINC\N{REGISTERED SIGN} is a registered "
    "United States trademark of Regenstrief Institute, Inc."
)


@dataclass(frozen=True, slots=True)
class Meaning:
    """What a code stands for here. `site` is the sample site that the code itself names, or empty."""

    channel: str
    site: str = ""


def _blood(channel: str, arterial: str, venous: str, capillary: str, blood: str) -> dict[str, Meaning]:
    sites = (("arterial", arterial), ("venous", venous), ("capillary", capillary), ("", blood))
    return {code: Meaning(channel, site) for site, code in sites if code}


_GIVEN: dict[str, Meaning] = {
    "9279-1": Meaning("rr"),
    "8867-4": Meaning("hr"),
    "59408-5": Meaning("spo2"),
    "8480-6": Meaning("sbp"),
    "8462-4": Meaning("dbp"),
    "8302-2": Meaning("height"),
    "29463-7": Meaning("weight"),
    "8310-5": Meaning("temp"),
    "9269-2": Meaning("gcs"),
    **_blood("ph", "2744-1", "2746-6", "2745-8", "11558-4"),
    **_blood("paco2", "2019-8", "2021-4", "2020-6", "11557-6"),
    **_blood("pao2", "2703-7", "2705-2", "2704-5", "11556-8"),
    **_blood("hco3", "1960-4", "14627-4", "", ""),
    **_blood("be", "1925-7", "1927-3", "", "1926-5"),
    **_blood("lactate", "2518-9", "2519-7", "", "32693-4"),
    "3151-8": Meaning("o2_flow"),
    "19994-3": Meaning("fio2"),
    "76334-2": Meaning("ti"),
    "75958-9": Meaning("vte"),
    "20139-2": Meaning("mv"),
}
"""Codes that we give out and take: each confirmed by its published name."""

_TAKEN: dict[str, Meaning] = {
    "2708-6": Meaning("sao2", "arterial"),  # beside 59408-5 it is a pulse oximeter's: see `meaning_of_codings`
    "3150-0": Meaning("gas_fio2"),
    "11555-0": Meaning("be"),  # "Base excess in Blood by calculation", as HL7's example f002 names it
    "718-7": Meaning("hb"),
    "8306-3": Meaning("height"),
    "76007-4": Meaning("vte"),
    "76008-2": Meaning("mv"),
}
"""Codes that we take and do not give out: other codes say the same more closely, or the name is broader."""

MEANINGS: Mapping[str, Meaning] = MappingProxyType({**_GIVEN, **_TAKEN})

_OUT: dict[tuple[str, str], str] = {}
for _code, _given in _GIVEN.items():
    _OUT.setdefault((_given.channel, _given.site), _code)


def loinc_of(channel: str, site: str = "") -> str:
    """The LOINC code given out for a channel and sample site; empty where none is sure.

    >>> loinc_of("ph", "arterial"), loinc_of("rr"), loinc_of("ipap")
    ('2744-1', '9279-1', '')
    """
    return _OUT.get((channel, site)) or ("" if site else _OUT.get((channel, ""), ""))


Coding = tuple[str, str]
"""A code with its system: (system, code)."""


def meaning_of_codings(codings: list[Coding]) -> Meaning | None:
    """What several codings of one observation stand for, or None where none of them is ours.

    2708-6 is arterial saturation; with 59408-5 beside it, it is a pulse oximeter's (as profiles of vital signs
    demand both), and our own code beats both.

    >>> meaning_of_codings([("http://loinc.org", "2708-6"), ("http://loinc.org", "59408-5")]).channel
    'spo2'
    """
    for system, code in codings:
        if system == LOCAL_SYSTEM and code in CHANNELS:
            return Meaning(code)
    found = [MEANINGS[code] for system, code in codings if system == LOINC and code in MEANINGS]
    keys = {m.channel for m in found}
    if keys == {"spo2", "sao2"}:
        return MEANINGS["59408-5"]
    return found[0] if len(keys) == 1 else None


UNITS: Mapping[str, str] = MappingProxyType({
    "mm[Hg]": "mmHg", "kPa": "kPa", "cm[H2O]": "cmH2O", "hPa": "hPa", "mbar": "hPa",
    "%": "%", "1": "fraction", "/min": "/min", "L/min": "L/min", "l/min": "L/min", "mL/min": "mL/min",
    "ml/min": "mL/min", "mL": "mL", "ml": "mL", "L": "L", "l": "L", "mmol/L": "mmol/L", "mmol/l": "mmol/L",
    "meq/L": "mmol/L", "[pH]": "pH", "nmol/L": "nmol/L", "nmol/l": "nmol/L", "s": "s", "ms": "ms",
    "cm": "cm", "m": "m", "kg": "kg", "[lb_av]": "lb", "Cel": "degC", "[degF]": "degF", "g/L": "g/L",
    "g/l": "g/L", "g/dL": "g/dL", "g/dl": "g/dL", "a": "y", "{score}": "points",
})  # fmt: skip
"""UCUM codes (case sensitive) by our unit. meq/L is mmol/L for ions of one charge, as bicarbonate is."""

_NOTE = re.compile(r"\{[^{}]*\}")


def unit_of_ucum(channel: Channel, code: str) -> Unit | None:
    """The channel's unit that a UCUM code names, or None where the channel does not take it.

    What stands in braces is a remark and no unit: `{breaths}/min` is `/min`.

    >>> unit_of_ucum(CHANNELS["rr"], "{breaths}/min").name
    '/min'
    >>> unit_of_ucum(CHANNELS["rr"], "kPa") is None
    True
    """
    plain = UNITS.get(code) or UNITS.get(_NOTE.sub("", code) or "1")
    if plain == "fraction" and channel.unit != "fraction":
        plain = channel.unit if channel.unit in ("points", "pH") else ""
    return next((u for u in channel.units if u.name == plain), None)


@lru_cache(maxsize=64)
def ucum_of(unit: str) -> str:
    """The UCUM code of one of our units; empty where it has none.

    >>> ucum_of("mmHg"), ucum_of("cmH2O"), ucum_of("points")
    ('mm[Hg]', 'cm[H2O]', '{score}')
    """
    return next((code for code, name in UNITS.items() if name == unit), "")
