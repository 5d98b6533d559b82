"""The night of 27-Mar-2026 on an invented ward: which cases, in which beds, from when."""

from __future__ import annotations

from dataclasses import dataclass
from datetime import UTC, datetime, timedelta

from sample_data import DEMO_CLOCK
from sample_data.cohort import SCENARIOS, SimulatedEpisode, simulate_cases

SHIFT_FROM = datetime(2026, 3, 27, 19, 0, tzinfo=UTC)
SHIFT_TO = datetime(2026, 3, 28, 8, 0, tzinfo=UTC)
CLOCK = datetime.fromisoformat(DEMO_CLOCK)
INVENTED = "invented by a simulation; no real person"


Facts = tuple[tuple[str, str], ...]


@dataclass(frozen=True, slots=True)
class Bed:
    """One episode of the night: its key, its bed, what kind of case, when support started, and what else the
    notes say (`facts`: profile channel and text). `leak_is` is how this bed's machine defines leak."""

    key: str
    label: str
    location: str
    kind: str
    seed: int
    started: datetime
    contact: str
    facts: Facts = ()
    leak_is: str = "unintentional"


def _at(day: int, hour: int, minute: int) -> datetime:
    return datetime(2026, 3, day, hour, minute, tzinfo=UTC)


HIGH, ACUTE_A, ACUTE_B = "Respiratory high dependency", "Acute ward, bay A", "Acute ward, bay B"
CHEST, MEDICINE, EMERGENCY = (
    "respiratory registrar, bleep 21",
    "medical registrar, bleep 34",
    "emergency doctor, desk 2",
)

BEDS = (
    Bed("N-0327-01", "Bed 1", HIGH, "prompt_responder", 3, _at(27, 21, 40), CHEST,
        (("chest_film", "yes"), ("spo2_scale", "2"), ("plan", "Gas at 06:00, then first break after breakfast"))),
    Bed("N-0327-02", "Bed 2", HIGH, "slow_responder", 7, _at(27, 20, 50), CHEST,
        (("chest_film", "yes"), ("spo2_scale", "2"), ("feeding", "sips only"))),
    Bed("N-0327-03", "Bed 3", HIGH, "stable", 4, _at(27, 20, 5), CHEST,
        (("chest_film", "yes"), ("spo2_scale", "2")), "total"),
    Bed("N-0327-04", "Bed 4", HIGH, "non_responder", 27, _at(28, 1, 35), MEDICINE,
        (("chest_film", "yes"), ("isolation", "droplet, swab pending"),
         ("plan", "If pH is below 7.25 on the next gas: intensive care to see, as agreed with the registrar"))),
    Bed("N-0327-05", "Bed 5", HIGH, "large_leak", 5, _at(28, 0, 20), CHEST,
        (("chest_film", "yes"), ("spo2_scale", "2"), ("jobs", "ask for a smaller mask from the store"))),
    Bed("N-0327-06", "Bed 6", HIGH, "obesity_hypoventilation", 21, _at(27, 21, 15), CHEST, (("chest_film", "yes"),)),
    Bed("N-0327-07", "Bay A 1", ACUTE_A, "hypoxaemic_failure", 3, _at(27, 23, 10), MEDICINE,
        (("pneumonia", "yes"), ("immunosuppression", "no"), ("septic_shock", "no"), ("pulmonary_ards", "not known"),
         ("chest_film", "yes"), ("isolation", "droplet"))),
    Bed("N-0327-08", "Bay A 2", ACUTE_A, "weaning", 12, _at(27, 20, 15), MEDICINE,
        (("spo2_scale", "2"), ("feeding", "normal diet in breaks"), ("plan", "Off in the day, on at night"))),
    Bed("N-0327-09", "Bay A 4", ACUTE_A, "overdue_gas", 3, _at(28, 1, 10), MEDICINE,
        (("chest_film", "no"), ("jobs", "chest film not done"))),
    Bed("N-0327-10", "Bay B 3", ACUTE_B, "kpa_ward", 3, _at(27, 22, 30), MEDICINE, (("chest_film", "yes"),)),
    Bed("N-0327-11", "Bay B 5", ACUTE_B, "already_running", 3, _at(27, 17, 0), MEDICINE,
        (("plan", "Own mask and settings from home; assisted cough four-hourly"),)),
    Bed("N-0327-12", "Emergency 3", "Emergency department", "pulmonary_oedema", 9, _at(28, 2, 5), EMERGENCY,
        (("pneumonia", "no"), ("immunosuppression", "no"), ("septic_shock", "no"), ("pulmonary_ards", "no"),
         ("chest_film", "yes"))),
)  # fmt: skip


def minutes_to_clock(bed: Bed) -> int:
    """Minutes from the start of support to the moment that the demonstration shows."""
    return int((CLOCK - bed.started) / timedelta(minutes=1))


def simulate_night() -> list[tuple[Bed, SimulatedEpisode]]:
    """Simulate every bed up to the demonstration's moment."""
    night = []
    for bed in BEDS:
        case = SCENARIOS[bed.kind](bed.seed, minutes_to_clock(bed))
        case.script.leak_definition = bed.leak_is
        night.append((bed, simulate_cases([case])[0]))
    return night
