"""The registry of channels: the one source for validation, units, labels, decimals, import, export, help.

To add a channel, add a line to a group below; `tests/core/record/test_channels.py` proves the registry whole.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass
from enum import StrEnum
from types import MappingProxyType

from core.record import units as u
from core.record.message import refuse


class Group(StrEnum):
    """Where a channel belongs: it decides how values are stored, carried and shown."""

    PROFILE = "profile"
    SETTING = "setting"
    VITAL = "vital"
    GAS = "gas"
    DEVICE = "device"
    EVENT = "event"


class Kind(StrEnum):
    """What sort of value a channel takes."""

    NUMBER = "number"
    CHOICE = "choice"
    TEXT = "text"
    INSTANT = "instant"
    MARK = "mark"
    """An event: it happened; a text may say more."""


Limits = tuple[float, float]


@dataclass(frozen=True, slots=True)
class Channel:
    """One quantity that can be logged.

    `hard` limits refuse a value; `soft` limits ask for confirmation (unattended intake marks it doubtful).
    Both are in the canonical unit, `units[0]`. `short` are the words the log strip understands.
    """

    key: str
    name: str
    group: Group
    kind: Kind = Kind.NUMBER
    units: tuple[u.Unit, ...] = ()
    decimals: int = 0
    hard: Limits | None = None
    soft: Limits | None = None
    choices: tuple[str, ...] = ()
    short: tuple[str, ...] = ()
    open_choice: bool = False

    @property
    def unit(self) -> str:
        """The canonical unit's name, or an empty text."""
        return self.units[0].name if self.units else ""

    def unit_named(self, text: str) -> u.Unit:
        """The accepted unit spelled `text` (case of letters does not matter, except to tell mL from ML).

        Raises:
            RecordError: `unit.unknown` with what is accepted.
        """
        wanted = text.strip()
        for unit in self.units:
            if wanted == unit.name or wanted.lower() in (unit.name.lower(), *unit.spellings):
                return unit
        accepted = ", ".join(unit.name for unit in self.units) or "no unit"
        raise refuse("unit.unknown", channel=self.key, unit=text, accepted=accepted)


def _number(
    key: str,
    name: str,
    group: Group,
    units: tuple[u.Unit, ...],
    hard: Limits,
    soft: Limits | None = None,
    decimals: int = 0,
    short: tuple[str, ...] = (),
) -> Channel:
    return Channel(key, name, group, Kind.NUMBER, units, decimals, hard, soft, (), short)


def _choice(key: str, name: str, group: Group, *choices: str, open_choice: bool = False) -> Channel:
    return Channel(key, name, group, Kind.CHOICE, choices=choices, open_choice=open_choice)


def _words(key: str, name: str, group: Group, kind: Kind = Kind.TEXT) -> Channel:
    return Channel(key, name, group, kind)


MODES = (
    "BPAP-ST", "BPAP-S", "BPAP-T", "pressure control", "volume-assured", "CPAP", "high-flow nasal", "off",
)  # fmt: skip
BILEVEL_MODES = frozenset(MODES[:5])
INDICATIONS = (
    "copd", "obesity hypoventilation", "neuromuscular", "chest wall", "cardiogenic pulmonary oedema",
    "pneumonia", "ards", "asthma", "post-extubation", "other",
)  # fmt: skip
HYPERCAPNIC_RISK = frozenset({"copd", "obesity hypoventilation", "neuromuscular", "chest wall"})
HYPOXAEMIC = frozenset({"pneumonia", "ards", "cardiogenic pulmonary oedema"})
CEILINGS = ("full", "no intubation", "ward support is the ceiling", "comfort", "not recorded")
RESUSCITATION = ("for resuscitation", "not for resuscitation", "not recorded")
SITES = ("arterial", "capillary", "venous")
END_REASONS = ("weaned", "escalated", "ceiling", "transferred", "died", "not tolerated", "other")
INTERFACES = ("oronasal", "nasal", "full face", "helmet", "mouthpiece")
LEAK_DEFINITIONS = ("unintentional", "total", "not known")
YES_NO = ("yes", "no", "not known")

P, S, V, G, D, E = Group.PROFILE, Group.SETTING, Group.VITAL, Group.GAS, Group.DEVICE, Group.EVENT

