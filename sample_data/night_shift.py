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


@dataclass(frozen=True, slots=True)
class Bed:
    """One episode of the night: its key, its bed, what kind of case, and when support started."""

    key: str
    label: str
    location: str
    kind: str
    seed: int
    started: datetime
    contact: str = "on-call registrar, bleep 21"


def _at(day: int, hour: int, minute: int) -> datetime:
    return datetime(2026, 3, day, hour, minute, tzinfo=UTC)


BEDS = (
    Bed("N-0327-01", "Bed 1", "Respiratory high dependency", "prompt_responder", 3, _at(27, 21, 40)),
    Bed("N-0327-02", "Bed 2", "Respiratory high dependency", "slow_responder", 2, _at(27, 20, 50)),
    Bed("N-0327-03", "Bed 3", "Respiratory high dependency", "stable", 1, _at(27, 20, 5)),
    Bed("N-0327-04", "Bed 4", "Respiratory high dependency", "non_responder", 4, _at(28, 1, 35)),
    Bed("N-0327-05", "Bed 5", "Respiratory high dependency", "large_leak", 5, _at(28, 0, 20)),
    Bed("N-0327-06", "Bed 6", "Respiratory high dependency", "obesity_hypoventilation", 1, _at(27, 21, 15)),
    Bed("N-0327-07", "Bay A 1", "Acute ward, bay A", "hypoxaemic_failure", 2, _at(27, 23, 10)),
    Bed("N-0327-08", "Bay A 2", "Acute ward, bay A", "weaning", 1, _at(27, 20, 15)),
    Bed("N-0327-09", "Bay A 4", "Acute ward, bay A", "overdue_gas", 3, _at(28, 1, 10)),
    Bed("N-0327-10", "Bay B 3", "Acute ward, bay B", "kpa_ward", 2, _at(27, 22, 30)),
    Bed("N-0327-11", "Bay B 5", "Acute ward, bay B", "already_running", 1, _at(27, 17, 0)),
    Bed("N-0327-12", "Emergency 3", "Emergency department", "pulmonary_oedema", 4, _at(28, 2, 5)),
)


def minutes_to_clock(bed: Bed) -> int:
    """Minutes from the start of support to the moment that the demonstration shows."""
    return int((CLOCK - bed.started) / timedelta(minutes=1))


def simulate_night() -> list[tuple[Bed, SimulatedEpisode]]:
    """Simulate every bed up to the demonstration's moment."""
    return [(bed, simulate_cases([SCENARIOS[bed.kind](bed.seed, minutes_to_clock(bed))])[0]) for bed in BEDS]
