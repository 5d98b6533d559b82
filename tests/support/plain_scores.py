"""The scores and ratios once more, from the rules' text alone; as slow and plain as `plain_rules`."""

from __future__ import annotations

from dataclasses import dataclass, field
from itertools import product

from tests.support.plain_anchors import anchors, moves
from tests.support.plain_record import Gas, Log, half_up

Bounds = tuple[float | None, float, float]
FRESH = {"hr": 30, "rr": 30, "spo2": 30, "sbp": 30, "temp": 30, "gcs": 240}
OBSERVED = ("rr", "spo2", "hr", "sbp", "temp")


@dataclass
class Scored:
    """A score at a minute; `points` None where an input is missing, then the lowest and highest bound it."""

    at: int
    points: float | None
    lowest: float
    highest: float
    missing: set[str] = field(default_factory=set)


def walls(log: Log) -> list[int]:
    """The minutes that no input may come from across: changes, the start, and the edges of breaks."""
    if log.start is None:
        return sorted(e for pair in log.breaks for e in pair if e is not None)
    found = {log.start, *(m.at for m in moves(log) if m.parts or m.long_break)}
    found |= {a.at for a in anchors(log)} | {e for pair in log.breaks for e in pair if e is not None}
    return sorted(found)


def fresh(log: Log, channel: str, at: int) -> str | None:
    """The nearest value within its age, no wall between; what was seen in a wall's own minute was before it."""
    low = max((w for w in walls(log) if w < at), default=-(10**6))
    high = min((w for w in walls(log) if w >= at), default=10**6)
    found = [(abs(m - at), m, v) for m, v in log.all(channel) if low < m <= high and abs(m - at) <= FRESH[channel]]
    return min(found)[2] if found else None


def step(value: float, *edges: tuple[float, float]) -> float:
    """The points of the first edge that the value does not pass; the last entry is for what passes all."""
    return next(points for top, points in edges if value <= top)


INF = float("inf")


def hr_points(hr: float) -> float:
    return 1 if hr > 120 else 0


def ph_points(ph: str) -> float:
    return step(half_up(ph, 2), (7.2499, 4), (7.2999, 3), (7.3499, 2), (INF, 0))


def gcs_points(gcs: float) -> float:
    return step(gcs, (10, 10), (12, 5), (14, 2), (INF, 0))


def pf_points(pf: float) -> float:
    return step(half_up(round(pf, 9), 0), (100, 6), (125, 5), (150, 4), (175, 3), (200, 2), (INF, 0))


def rr_points(rr: float) -> float:
    return step(rr, (30, 0), (35, 1), (40, 2), (45, 3), (INF, 4))


def judging(log: Log) -> list[Gas]:
    """Gases a score is taken at: arterial or capillary, not off support."""
    return [g for g in log.gases if g.counts and not g.off]


def hacor(log: Log) -> Scored | None:
    found = judging(log)
    if not found:
        return None
    gas = found[-1]
    typed = [v for m, v in log.all("ph") if m == gas.at]
    hr, gcs, rr = (fresh(log, c, gas.at) for c in ("hr", "gcs", "rr"))
    parts: dict[str, tuple[float | None, float]] = {
        "hr": (None if hr is None else hr_points(float(hr)), 1),
        "ph": (ph_points(typed[-1]) if typed else None, 4),
        "gcs": (None if gcs is None else gcs_points(float(gcs)), 10),
        "pf": (None if gas.pf is None else pf_points(gas.pf), 6),
        "rr": (None if rr is None else rr_points(float(rr)), 4),
    }
    low = sum(p for p, _ in parts.values() if p is not None)
    high = low + sum(most for p, most in parts.values() if p is None)
    missing = {name for name, (p, _) in parts.items() if p is None}
    return Scored(gas.at, None if missing else low, low, high, missing)


def spo2_points(spo2: float, scale: str, on_oxygen: bool) -> float:
    if scale == "1":
        return step(spo2, (91, 3), (93, 2), (95, 1), (INF, 0))
    if spo2 <= 92 or not on_oxygen:
        return step(spo2, (83, 3), (85, 2), (87, 1), (INF, 0))
    return step(spo2, (94, 1), (96, 2), (INF, 3))


