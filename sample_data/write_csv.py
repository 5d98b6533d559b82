"""Writes the log format: a header and one row per value, long form, UTF-8, line ends LF."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterable
from datetime import datetime, timedelta

from sample_data.bedside import Row
from sample_data.cohort import SimulatedEpisode
from sample_data.night_shift import INVENTED, Bed

HEADER = ("episode", "at", "channel", "value", "unit", "by", "note")
LEAK_HEADER = (*HEADER, "leak_definition")


def as_text(header: tuple[str, ...], rows: Iterable[tuple[str, ...]]) -> str:
    """The text of one file."""
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\n")
    writer.writerow(header)
    writer.writerows(rows)
    return out.getvalue()


def profile_rows(bed: Bed, episode: SimulatedEpisode) -> list[Row]:
    """What is known of the person, logged when the record begins."""
    case = episode.case
    person, patient = case.person, case.patient
    at = case.script.logged_from
    by = case.script.in_order()[0].by or "MO"
    start = bed.started
    facts: list[tuple[str, str, str]] = [
        ("label", bed.label, ""), ("location", bed.location, ""), ("age", f"{patient.age:.0f}", ""),
        ("sex", person.sex, ""), ("height", f"{person.height:.0f}", "cm"), ("weight", f"{patient.weight:.0f}", "kg"),
        ("indication", person.indication, ""), ("target_spo2_low", f"{person.target[0]}", "%"),
        ("target_spo2_high", f"{person.target[1]}", "%"), ("ceiling_of_care", person.ceiling, ""),
        ("resuscitation", person.resuscitation, ""), ("contact", bed.contact, ""),
        ("home_support", person.home_support, ""),
    ]  # fmt: skip
    if person.usual_known:
        facts.append(("usual_paco2", *_pressure(patient.usual, case.script.pressure_unit)))
    if person.sofa is not None:
        facts.append(("sofa", f"{person.sofa}", ""))
    if case.script.logged_from <= 0:
        facts += [
            ("arrived_at", _iso(start - timedelta(minutes=85)), ""),
            ("decided_at", _iso(start - timedelta(minutes=8)), ""),
            ("started_at", _iso(start), ""),
        ]
    facts += [(channel, text, "") for channel, text in bed.facts]
    return [Row(at, c, v, u, by, INVENTED if i == 0 else "") for i, (c, v, u) in enumerate(facts)]


def _pressure(mmhg: float, unit: str) -> tuple[str, str]:
    return (f"{mmhg / 7.50062:.1f}", "kPa") if unit == "kPa" else (f"{mmhg:.0f}", "mmHg")


def _iso(moment: datetime) -> str:
    return moment.isoformat(timespec="seconds")


def cells(bed: Bed, row: Row) -> tuple[str, ...]:
    """A row with its episode and time."""
    at = _iso(bed.started + timedelta(minutes=row.minute))
    return (bed.key, at, row.channel, row.value, row.unit, row.by, row.note)


def notes_text(night: Iterable[tuple[Bed, SimulatedEpisode]]) -> str:
    """`notes.csv`: everything typed by people, by time."""
    rows = [cells(bed, row) for bed, e in night for row in (*profile_rows(bed, e), *e.typed())]
    return as_text(HEADER, sorted(rows, key=lambda r: r[1]))


def device_text(bed: Bed, episode: SimulatedEpisode) -> str:
    """`device-*.csv`: what the machines of one episode wrote; only leak says how it is defined."""
    definition = episode.case.script.leak_definition
    rows = [(*cells(bed, row), definition if row.channel == "leak" else "") for row in episode.device()]
    return as_text(LEAK_HEADER, rows)
