"""Shift figures as measures in words: one list for the table, the text and the CSV, so that they cannot differ."""

from __future__ import annotations

import csv
import io
from collections.abc import Iterator
from dataclasses import dataclass

from app.look.formats import fixed, hours, minutes, trimmed, wall
from app.look.theme import Tier, tier_word, verdict_of, verdict_word
from app.policy.names import in_force
from app.telling.certainty import star_note, starred
from app.telling.finding_names import marker_name
from app.telling.phrases import translate
from app.words import Reader
from core.figures.ward_statistics import FlagCount, Waits, WardStatistics
from core.record.local_time import zoned_iso
from storage.apostrophe import guarded

CSV_HEADER = ("from", "to", "group", "measure", "value", "unit", "of", "note", "source")
_TIERS = ("escalate", "concern", "remark")


@dataclass(frozen=True, slots=True)
class Measure:
    """One number: its group and name, value and unit, of how many where it is a part, and what must be said beside.

    `value` None: there is nothing to count, `note` says why.
    """

    group: str
    name: str
    value: float | None
    unit: str = ""
    of: int | None = None
    note: str = ""
    source: str = ""
    """Where a limit comes from, and how sure it is."""

    @property
    def beside(self) -> str:
        """What is said beside it: the note, then the source."""
        return ". ".join(x for x in (self.note, self.source) if x)

    @property
    def shown(self) -> str:
        """The value as people read it: `3 of 5 (60 %)`, `45 min`, `31 h 30 min`."""
        if self.value is None:
            return translate("statistics", "not known")
        if self.unit == "min":
            return minutes(self.value)
        if self.unit == "h":
            return hours(self.value)
        if self.of is None:
            return trimmed(self.value)
        share = f" ({fixed(100 * self.value / self.of, 0)} %)" if self.of else ""
        return f"{trimmed(self.value)} of {self.of}{share}"


def clock_name(key: str) -> str:
    """What a clock to the start of support is called."""
    return {
        "gas_to_start": translate("statistics", "From the deciding gas to the start"),
        "decision_to_start": translate("statistics", "From the decision to the start"),
        "arrival_to_start": translate("statistics", "From arrival to the start"),
    }[key]


def measures(found: WardStatistics, reader: Reader) -> tuple[Measure, ...]:
    """Every figure of a span in order."""
    return (*_episodes(found), *_starts(found), *_gases(found), *_responses(found), *_flags(found, reader))


def _episodes(s: WardStatistics) -> Iterator[Measure]:
    group = translate("statistics", "Episodes")
    yield Measure(group, translate("statistics", "On the ward"), s.episodes)
    yield Measure(group, translate("statistics", "Support started"), s.starts)
    ends = ", ".join(f"{why} {count}" for why, count in sorted(s.ends.items()))
    yield Measure(group, translate("statistics", "Support ended"), sum(s.ends.values()), note=ends)
    share = ""
    if s.hours_possible:
        share = translate("statistics", "{share} % of the hours between start and end of support").format(
            share=fixed(100 * s.hours_on_mask / s.hours_possible, 0))  # fmt: skip
    yield Measure(group, translate("statistics", "Hours on the mask"), s.hours_on_mask, "h", note=share)


def _starts(s: WardStatistics) -> Iterator[Measure]:
    group = translate("statistics", "Time to start")
    for key, limit in s.limits.items():
        waits, name = s.clocks[key], clock_name(key)
        yield Measure(group, translate("statistics", "{name}, median").format(name=name), waits.median, "min",
                      note=_beside(waits))  # fmt: skip
        within = translate("statistics", "{name}, within {limit}").format(name=name, limit=minutes(limit.value))
        value = waits.within if waits.known else None
        yield Measure(group, within, value, "", waits.known, "", f"{limit.source} ({limit.sure})")
    first = s.first_gas
    yield Measure(group, translate("statistics", "From the start to the first gas, median"), first.median, "min",
                  note=_beside(first))  # fmt: skip


def _beside(waits: Waits) -> str:
    parts = []
    if waits.known > 1:
        parts.append(translate("statistics", "{low} to {high}").format(
            low=minutes(waits.minutes[0]), high=minutes(waits.minutes[-1])))  # fmt: skip
    if waits.not_known:
        parts.append(translate("statistics", "not known for {count}").format(count=waits.not_known))
    if waits.backwards:
        parts.append(translate("statistics", "to check: {count} recorded as ending before it began").format(
            count=waits.backwards))  # fmt: skip
    return ", ".join(parts)


def _gases(s: WardStatistics) -> Iterator[Measure]:
    group, g, w = translate("statistics", "Gases"), s.gases, s.windows
    low, high = (trimmed(m) for m in s.window_min)
    inside = translate("statistics", "Taken inside a response window ({low} to {high} min)")
    rows = (
        (inside.format(low=low, high=high), g.in_window),
        (translate("statistics", "Early (under {low} min)").format(low=low), g.early),
        (translate("statistics", "Late (over {high} min)").format(high=high), g.late),
        (translate("statistics", "Not used for a verdict"), g.judges_none),
    )
    beside = translate("statistics", "arterial and capillary; venous beside them: {count}").format(count=g.venous)
    yield Measure(group, translate("statistics", "Gases"), g.total, note=beside)
    for name, count in rows:
        yield Measure(group, name, count, "", g.total)
    replaced = translate("statistics", "cut short by the next change or the end of support: {count}").format(
        count=w.replaced)  # fmt: skip
    counted = translate("statistics", "windows that ended in the span; responses are of changes made in it")
    note = f"{counted}; {replaced}" if w.replaced else counted
    yield Measure(
        group, translate("statistics", "Response windows answered by a gas"), w.answered, "", w.closed, note
    )