def on_oxygen(log: Log, at: int) -> bool | None:
    """A flow without an FiO2 counts as oxygen; None where nothing of the oxygen was ever logged.

    Off the mask, what was set on the machine is not what is breathed: only what was logged since counts.
    """
    off = [a for a, b in log.breaks if a < at and (b is None or at <= b)]
    off += [log.end] if log.end is not None and log.end < at else []
    logged = [m for c in ("fio2", "o2_flow") for m, _ in log.all(c) if m <= at]
    if off and not any(m >= off[-1] for m in logged):
        return None
    fio2, flow = log.fio2(at), log.flow(at)
    if fio2 is not None:
        return fio2 > 0.21
    return None if flow is None else flow > 0


def news2(log: Log) -> Scored | None:
    at = max((m for c in OBSERVED for m, _ in log.all(c)), default=None)
    if at is None:
        return None
    rr, spo2, hr, sbp, temp = (fresh(log, c, at) for c in OBSERVED)
    since = max((w for w in walls(log) if w < at), default=-(10**6))
    words = [(m, v) for m, v in log.all("acvpu") if since < m <= at and at - m <= 240]
    missing = {c for c, v in zip(OBSERVED, (rr, spo2, hr, sbp, temp), strict=True) if v is None}
    plain: list[tuple[float, ...]] = [
        (0, 3) if rr is None else (step(float(rr), (8, 3), (11, 1), (20, 0), (24, 2), (INF, 3)),),
        (0, 3) if hr is None
        else (step(float(hr), (40, 3), (50, 1), (90, 0), (110, 1), (130, 2), (INF, 3)),),
        (0, 3) if sbp is None
        else (step(float(sbp), (90, 3), (100, 2), (110, 1), (219, 0), (INF, 3)),),
        (0, 3) if temp is None
        else (step(half_up(temp, 1), (35.0, 3), (36.0, 1), (38.0, 0), (39.0, 1), (INF, 2)),),
        (0, 3) if not words else (0 if words[-1][1] == "alert" else 3,),
    ]  # fmt: skip
    missing |= set() if words else {"acvpu"}
    scale, oxygen = log.fact("spo2_scale") or "1", on_oxygen(log, at)
    missing |= {"on_oxygen"} if oxygen is None else set()
    both: list[float] = []
    for given in (True, False) if oxygen is None else (oxygen,):
        if spo2 is not None:
            both.append((2 if given else 0) + spo2_points(float(spo2), scale, given))
        else:
            both += [2 if given else 0, (2 if given else 0) + 3]
    sums = [sum(one) for one in product(*plain, both)]
    return Scored(at, None if missing else min(sums), min(sums), max(sums), missing)


@dataclass
class Ratio:
    latest: float | None = None
    at: int | None = None


def not_off(log: Log, at: int) -> bool:
    """Before the start, or on support: not in a break, not after the end."""
    ended = log.end is not None and at >= log.end
    return not ended and not any(a <= at and (b is None or at < b) for a, b in log.breaks)


def pf(log: Log) -> Ratio:
    """Of the newest arterial gas; an older one does not stand in for one that has none."""
    found = [g for g in log.gases if g.site == "arterial" and not g.off]
    return Ratio(found[-1].pf, found[-1].at) if found else Ratio()


def newest_spo2(log: Log) -> tuple[int, float] | None:
    found = [(m, float(v)) for m, v in log.all("spo2") if not_off(log, m)]
    return found[-1] if found else None


def sf(log: Log) -> Ratio:
    """By the newest SpO2; none above 97 %, nor where its FiO2 is not known."""
    newest = newest_spo2(log)
    if newest is None:
        return Ratio()
    fio2 = log.fio2(newest[0])
    return Ratio(newest[1] / fio2, newest[0]) if fio2 is not None and newest[1] <= 97 else Ratio()


def rox(log: Log) -> Ratio:
    newest = newest_spo2(log)
    if newest is None:
        return Ratio()
    fio2, rr = log.fio2(newest[0]), fresh(log, "rr", newest[0])
    return Ratio(newest[1] / fio2 / float(rr), newest[0]) if fio2 is not None and rr is not None else Ratio()
