"""A replay in words and as JSON: when each flag would have been raised, how many, and against what outcome."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass
from typing import Any

from app.look.formats import fixed, wall
from app.look.theme import Tier, tier_word
from app.operations.replay import ReplayAnswer
from app.session.shift import shift_of
from app.telling.finding_names import marker_name
from app.telling.undone import undone_word
from app.words import Reader
from core.figures.replay import MarkerCount, ReplayedFlag
from core.figures.replay_summary import Load, ReplayedEpisode, by_marker, by_outcome, load_of
from core.judgement.policy import Policy
from core.record.instant import Instant, iso

LETTERS = "AB"
MOSTLY = 0.5
"""Share of entries recorded late from which a replay is said to be able to tell little."""


@dataclass(frozen=True, slots=True)
class NamedPolicy:
    """A policy that is replayed: where it comes from, its text, and what it says."""

    where: str
    text: str
    policy: Policy

    @property
    def called(self) -> str:
        """Where it comes from, its name, version and hash."""
        p = self.policy
        return f"{self.where}: {p.name}, version {p.version}, SHA-256 {p.hash[:16]}"


def per_shift(answer: ReplayAnswer, zone: str) -> dict[Instant, list[int]]:
    """Flags raised in each shift under each policy, by the shift's start; shifts without any are told as 0."""
    found: dict[Instant, list[int]] = {}
    n = len(answer.request.policies)
    for episode in answer.episodes:
        at = episode.begun
        while at < episode.until:
            shift = shift_of(at, zone)
            found.setdefault(shift.start, [0] * n)
            at = shift.end
        for p, flags in enumerate(episode.flags):
            for flag in flags:
                found.setdefault(shift_of(flag.raised_at, zone).start, [0] * n)[p] += 1
    return dict(sorted(found.items()))


# as text


def as_text(answer: ReplayAnswer, policies: Sequence[NamedPolicy], reader: Reader) -> str:
    """Everything, table under table; two policies stand side by side."""
    if not answer.episodes:
        return "No episode lies inside the span: nothing to replay."
    blocks = [
        _head(answer, policies, reader), _raised(answer, reader), _markers(answer), _loads(answer),
        _shifts(answer, reader), _outcomes(answer),
    ]  # fmt: skip
    return "\n\n".join(blocks)


def _head(answer: ReplayAnswer, policies: Sequence[NamedPolicy], reader: Reader) -> str:
    episodes = answer.episodes
    hours = sum(e.hours for e in episodes)
    start, end = min(e.begun for e in episodes), max(e.until for e in episodes)
    known = "as if recorded when it happened" if answer.request.at_once else "as known at each moment"
    lines = [f"{letter}  {p.called}" for letter, p in zip(LETTERS, policies, strict=False)]
    lines.append(f"{len(episodes)} episode(s), {fixed(hours, 1)} episode-hours, {wall(start, reader.zone)} to "
                 f"{wall(end, reader.zone)}, {known}; device samples count as known when measured.")  # fmt: skip
    late = [e.episode for e in episodes if e.late > MOSTLY]
    if late and not answer.request.at_once:
        lines.append(f"Recorded mostly a day or more afterwards, so little was known in time: {', '.join(late)}. "
                     "See --known-when-it-happened.")  # fmt: skip
    return "\n".join(lines)


def _raised(answer: ReplayAnswer, reader: Reader) -> str:
    heads: tuple[str, ...] = ("Episode", "Raised", "Met since", "Flag", "Tier", "Until")
    if _two(answer):
        heads = ("By", *heads)
    rows = []
    for episode in answer.episodes:
        for by, flag in _merged(episode):
            row = (episode.label, wall(flag.raised_at, reader.zone), wall(flag.since, reader.zone),
                   marker_name(flag.marker), _tier(flag.tier), _ended(flag, reader))  # fmt: skip
            rows.append((by, *row) if _two(answer) else row)
    if not rows:
        return "No flag would have been raised."
    return "When each flag would have been raised\n" + table(heads, rows)


def _merged(episode: ReplayedEpisode) -> Iterator[tuple[str, ReplayedFlag]]:
    """The flags in order of raising; one that both policies raise alike stands once."""
    order: dict[tuple[Any, ...], list[Any]] = {}
    for n, flags in enumerate(episode.flags):
        for flag in flags:
            same = (flag.raised_at, flag.marker, flag.since, flag.tier, flag.ended_at, flag.undone)
            order.setdefault(same, ["", flag])[0] += LETTERS[n]
    for key in sorted(order, key=lambda k: (k[0], k[1], k[2])):
        by, flag = order[key]
        yield by, flag


def _ended(flag: ReplayedFlag, reader: Reader) -> str:
    if flag.ended_at is None:
        return "stands"
    undone = f" ({undone_word()})" if flag.undone else ""
    return wall(flag.ended_at, reader.zone) + undone


def _markers(answer: ReplayAnswer) -> str:
    n = len(answer.request.policies)
    heads = ["Flag"]
    for letter in _letters(n):
        heads += [f"Tier{letter}", f"Raised{letter}", f"Episodes{letter}"]
    heads += ["Difference"] if n == 2 else []
    rows = []
    for found in by_marker(answer.episodes, n):
        row = [marker_name(found.marker)]
        for count in found.counts:
            row += ["-", "0", "0"] if count is None else [_tier(count.tier), str(count.raised), str(count.episodes)]
        if n == 2:
            row.append(f"{_raised_of(found.counts[1]) - _raised_of(found.counts[0]):+d}")
        rows.append(tuple(row))
    return "How often\n" + (table(tuple(heads), rows) if rows else "never")


