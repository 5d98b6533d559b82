"""A policy in words: one line for each rule and each number, grouped, beside what the shipped policy says."""

from __future__ import annotations

from collections.abc import Iterable, Iterator, Mapping
from dataclasses import dataclass

import msgspec

from app.look.formats import fixed, fraction, minutes, trimmed
from app.look.theme import Tier, tier_word
from app.telling.certainty import certainty_words
from app.telling.finding_names import due_name, group_name, marker_name
from app.telling.phrases import translate
from core.judgement.markers.registry import GROUPS, MARKERS
from core.judgement.policy import Policy
from core.judgement.policy_check import PolicyDifference
from core.judgement.policy_sections import DueRule, Limit, MarkerRule, PressureLimit
from core.physiology.constants import KPA_IN_MMHG

# what each number of a marker or due item is, and its unit
LIMITS: Mapping[str, tuple[str, str]] = {
    "after_min": ("from this long after the start", "min"), "apart_min": ("apart by", "min"),
    "ask_h": ("asked for", "h"), "awaiting_min": ("result awaited for", "min"),
    "before_h": ("value before, at most", "h old"), "beta_agonist_h": ("beta-agonist within", "h"),
    "clear": ("ends at", "mmHg"), "escalate_min": ("while an escalate flag stands, every", "min"),
    "every_min": ("every", "min"), "fio2": ("FiO2", "fraction"),
    "fio2_hypoxaemic": ("in hypoxaemic failure FiO2", "fraction"),
    "from_min": ("from", "min"), "gcs": ("GCS", ""),
    "grave_from_min": ("after a grave gas or an escalate flag from", "min"),
    "grave_until_min": ("after a grave gas or an escalate flag until", "min"),
    "hold_min": ("stands for", "min"), "hours": ("for", "h"),
    "ipap": ("IPAP", "cmH2O"), "lactate": ("lactate", "mmol/L"), "minutes": ("for", "min"),
    "ml_per_kg": ("tidal volume", "mL/kg"), "new_within_h": ("new within", "h"), "o2_flow": ("oxygen flow", "L/min"),
    "of_min": ("of", "min"), "of_minutes": ("of the last", "min"),
    "own_before_min": ("own breaths before for", "min"),
    "paco2": ("PaCO2", "pressure"), "pao2": ("PaO2", "pressure"), "percent": ("share", "%"), "pf": ("P/F", "ratio"),
    "pf_within_h": ("P/F at most", "h old"), "ph": ("pH", "pH"), "ph_high": ("pH to", "pH"),
    "ph_low": ("pH from", "pH"),
    "points": ("points", ""), "pressure_support": ("pressure support by", "cmH2O"),
    "rate_tolerance": ("rate within", "/min"), "rise": ("rise", ""), "rr": ("respiratory rate", "/min"),
    "rr_least": ("respiratory rate at least", "/min"), "sbp": ("systolic blood pressure", "mmHg"),
    "sbp_fall": ("systolic blood pressure down by", "mmHg"), "sf": ("S/F", ""),
    "support_h": ("on support for at most", "h"),
    "to_min": ("to", "min"), "triggered_percent": ("own breaths below", "%"), "within_h": ("within", "h"),
    "within_min": ("within", "min"),
}  # fmt: skip
_RELATIONS: Mapping[tuple[str, str], str] = {
    ("", "ph"): "below", ("", "gcs"): "below", ("", "pao2"): "below", ("", "paco2"): "above", ("", "sf"): "below",
    ("", "ipap"): "below", ("", "lactate"): "above", ("", "sbp"): "below", ("", "ml_per_kg"): "above",
    ("", "rr"): "above", ("", "pf"): "at or below", ("", "percent"): "above",
    ("rr_above_30", "rr"): "at or above",
    ("rate_below_12_drowsy", "rr"): "below", ("rate_below_12_drowsy", "gcs"): "at or below",
    ("weaning_ready", "rr"): "below", ("weaning_ready", "fio2"): "at or below",
    ("pao2_below_45_on_highest_oxygen", "fio2"): "at or above",
    ("pao2_below_45_on_highest_oxygen", "o2_flow"): "at or above",
    ("hacor_above_5", "points"): "above", ("hacor_8_or_more", "points"): "above",
    ("hacor_above_5_later", "points"): "above", ("hacor_updated_above_10_5", "points"): "above",
}  # fmt: skip
"""On which side of its limit a marker is met: by marker and limit, or by limit alone."""
_UNITS = (
    ("_L_per_min_per_sqrt_cmH2O", "L/min per root of cmH2O"), ("_L_per_min", "L/min"), ("_per_min", "/min"),
    ("_mmol_L", "mmol/L"), ("_mmHg", "pressure"), ("_cmH2O", "cmH2O"), ("_ml_per_kg", "mL/kg"), ("_min", "min"),
    ("_minutes", "min"), ("_h", "h"), ("_s", "s"),
)  # fmt: skip