_PROFILE = (
    _words("label", "Label", P),
    _words("location", "Location", P),
    _number("age", "Age", P, u.YEARS, (0, 120), (16, 105)),
    _choice("indication", "Indication", P, *INDICATIONS),
    _words("arrived_at", "Arrived", P, Kind.INSTANT),
    _words("decided_at", "Decision to start support", P, Kind.INSTANT),
    _words("deciding_gas_at", "Deciding gas", P, Kind.INSTANT),
    _words("started_at", "Support started", P, Kind.INSTANT),
    _words("ended_at", "Support ended", P, Kind.INSTANT),
    _choice("end_reason", "Why it ended", P, *END_REASONS),
    _choice("sex", "Sex", P, "male", "female", "not known"),
    _number("height", "Height", P, u.CENTIMETRE, (50, 250), (130, 210)),
    _number("weight", "Weight", P, u.KILOGRAM, (20, 400), (35, 250), 1),
    _number("usual_paco2", "Usual PaCO2", P, u.MMHG_GAS, (5, 250), (30, 90)),
    _words("home_support", "Home support or oxygen", P),
    _number("target_spo2_low", "SpO2 target, low", P, u.PERCENT, (60, 100), (84, 96)),
    _number("target_spo2_high", "SpO2 target, high", P, u.PERCENT, (60, 100), (88, 100)),
    _choice("ceiling_of_care", "Ceiling of care", P, *CEILINGS),
    _choice("resuscitation", "Resuscitation decision", P, *RESUSCITATION),
    _words("contact", "Responsible clinician", P),
    _number("sofa", "SOFA", P, u.POINTS, (0, 24)),
    _number("apache", "APACHE II", P, u.POINTS, (0, 71)),
    _choice("immunosuppression", "Immunosuppression", P, *YES_NO),
    _choice("septic_shock", "Septic shock", P, *YES_NO),
    _choice("pulmonary_ards", "Pulmonary ARDS", P, *YES_NO),
    _choice("pneumonia", "Pneumonia", P, *YES_NO),
    _choice("spo2_scale", "NEWS2 SpO2 scale", P, "1", "2"),
    _choice("chest_film", "Chest film seen", P, *YES_NO),
    _choice("pneumothorax", "Undrained pneumothorax", P, *YES_NO),
    _choice("facial_injury", "Facial deformity or burns", P, *YES_NO),
    _choice("airway_obstruction", "Fixed upper airway obstruction", P, *YES_NO),
    _choice("confused", "Confusion or agitation", P, *YES_NO),
    _choice("cognitive_impairment", "Cognitive impairment", P, *YES_NO),
    _choice("treated_first", "Best treatment and controlled oxygen first", P, *YES_NO),
    _choice("monitoring", "Continuous monitoring in place", P, *YES_NO),
    _choice("support_reason", "Why support is low", P, "titrating", "not tolerated", "aim reached", "other"),
    _words("feeding", "Feeding", P),
    _words("isolation", "Isolation", P),
    _words("plan", "Plan", P),
    _words("agreed_with", "Agreed with", P),
    _words("breaks_and_night", "Breaks and night", P),
    _words("jobs", "Jobs not done", P),
    _words("handover_remark", "Handover remark", P),
    _words("identifier", "Identifier in other systems", P),
)

_SETTING = (
    _choice("mode", "Mode", S, *MODES),
    _number("ipap", "IPAP", S, u.CMH2O, (2, 60), (6, 30), 1, ("i",)),
    _number("epap", "EPAP", S, u.CMH2O, (0, 30), (3, 12), 1, ("e",)),
    _number("cpap", "CPAP", S, u.CMH2O, (0, 30), (4, 15), 1),
    _number("fio2", "FiO2", S, u.FRACTION, (0.21, 1.0), None, 2),
    _number("o2_flow", "Oxygen flow", S, u.L_PER_MIN, (0, 80), None, 1, ("flow",)),
    _number("rate_set", "Backup rate", S, u.PER_MIN, (0, 60), (8, 25), 0, ("br", "backup")),
    _number("ti", "Inspiratory time", S, u.SECONDS, (0.2, 4), (0.6, 1.8), 2),
    _number("rise", "Rise time", S, u.SECONDS, (0, 1.5), None, 2),
    _words("device", "Device", S),
    _choice("interface", "Interface", S, *INTERFACES, open_choice=True),
    _words("interface_size", "Interface size", S),
    _choice("humidifier", "Humidifier", S, "on", "off"),
    _choice("leak_definition", "Leak is", S, *LEAK_DEFINITIONS),
)