def _responses(s: WardStatistics) -> Iterator[Measure]:
    group, total = translate("statistics", "Responses"), sum(s.responses.values())
    for verdict, count in sorted(s.responses.items(), key=lambda x: (-x[1], x[0])):
        yield Measure(group, verdict_word(verdict_of(verdict)), count, "", total)
    if not total:
        yield Measure(group, translate("statistics", "Changes judged"), 0)


def ordered_flags(s: WardStatistics) -> list[tuple[str, FlagCount]]:
    """Markers with their counts, strongest and most frequent first."""
    return sorted(s.flags.items(), key=lambda x: (_TIERS.index(x[1].tier), -x[1].raised, x[0]))


def flag_name(marker: str, reader: Reader) -> str:
    """A marker's name, with a star where the policy in force has its threshold to be confirmed."""
    rule = in_force().markers.get(marker)
    return starred(marker_name(marker, reader), rule.sure if rule is not None else "")


def _flags(s: WardStatistics, reader: Reader) -> Iterator[Measure]:
    group = translate("statistics", "Flags")
    for marker, count in ordered_flags(s):
        name = f"{flag_name(marker, reader)} ({tier_word(Tier(count.tier))})"
        yield Measure(group, name, count.raised, note=_seen(count))
    if not s.flags:
        yield Measure(group, translate("statistics", "Flags raised"), 0)


def _seen(count: FlagCount) -> str:
    parts = []
    if count.seen.known and count.seen.median is not None:
        parts.append(translate("statistics", "seen {count}, after {time} (median)").format(
            count=count.seen.known, time=minutes(count.seen.median)))  # fmt: skip
    if count.seen.not_known:
        parts.append(translate("statistics", "not marked seen: {count}").format(count=count.seen.not_known))
    if count.settled:
        parts.append(translate("statistics", "settled: {count}").format(count=count.settled))
    return ", ".join(parts)


def as_text(found: WardStatistics, reader: Reader) -> str:
    """The figures as readable text."""
    lines = [translate("statistics", "Shift figures of the ward, {start} to {end}").format(
        start=wall(found.start, reader.zone), end=wall(found.end, reader.zone))]  # fmt: skip
    group = ""
    for m in measures(found, reader):
        if m.group != group:
            group = m.group
            lines += ["", group]
        lines.append(f"  {m.name}: {m.shown}" + "".join(f"; {x}" for x in (m.note, m.source) if x))
    return "\n".join([*lines, "", star_note()])


def as_csv(found: WardStatistics, reader: Reader) -> str:
    """The figures as CSV with a header; one row for each measure, the counts unrounded."""
    out = io.StringIO()
    writer = csv.writer(out, lineterminator="\r\n")
    writer.writerow(CSV_HEADER)
    span = zoned_iso(found.start, reader.zone), zoned_iso(found.end, reader.zone)
    for m in measures(found, reader):
        value = "" if m.value is None else f"{m.value:.6g}"
        of = "" if m.of is None else str(m.of)
        texts = guarded(m.group), guarded(m.name)
        writer.writerow((*span, *texts, value, m.unit, of, guarded(m.note), guarded(m.source)))
    return out.getvalue()


def as_json(found: WardStatistics, reader: Reader) -> dict[str, object]:
    """The figures as JSON values, waits as every length in minutes."""
    return {
        "from": zoned_iso(found.start, reader.zone), "to": zoned_iso(found.end, reader.zone),
        "episodes": found.episodes, "starts": found.starts, "ends": dict(found.ends),
        "hours_on_mask": found.hours_on_mask, "hours_possible": found.hours_possible,
        "clocks": {k: _waits(w) for k, w in found.clocks.items()}, "first_gas": _waits(found.first_gas),
        "gases": {"total": found.gases.total, "in_window": found.gases.in_window, "early": found.gases.early,
                  "late": found.gases.late, "judges_none": found.gases.judges_none, "venous": found.gases.venous},
        "windows": {"answered": found.windows.answered, "unanswered": found.windows.unanswered,
                    "replaced": found.windows.replaced},
        "responses": dict(found.responses),
        "flags": {k: {"tier": f.tier, "group": f.group, "raised": f.raised, "settled": f.settled, "ended": f.ended,
                      "seen": _waits(f.seen)} for k, f in ordered_flags(found)},
    }  # fmt: skip


def _waits(w: Waits) -> dict[str, object]:
    return {"minutes": list(w.minutes), "median_min": w.median, "limit_min": w.limit_min, "within": w.within,
            "not_known": w.not_known, "backwards": w.backwards}  # fmt: skip
