"""When a gas is due, once more from the rules' text alone; beside `plain_rules`."""

from __future__ import annotations

from dataclasses import dataclass

from tests.support.plain_anchors import Anchor, anchors, moves
from tests.support.plain_record import Log
from tests.support.plain_rules import near


@dataclass
class Due:
    since: int
    until: int
    state: str


def amount(log: Log, key: str, anchor: Anchor) -> float:
    """By how much an anchor's steps moved a number in all; what was not known on one side moved nothing."""
    total = 0.0
    for m in moves(log):
        if anchor.first <= m.at <= anchor.at:
            was, now = m.was[key], m.now[key]
            if isinstance(was, (int, float)) and isinstance(now, (int, float)):
                total += now - was
    return total


def worse_after_break(log: Log, anchor: Anchor) -> bool:
    start = next((a for a, b in log.breaks if b == anchor.first), None)
    if start is None:
        return False
    rates = near(log, "rr", start, -(10**6), start), near(log, "rr", anchor.first, start, anchor.first + 30)
    spo2 = near(log, "spo2", start, -(10**6), start), near(log, "spo2", anchor.first, start, anchor.first)
    if rates[0] is not None and rates[1] is not None and rates[1] - rates[0] > 6:
        return True
    return spo2[0] is not None and spo2[1] is not None and spo2[0] - spo2[1] > 4


def asks(log: Log, anchor: Anchor) -> bool:
    """Whether an anchor needs a gas."""
    if anchor.kind == "start":
        return True
    known = [g for g in log.gases if g.counts and g.ph is not None and g.at <= anchor.first]
    acidotic = bool(known) and (known[-1].ph or 9) < 7.35
    if anchor.kind == "break_end":
        return acidotic or worse_after_break(log, anchor)
    steps = {m.at for m in moves(log) if anchor.first <= m.at <= anchor.at and m.parts}
    if acidotic or len(steps) > 1 or "mode" in anchor.parts or abs(amount(log, "ps", anchor)) >= 2:
        return True
    raised = round(amount(log, "fio2", anchor), 6)
    with_pf = [g for g in log.gases if g.counts and g.pf is not None and g.at <= anchor.first]
    if raised >= 0.10 and with_pf and with_pf[-1].hypoxaemic:
        return True
    if "oxygen" not in anchor.parts or not log.at_risk:
        return False
    untold = any(
        (m.was["fio2"] is None) is not (m.now["fio2"] is None)
        for m in moves(log) if anchor.first <= m.at <= anchor.at and "oxygen" in m.parts
    )  # fmt: skip
    return untold or raised >= 0.04 or round(amount(log, "flow", anchor), 6) >= 1


def gas_due(log: Log) -> Due | None:
    """The gas that is still due. A later anchor takes its place and keeps its latest time."""
    pending: Due | None = None
    found = anchors(log)
    first_entry = min((m for m, c, _ in log.rows if c not in PROFILE), default=0)
    for i, anchor in enumerate(found):
        if pending is not None:
            pending = Due(anchor.at + 30, pending.until, "")
        elif asks(log, anchor):
            pending = Due(anchor.at + 30, max(anchor.at + 120, first_entry + 30), "")
        if pending is None:
            continue
        until = found[i + 1].first if i + 1 < len(found) else 10**6
        for gas in log.gases:
            measured = gas.ph is not None or gas.paco2 is not None
            if gas.counts and measured and not gas.off and pending is not None and pending.since <= gas.at <= until:
                pending = None
    if pending is None or (log.end is not None and log.end <= log.as_of):
        return None
    sent = [m for m, _ in log.all("gas_sent") if m >= pending.since]
    waiting = bool(sent) and log.as_of - sent[-1] <= 60
    late, soon = log.as_of > pending.until, log.as_of >= pending.until - 15
    state = "awaiting result" if waiting else "overdue" if late else "soon" if soon else "open"
    return Due(min(pending.since, pending.until), pending.until, state)


PROFILE = ("indication", "sofa", "pneumonia", "spo2_scale")