_VITAL = (
    _number("rr", "Respiratory rate", V, u.PER_MIN, (0, 120), (8, 40), 0, ("resp",)),
    _number("hr", "Heart rate", V, u.PER_MIN, (0, 350), (40, 150), 0, ("pulse",)),
    _number("spo2", "SpO2", V, u.PERCENT, (30, 100), (85, 100), 0, ("sat", "sats")),
    _number("sbp", "Systolic blood pressure", V, u.MMHG_BLOOD, (20, 320), (80, 220), 0, ("bp",)),
    _number("dbp", "Diastolic blood pressure", V, u.MMHG_BLOOD, (10, 220), (40, 130)),
    _number("gcs", "GCS", V, u.POINTS, (3, 15)),
    _choice("acvpu", "ACVPU", V, "alert", "confusion", "voice", "pain", "unresponsive"),
    _number("temp", "Temperature", V, u.CELSIUS, (25, 45), (34, 40.5), 1),
    _number("dyspnoea", "Dyspnoea", V, u.POINTS, (0, 10)),
    _choice("accessory_muscle_use", "Accessory muscle use", V, "none", "mild", "moderate", "marked"),
    _choice("comfort", "Comfort", V, "good", "fair", "poor", "not tolerated"),
)

_GAS = (
    _choice("site", "Sample site", G, *SITES),
    _number("ph", "pH", G, u.PH, (6.5, 8.0), (7.0, 7.6), 2),
    _number("paco2", "PaCO2", G, u.MMHG_GAS, (5, 250), (25, 120), 0, ("pco2", "co2")),
    _number("pao2", "PaO2", G, u.MMHG_GAS, (10, 700), (40, 200), 0, ("po2",)),
    _number("hco3", "Bicarbonate", G, u.MMOL_L, (1, 80), (10, 50), 1, ("bic", "bicarb")),
    _number("be", "Base excess", G, u.MMOL_L, (-40, 40), (-20, 25), 1),
    _number("lactate", "Lactate", G, u.MMOL_L, (0, 40), (0, 10), 1, ("lac",)),
    _number("hb", "Haemoglobin", G, u.G_L, (10, 300), (50, 220)),
    _number("sao2", "SaO2", G, u.PERCENT, (10, 100), (70, 100), 1),
    _number("gas_fio2", "FiO2 on the gas", G, u.FRACTION, (0.21, 1.0), None, 2),
)

_DEVICE = (
    _number("vte", "Tidal volume, expired", D, u.ML, (0, 3000), (100, 1500), 0, ("vt",)),
    _number("mv", "Minute ventilation", D, u.L_PER_MIN, (0, 80), (2, 30), 1),
    _number("leak", "Leak", D, u.L_PER_MIN, (0, 300), (0, 120)),
    _number("pip", "Peak pressure", D, u.CMH2O, (0, 80), (4, 40), 1),
    _number("rr_total", "Respiratory rate, device", D, u.PER_MIN, (0, 120), (8, 45)),
    _number("spont_percent", "Breaths triggered", D, u.PERCENT, (0, 100)),
)

_EVENT = tuple(
    _words(key, name, E, Kind.MARK)
    for key, name in (
        ("gas_sent", "Gas sent"), ("vomiting", "Vomiting"), ("secretions", "Secretions"),
        ("agitation", "Agitation"), ("mask_on", "Mask on"), ("mask_off", "Mask off"),
        ("mask_adjusted", "Mask adjusted"), ("mask_changed", "Mask changed"), ("skin_check", "Skin checked"),
        ("break_start", "Break started"), ("break_end", "Break ended"), ("alarm", "Alarm"),
        ("review", "Reviewed"), ("checked_no_change", "Checked, no change"), ("told", "Told"),
        ("drug", "Drug given"), ("note", "Note"), ("proned", "Proned"), ("apnoea", "Apnoea"),
        ("arrest", "Arrest"), ("intubated", "Intubated"), ("stopped", "Support stopped"),
    )
)  # fmt: skip

CHANNELS: Mapping[str, Channel] = MappingProxyType(
    {c.key: c for c in (*_PROFILE, *_SETTING, *_VITAL, *_GAS, *_DEVICE, *_EVENT)}
)


def channel(key: str) -> Channel:
    """The channel of that key.

    Raises:
        RecordError: `channel.unknown`, with the keys that are near.

    >>> channel("ipap").unit
    'cmH2O'
    """
    found = CHANNELS.get(key)
    if found is None:
        raise refuse(
            "channel.unknown", channel=key, accepted=", ".join(_near(key)) or "the key of a channel, e.g. ipap"
        )
    return found


def _near(word: str) -> tuple[str, ...]:
    """The keys that a word that is no key may mean: by their own spelling, short words and names."""
    from difflib import get_close_matches

    words = {w: c.key for c in CHANNELS.values() for w in (*c.short, c.name.lower().replace(" ", "_"), c.key)}
    return tuple(dict.fromkeys(words[w] for w in get_close_matches(word.lower().replace(" ", "_"), words, 4, 0.7)))


def by_group(group: Group) -> tuple[Channel, ...]:
    """All channels of a group, in the registry's order."""
    return tuple(c for c in CHANNELS.values() if c.group is group)