@dataclass(frozen=True, slots=True)
class Difference:
    """A value of a rule that is not the shipped one; empty where one side has none."""

    what: str
    own: str
    shipped: str

    @property
    def sentence(self) -> str:
        """`pH: 7.2 (shipped 7.25)`."""
        text = translate("policy", "{what}: {own} (shipped {shipped})")
        none = translate("policy", "none")
        return text.format(what=self.what, own=self.own or none, shipped=self.shipped or none)


@dataclass(frozen=True, slots=True)
class Rule:
    """One rule of the policy in words. `tier` empty where it has none; `more` are its lesser settings."""

    path: str
    group: str
    name: str
    on: bool
    tier: str
    limits: str
    population: str
    source: str
    sure: str
    """One word or two: `confirmed`, `from memory`."""
    more: tuple[str, ...] = ()
    differs: tuple[Difference, ...] = ()
    detail_sure: str | None = None

    def lines(self) -> Iterator[tuple[str, str]]:
        """(what, words) of everything that is known of it."""
        if not self.on:
            yield translate("policy", "State"), translate("policy", "switched off")
        if self.tier:
            yield translate("policy", "Strength"), tier_word(Tier(self.tier))
        if self.limits:
            yield translate("policy", "Limits"), self.limits
        if self.population:
            yield translate("policy", "For whom"), self.population
        for line in self.more:
            yield "", line
        yield translate("policy", "Source"), f"{self.source} ({certainty_words(self)})" if self.sure else self.source
        for found in self.differs:
            yield translate("policy", "Differs"), found.sentence


SECTIONS: Mapping[str, str] = {
    "response": "Response to a change", "noise": "Measurement error between two values", "state": "States of a gas",
    "oxygen": "Oxygen", "freshness": "How old an input may be", "trend": "Trends", "leak": "Leak", "scores": "Scores",
    "levers": "Levers", "start_clocks": "Clocks of the shift figures",
    "entry": "Questions at entry",
}  # fmt: skip


def rules(policy: Policy, differences: Iterable[PolicyDifference]) -> tuple[Rule, ...]:
    """Every rule: markers by group, due items, then the numbers of each section."""
    told = list(differences)
    found: list[Rule] = []
    order = {key: i for i, key in enumerate(MARKERS)}
    for group in GROUPS:
        of = [k for k in policy.markers if policy.markers[k].group == group]
        found += [_marker(k, policy.markers[k], told) for k in sorted(of, key=lambda k: order.get(k, len(order)))]
    found += [_marker(k, m, told) for k, m in policy.markers.items() if m.group not in GROUPS]
    found += [_due(k, d, told) for k, d in policy.due.items()]
    for section, title in SECTIONS.items():
        found += list(_section(section, title, getattr(policy, section), told))
    return tuple(found)


def _marker(key: str, rule: MarkerRule, told: list[PolicyDifference]) -> Rule:
    path = f"markers.{key}"
    more = []
    if rule.population != "any":
        more.append(
            translate("policy", "Outside that population: silent")
            if rule.outside == "silent"
            else translate("policy", "Outside that population: a remark that says so")
        )
    if rule.gap_min:
        again = translate("policy", "Met again within {time} it is the same flag")
        more.append(again.format(time=minutes(rule.gap_min)))
    old = translate("policy", "Shown as old after {time} without a new value")
    more.append(old.format(time=minutes(rule.stale_min)))
    population = population_words(rule.population)
    limits = limits_words(key, rule)
    return Rule(path, group_name(rule.group), marker_name(key), rule.on, rule.tier, limits, population,
                rule.source, rule.sure, tuple(more), _differs(path, told), rule.detail_sure)  # fmt: skip


def _due(key: str, rule: DueRule, told: list[PolicyDifference]) -> Rule:
    path = f"due.{key}"
    span = translate("policy", "from {a} to {b} min, soon {c} min before").format(
        a=trimmed(rule.from_min), b=trimmed(rule.until_min), c=trimmed(rule.soon_min)
    )
    words = [span, *(_limit(n, v) for n, v in rule.limits.items())]
    return Rule(path, translate("policy", "Due items"), due_name(key), rule.on, "", ", ".join(words), "", rule.source,
                rule.sure, (), _differs(path, told))  # fmt: skip