def _raised_of(count: MarkerCount | None) -> int:
    return 0 if count is None else count.raised


def _loads(answer: ReplayAnswer) -> str:
    n = len(answer.request.policies)
    loads = [load_of(answer.episodes, p) for p in range(n)]
    heads = ("Flags", *(x.strip() or "Count" for x in _letters(n)))
    rows = [("in all", *(str(x.raised) for x in loads))]
    rows += [(_tier(t), *(str(dict(x.by_tier)[t]) for x in loads)) for t in ("escalate", "concern", "remark")]
    rows += [(undone_word(), *(str(x.undone) for x in loads)), ("per episode-hour", *map(_rate, loads))]
    return table(heads, rows)


def _rate(load: Load) -> str:
    return "-" if load.per_hour is None else fixed(load.per_hour, 3)


def _shifts(answer: ReplayAnswer, reader: Reader) -> str:
    n = len(answer.request.policies)
    heads = ("Shift from", *(f"Raised{x}" for x in _letters(n)))
    rows = [(wall(at, reader.zone), *map(str, counts)) for at, counts in per_shift(answer, reader.zone).items()]
    return table(heads, rows)


def _outcomes(answer: ReplayAnswer) -> str:
    n = len(answer.request.policies)
    heads = ["Outcome as logged", "Episodes", "Hours"]
    for x in _letters(n):
        heads += [f"Flags{x}", f"Escalated before the end{x}", f"Median lead{x}"]
    rows = []
    for found in by_outcome(answer.episodes, n):
        row = [found.outcome, str(found.episodes), fixed(found.hours, 1)]
        for p in range(n):
            lead = found.lead_h[p]
            row += [str(found.raised[p]), f"{found.escalated[p]} of {found.episodes}",
                    "-" if lead is None else f"{fixed(lead, 1)} h"]  # fmt: skip
        rows.append(tuple(row))
    return table(tuple(heads), rows)


def _letters(n: int) -> tuple[str, ...]:
    return ("",) if n == 1 else tuple(f" {x}" for x in LETTERS[:n])


def _two(answer: ReplayAnswer) -> bool:
    return len(answer.request.policies) == 2


def _tier(tier: str) -> str:
    return tier_word(Tier(tier))


def table(heads: Sequence[str], rows: Sequence[Sequence[str]]) -> str:
    """A table in plain text; columns of numbers stand to the right.

    >>> print(table(("Flag", "Raised"), [("a", "3"), ("bcdefg", "12")]))
    Flag    Raised
    a            3
    bcdefg      12
    """
    widths = [max(len(h), *(len(r[i]) for r in rows)) if rows else len(h) for i, h in enumerate(heads)]
    right = [bool(rows) and all(_is_number(r[i]) for r in rows) for i in range(len(heads))]
    lines = []
    for row in (heads, *rows):
        cells = (c.rjust(w) if to_right else c.ljust(w) for c, w, to_right in zip(row, widths, right, strict=True))
        lines.append("  ".join(cells).rstrip())
    return "\n".join(lines)


def _is_number(text: str) -> bool:
    return text == "-" or text.lstrip("+-").replace(".", "", 1).isdigit()


# as JSON


def as_json(answer: ReplayAnswer, policies: Sequence[NamedPolicy], reader: Reader) -> dict[str, Any]:
    """The same for programs; times ISO 8601 in UTC."""
    n, episodes = len(policies), answer.episodes
    return {
        "policies": [{"from": p.where, "name": p.policy.name, "version": p.policy.version, "hash": p.policy.hash}
                     for p in policies],
        "known_when_it_happened": answer.request.at_once,
        "episodes": [_episode_json(e) for e in episodes],
        "markers": [{"marker": m.marker, "raised": [_raised_of(c) for c in m.counts],
                     "episodes": [0 if c is None else c.episodes for c in m.counts],
                     "tier": [None if c is None else c.tier for c in m.counts]} for m in by_marker(episodes, n)],
        "load": [_load_json(load_of(episodes, p)) for p in range(n)],
        "shifts": [{"from": iso(at), "raised": counts} for at, counts in per_shift(answer, reader.zone).items()],
        "outcomes": [{"outcome": o.outcome, "episodes": o.episodes, "hours": round(o.hours, 3),
                      "raised": list(o.raised), "escalated_before_end": list(o.escalated),
                      "median_lead_h": [None if x is None else round(x, 3) for x in o.lead_h]}
                     for o in by_outcome(episodes, n)],
    }  # fmt: skip


def _load_json(load: Load) -> dict[str, Any]:
    rate = None if load.per_hour is None else round(load.per_hour, 6)
    return {"episode_hours": round(load.hours, 3), "raised": load.raised, "by_tier": dict(load.by_tier),
            "undone": load.undone, "per_episode_hour": rate}  # fmt: skip


def _episode_json(episode: ReplayedEpisode) -> dict[str, Any]:
    return {
        "episode": episode.episode, "label": episode.label, "from": iso(episode.begun), "to": iso(episode.until),
        "hours": round(episode.hours, 3), "outcome": episode.outcome,
        "ended_at": None if episode.ended_at is None else iso(episode.ended_at),
        "recorded_late_share": round(episode.late, 3),
        "flags": [[_flag_json(f) for f in flags] for flags in episode.flags],
    }  # fmt: skip


def _flag_json(flag: ReplayedFlag) -> dict[str, Any]:
    return {"flag_id": flag.flag_id, "marker": flag.marker, "group": flag.group, "tier": flag.tier,
            "since": iso(flag.since), "raised_at": iso(flag.raised_at),
            "ended_at": None if flag.ended_at is None else iso(flag.ended_at), "undone": flag.undone}  # fmt: skip
