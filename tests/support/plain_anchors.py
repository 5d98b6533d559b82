"""What changed and when: the moments whose effect is judged, once more from the rules' text alone."""

from __future__ import annotations

from dataclasses import dataclass, field

from tests.support.plain_record import BILEVEL, NUMERIC, Log

PRESSURES = ("ipap", "epap", "cpap", "mode")
WITH_A_RATE = ("BPAP-ST", "BPAP-T", "pressure control", "volume-assured")


@dataclass
class Anchor:
    kind: str
    first: int
    at: int
    effects: set[str] = field(default_factory=set)
    parts: set[str] = field(default_factory=set)
    running_before: bool = False


def in_force(log: Log, at: int) -> dict[str, float | str | None]:
    """What the machine gives: the kind of support, its pressures, oxygen, rate, inspiratory time, interface."""
    mode, ipap, cpap = log.last("mode", at), log.number("ipap", at), log.number("cpap", at)
    one = mode == "CPAP" or (mode is None and ipap is None and cpap is not None)
    two = mode in BILEVEL or (mode is None and ipap is not None)
    epap = log.number("epap", at)
    low = (epap if cpap is None else cpap) if one else epap if two else None
    support: float | None = 0 if one or mode else None
    if two:
        support = None if ipap is None or epap is None else ipap - epap
    oxygen = log.fio2(at)
    return {
        "kind": "one" if one else "two" if two else mode, "mode": mode, "ipap": ipap if two else None,
        "ps": support, "low": low, "fio2": oxygen, "flow": log.flow(at) if oxygen is None else None,
        "rate_set": log.number("rate_set", at), "ti": log.number("ti", at), "interface": log.last("interface", at),
    }  # fmt: skip


Given = dict[str, float | str | None]


def moved(was: Given, now: Given, key: str) -> bool:
    """A value written down for the first time is no change."""
    return was[key] is not None and now[key] is not None and was[key] != now[key]


def parts_changed(was: Given, now: Given) -> set[str]:
    """Which parts of what is given became another."""
    out = set()
    if moved(was, now, "kind") or moved(was, now, "mode"):
        out.add("mode")
    if not moved(was, now, "kind") and (moved(was, now, "ipap")):
        out.add("ipap")
    if moved(was, now, "low"):
        out.add("low")
    known = [s["fio2"] is not None or s["flow"] is not None for s in (was, now)]
    if all(known) and (was["fio2"], was["flow"]) != (now["fio2"], now["flow"]):
        out.add("oxygen")
    return out | {k for k in ("rate_set", "ti", "interface") if moved(was, now, k)}


def acts_on(log: Log, at: int, parts: set[str], was: Given, now: Given) -> set[str]:
    """Which of CO2 and oxygen a change of these parts can act on."""
    out = set()
    if parts & {"mode", "ti", "interface"} or (parts & {"ipap", "low"} and moved(was, now, "ps")):
        out.add("co2")
    high_flow = "mode" in parts and "high-flow nasal" in (was["mode"], now["mode"])
    if parts & {"low", "oxygen", "interface"} or high_flow:
        out.add("oxygen")
    if "rate_set" in parts and now["mode"] in (*WITH_A_RATE, None):
        own = [float(v) for m, v in log.all("rr") if at - 30 <= m <= at]
        highest = max(float(was["rate_set"] or 0), float(now["rate_set"] or 0))
        if now["mode"] == "BPAP-T" or not own or highest >= own[-1]:
            out.add("co2")
    return out


def value_of(state: Given, part: str) -> object:
    if part == "oxygen":
        return state["fio2"], state["flow"]
    return (state["kind"], state["mode"], state["ps"]) if part == "mode" else state[part]


@dataclass
class Moved:
    at: int
    parts: set[str]
    was: Given
    now: Given
    long_break: bool


def moves(log: Log) -> list[Moved]:
    """Every minute at which what the patient gets became another. What is set in a break counts from its end."""
    start = log.start
    assert start is not None
    ends = {b: b - a for a, b in log.breaks if b is not None}
    logged = {m for m, c, _ in log.rows if c in (*NUMERIC, "mode", "interface")} | set(ends)
    minutes = [m for m in sorted(logged) if start < m and (log.end is None or m < log.end)]
    minutes = [m for m in minutes if not any(a <= m and (b is None or m < b) for a, b in log.breaks)]
    out = []
    for before, at in zip([start, *minutes], minutes, strict=False):
        was, now = in_force(log, before), in_force(log, at)
        out.append(Moved(at, parts_changed(was, now), was, now, ends.get(at, 0) >= 30))
    return without_undone(out)


def without_undone(found: list[Moved]) -> list[Moved]:
    """A change undone within 10 min is no anchor; what it went through meanwhile goes with it."""
    for j, later in enumerate(found):
        for part in sorted(later.parts):
            for i in range(j):
                back = found[i]
                if part not in back.parts or later.at - back.at > 10:
                    continue
                if value_of(back.was, part) == value_of(later.now, part):
                    for k in range(i, j + 1):
                        found[k].parts.discard(part)
                    break
    return found


def anchors(log: Log) -> list[Anchor]:
    """Start, chains of changes, and the ends of breaks of 30 min or more."""
    if log.start is None:
        return []
    out = [Anchor("start", log.start, log.start, {"co2", "oxygen"}, {"start"}, not log.start_seen)]
    for move in moves(log):
        acts = {"co2", "oxygen"} if move.long_break else acts_on(log, move.at, move.parts, move.was, move.now)
        if not acts:
            continue
        kind = "break_end" if move.long_break else "interface" if move.parts == {"interface"} else "change"
        parts = move.parts | ({"break"} if move.long_break else set())
        chain = out[-1]
        if chain.running_before or move.at - chain.at > 20 or move.at - chain.first > 60:
            out.append(Anchor(kind, move.at, move.at, acts, parts))
        else:
            chain.at, chain.effects, chain.parts = move.at, chain.effects | acts, chain.parts | parts
            chain.kind = "change" if chain.kind == "interface" != kind else chain.kind
    return out