def _section(section: str, title: str, numbers: msgspec.Struct, told: list[PolicyDifference]) -> Iterator[Rule]:
    for field in msgspec.structs.fields(numbers):
        value, path = getattr(numbers, field.name), f"{section}.{field.name}"
        name, unit = _split(field.name)
        words, source, sure = _plain(value), translate("policy", "the ward's choice"), ""
        if isinstance(value, Limit):
            words, source, sure = _written(value, unit), value.source, str(value.sure)
        group = translate("policy", title)
        yield Rule(path, group, name, True, "", words, "", source, sure, (), _differs(path, told))


def _differs(path: str, told: list[PolicyDifference]) -> tuple[Difference, ...]:
    """The differences under a path, each named by its last part."""
    mine = [d for d in told if d.path == path or d.path.startswith(f"{path}.")]
    return tuple(Difference(_part(d.path), _plain(d.own), _plain(d.shipped)) for d in mine)


def _part(path: str) -> str:
    last = path.rpartition(".")[2]
    if last in ("mmHg", "kpa"):
        return f"{LIMITS.get(path.split('.')[-2], (path.split('.')[-2], ''))[0]}, {'kPa' if last == 'kpa' else last}"
    return LIMITS[last][0] if last in LIMITS else last.replace("_", " ")


def _plain(value: object) -> str:
    if value is None:
        return ""
    if isinstance(value, bool):
        return translate("policy", "yes") if value else translate("policy", "no")
    return trimmed(float(value), 3) if isinstance(value, int | float) else str(value)


def population_words(population: str) -> str:
    """Whom a marker is for, as it is read.

    >>> population_words("any"), population_words("hypercapnic copd")
    ('everyone', 'hypercapnic COPD')
    """
    if population == "any":
        return translate("policy", "everyone")
    return population.replace("copd", "COPD").replace("ards", "ARDS")


def limits_words(key: str, rule: MarkerRule) -> str:
    """Every number of a marker, and on which side of it the marker is met."""
    words = [_pressure(n, p, relation(key, n)) for n, p in rule.pressures.items()]
    return ", ".join([*words, *(_limit(n, v, relation(key, n)) for n, v in rule.limits.items())])


def relation(marker: str, limit: str) -> str:
    """On which side of a limit a marker is met, e.g. "below"; "" where the limit's name says it or none is meant."""
    return _RELATIONS.get((marker, limit), _RELATIONS.get(("", limit), ""))


def _limit(name: str, value: float, side: str = "") -> str:
    label, unit = LIMITS.get(name, (name.replace("_", " "), ""))
    return " ".join(x for x in (label, side, _number(value, unit)) if x)


def _pressure(name: str, limit: PressureLimit, side: str) -> str:
    label = " ".join(x for x in (LIMITS.get(name, (name, ""))[0], side) if x)
    return f"{label} {trimmed(limit.mmHg)} mmHg / {fixed(limit.kpa, 1)} kPa"


def _written(limit: Limit, unit: str) -> str:
    if limit.kpa is not None:
        return f"{trimmed(limit.value)} mmHg / {trimmed(limit.kpa) if limit.kpa < 1 else fixed(limit.kpa, 1)} kPa"
    return _number(limit.value, unit)


def _number(value: float, unit: str) -> str:
    """A number with its unit; a ratio or pressure in both units."""
    if unit == "fraction":
        return fraction(value)
    if unit in ("ratio", "pressure"):
        return f"{trimmed(value)} mmHg / {fixed(value / KPA_IN_MMHG, 1)} kPa"
    if unit == "pH":
        return fixed(value, 2) if round(value, 2) == value else trimmed(value, 3)
    text = trimmed(value, 3)
    return text + unit if unit in ("%", "/min") else f"{text} {unit}".rstrip()


def _split(name: str) -> tuple[str, str]:
    """A number's name in words, and its unit.

    >>> _split("window_from_min"), _split("severe_below_ph"), _split("ph")
    (('Window from', 'min'), ('Severe below pH', 'pH'), ('pH', 'pH'))
    """
    unit = ""
    if name.endswith("ph") and name.rpartition("_")[2] == "ph":
        unit = "pH"
    else:
        for ending, meant in _UNITS:
            if name.endswith(ending):
                name, unit = name.removesuffix(ending), meant
                break
    words = [_WRITTEN.get(w, w) for w in name.split("_")]
    text = " ".join(words)
    return (text if words[0] in _WRITTEN.values() else text[:1].upper() + text[1:]), unit


_WRITTEN = {
    "ph": "pH", "paco2": "PaCO2", "pao2": "PaO2", "pf": "P/F", "sf": "S/F", "spo2": "SpO2", "fio2": "FiO2",
    "rr": "Respiratory rate", "gcs": "GCS", "ipap": "IPAP", "epap": "EPAP", "ti": "inspiratory time",
    "vt": "tidal volume", "hacor": "HACOR",
}  # fmt: skip
