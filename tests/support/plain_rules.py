"""Did it work? Baselines, both arms, verdicts and headlines, once more from the rules' text alone."""

from __future__ import annotations

from dataclasses import dataclass, field

from tests.support.plain_anchors import Anchor, anchors
from tests.support.plain_record import Gas, Log


def up_or_down(before: float | None, after: float | None, noise: float) -> int | None:
    if before is None or after is None:
        return None
    delta = round(after - before, 9)
    return 0 if abs(delta) <= noise + 1e-9 else 1 if delta > 0 else -1


def co2_arm(base: Gas, gas: Gas) -> str | None:
    ph = up_or_down(base.ph, gas.ph, 0.033)
    co2 = up_or_down(base.paco2, gas.paco2, max(3.3, 0.08 * (base.paco2 or 0)))
    if ph is None and co2 is None:
        return None
    if co2 == -1 and gas.ph is not None and gas.ph > 7.45 and base.hypercapnic and (base.ph or 0) <= 7.45:
        return "over-correction"
    good = ph == 1 or co2 == -1
    bad = ph == -1 or co2 == 1
    if None in (ph, co2) and not bad:
        return None  # what is missing may have got worse
    return "mixed" if good and bad else "better" if good else "worse" if bad else "no clear change"


def in_doubt(gas: Gas) -> bool:
    """Values that can hardly belong together make nobody better."""
    return gas.bicarbonate is not None and not 8 <= gas.bicarbonate <= 60


def pf_arm(base: Gas, gas: Gas) -> str | None:
    """By P/F; None where the two cannot be compared, and SpO2 has to answer."""
    if base.pf is None or gas.pf is None or base.fio2 is None or gas.fio2 is None:
        return None
    if abs(base.fio2 - gas.fio2) > 0.05 + 1e-9:
        return None
    way = up_or_down(base.pf, gas.pf, 0.14 * base.pf)
    return {1: "better", -1: "worse", 0: "no clear change"}[way or 0]


# --- responses ---


@dataclass
class Judged:
    at: int
    minutes: int
    timing: str
    attributable: bool
    co2: str | None = None
    oxygen: str | None = None
    verdict: str | None = None


@dataclass
class Response:
    anchor: Anchor
    base: Gas | None = None
    base_early: bool = False
    gases: list[Judged] = field(default_factory=list)
    headline: str = "not yet known"
    headline_at: int | None = None


def timing_of(minutes: int) -> str:
    return "early" if minutes < 30 else "in_window" if minutes <= 120 else "late"


def same_state(log: Log, anchor: Anchor, gas: Gas) -> bool:
    """A start has a gas before it, the end of a break one of that break, a change one on support."""
    if anchor.kind == "start":
        return True
    if anchor.kind == "break_end":
        return any(b == anchor.first and a < gas.at for a, b in log.breaks)
    begun = log.start is not None and (gas.at > log.start or (gas.at == log.start and not log.start_seen))
    return begun and not gas.off


def baseline(log: Log, anchor: Anchor, until: int | None) -> tuple[Gas | None, bool]:
    """The last gas before the first step in the same state of support; else an early one, with its caution."""
    found = None
    oldest = 120 if anchor.kind == "start" else 360
    for gas in log.gases:
        if not gas.counts or gas.at > anchor.first or anchor.first - gas.at > oldest:
            continue
        if same_state(log, anchor, gas):
            found = gas
    if found is not None:
        return found, False
    for gas in log.gases:
        early = anchor.first < gas.at and gas.at - anchor.at < 30 and (until is None or gas.at <= until)
        if gas.counts and early and not gas.off:
            return gas, True
    return None, False


def near(log: Log, channel: str, at: int, after: int, until: int) -> float | None:
    """The value nearest to a minute within 30 min of it, later than `after`, not later than `until`."""
    found = [(abs(m - at), m, float(v)) for m, v in log.all(channel) if after < m <= until and abs(m - at) <= 30]
    return min(found)[2] if found else None


def cut_by_breaks(log: Log, at: int) -> tuple[int, int]:
    """What a break's edges leave around a minute: nothing seen without the mask speaks for it, or the other way."""
    edges = [e for pair in log.breaks for e in pair if e is not None]
    return max((e for e in edges if e < at), default=-(10**6)), min((e for e in edges if e >= at), default=10**6)


@dataclass
class Seen:
    spo2: float | None
    rr: float | None
    on_oxygen: bool


def oxygen_given(log: Log, at: int) -> bool:
    fio2, flow = log.fio2(at), log.flow(at)
    return fio2 > 0.21 if fio2 is not None else bool(flow)


def seen_before(log: Log, anchor: Anchor, base: Gas) -> Seen:
    """SpO2 just before the change, else near the baseline; the rate near the baseline, else just before."""
    last = anchor.first
    for a, b in log.breaks:
        if b == anchor.first and anchor.kind != "break_end":
            last = a  # set in a short break: before it stands the time on the mask
    low = cut_by_breaks(log, last)[0]
    base_low, base_high = cut_by_breaks(log, base.at)
    base_high = min(base_high, base.at if base.at > anchor.first else anchor.first)
    spo2 = None if base.at > anchor.first else near(log, "spo2", last, low, last)
    if spo2 is None:
        spo2 = near(log, "spo2", base.at, base_low, base_high)
    rr = near(log, "rr", base.at, base_low, base_high)
    if rr is None:
        rr = near(log, "rr", last, low, last)
    return Seen(spo2, rr, oxygen_given(log, anchor.first - 1))


def seen_after(log: Log, found: list[Anchor], gas: Gas) -> Seen:
    low, high = cut_by_breaks(log, gas.at)
    high = min(high, log.as_of)
    for i, anchor in enumerate(found):
        if anchor.first < gas.at:
            own = max(low, anchor.at if gas.at > anchor.at else anchor.first)
            until = found[i + 1].first if i + 1 < len(found) else high
    return Seen(
        near(log, "spo2", gas.at, own, min(high, until)),
        near(log, "rr", gas.at, own, min(high, until)),
        oxygen_given(log, gas.at),
    )


def off_range(log: Log, seen: Seen) -> float:
    """How far SpO2 is out of its range; too high only while oxygen is given."""
    low, high = log.target
    assert seen.spo2 is not None
    if seen.spo2 < low:
        return low - seen.spo2
    return seen.spo2 - high if seen.spo2 > high and seen.on_oxygen else 0


def spo2_arm(log: Log, before: Seen, after: Seen) -> str | None:
    if before.spo2 is None or after.spo2 is None:
        return None
    was, now = off_range(log, before), off_range(log, after)
    if abs(after.spo2 - before.spo2) <= 4 or was == now:
        return "no clear change"
    return "better" if now < was else "worse"


def oxygen_arm(log: Log, by_spo2: bool, base: Gas, gas: Gas, before: Seen, after: Seen) -> str | None:
    """By P/F where both can be compared and oxygen was not what changed; else by SpO2. PaCO2 vetoes."""
    by_pf = None if by_spo2 else pf_arm(base, gas)
    co2_up = up_or_down(base.paco2, gas.paco2, max(3.3, 0.08 * (base.paco2 or 0))) == 1
    rate_down = before.rr is not None and after.rr is not None and after.rr < before.rr
    if co2_up and rate_down and by_pf != "better":
        return "mixed"
    return by_pf or spo2_arm(log, before, after)


def verdict_of(co2: str | None, oxygen: str | None, active: bool, of_oxygen: bool) -> str | None:
    if co2 == "worse":
        return "worse"
    if co2 == "better" and oxygen == "worse":
        return "mixed"
    if of_oxygen and co2 == "no clear change":
        return oxygen
    if active or (oxygen is None and co2 in ("mixed", "over-correction")):
        return co2
    return oxygen


def judge(log: Log, found: list[Anchor], anchor: Anchor, base: Gas, gas: Gas, row: Judged) -> None:
    of_oxygen = anchor.parts == {"oxygen"}
    row.co2 = co2_arm(base, gas)
    row.oxygen = oxygen_arm(log, of_oxygen, base, gas, seen_before(log, anchor, base), seen_after(log, found, gas))
    active = base.acutely_hypercapnic or (of_oxygen and log.at_risk)
    row.verdict = verdict_of(row.co2, row.oxygen, active, of_oxygen)
    if in_doubt(gas) or in_doubt(base):
        row.co2, row.oxygen, row.verdict = (None if v == "better" else v for v in (row.co2, row.oxygen, row.verdict))


def responses(log: Log) -> list[Response]:
    found = anchors(log)
    out = []
    for i, anchor in enumerate(found):
        until = found[i + 1].first if i + 1 < len(found) else None
        base, early = (None, False) if anchor.running_before else baseline(log, anchor, until)
        one = Response(anchor, base, early)
        for gas in log.gases:
            minutes = gas.at - anchor.at
            own = until is None or gas.at <= until
            if gas.at < anchor.first or (gas.at == anchor.first and not anchor.running_before):
                continue
            if not own and minutes > 120:
                continue
            row = Judged(gas.at, minutes, timing_of(minutes), own)
            if own and base is not None and gas.counts and not gas.off and gas.at > base.at:
                judge(log, found, anchor, base, gas, row)
            one.gases.append(row)
        name_headline(log, one, until)
        out.append(one)
    return out


def name_headline(log: Log, one: Response, until: int | None) -> None:
    """The newest steady gas that can tell. For one that cannot no older better stands in; for one in doubt, none."""
    steady = []
    for row in one.gases:
        gas = next(g for g in log.gases if g.at == row.at)
        if row.attributable and row.timing != "early" and gas.counts and not gas.off:
            steady.append((gas, row))
    told = [row for _, row in steady if row.verdict is not None]
    cannot_tell = bool(steady) and steady[-1][1].verdict is None
    if cannot_tell and (in_doubt(steady[-1][0]) or (told and told[-1].verdict == "better")):
        one.headline, one.headline_at = "not judged", steady[-1][0].at
    elif told:
        one.headline, one.headline_at = told[-1].verdict or "", told[-1].at
    elif one.anchor.running_before:
        one.headline = "not judged"
    elif steady:
        one.headline, one.headline_at = "not judged", steady[-1][0].at
    elif until is not None or log.end is not None:
        one.headline = "not judged"
    if one.headline == "not yet known" and one.anchor.parts == {"oxygen"} and not log.at_risk:
        by_spo2_alone(log, one, until)


def by_spo2_alone(log: Log, one: Response, until: int | None) -> None:
    """A change of oxygen without hypercapnic risk needs no gas: the newest SpO2 of its window answers."""
    at = one.anchor.at
    closes = min(at + 120, log.as_of, cut_by_breaks(log, at)[1])
    window = [float(v) for m, v in log.all("spo2") if at + 30 <= m <= closes]
    low = cut_by_breaks(log, one.anchor.first)[0]
    before = near(log, "spo2", one.anchor.first, low, one.anchor.first)
    if window:
        was = Seen(before, None, oxygen_given(log, one.anchor.first - 1))
        told = spo2_arm(log, was, Seen(window[-1], None, oxygen_given(log, at)))
        one.headline = told or one.headline


# --- since the start ---


@dataclass
class Since:
    at: int
    verdict: str | None
    lost: bool


def since_start(log: Log) -> list[Since]:
    """Every gas on support against the baseline of the start (its first gas where support ran before)."""
    found = anchors(log)
    if not found:
        return []
    first = found[0]
    on = [g for g in log.gases if g.counts and not g.off and (g.at > first.first or first.running_before)]
    until = found[1].first if len(found) > 1 else None
    running = [g for g in log.gases if g.counts and not g.off]
    base = (running or [None])[0] if first.running_before else baseline(log, first, until)[0]
    out: list[Since] = []
    for i, gas in enumerate(on):
        told = None
        if base is not None and base.at != gas.at:
            co2 = co2_arm(base, gas)
            before, after = seen_before(log, first, base), seen_after(log, found, gas)
            told = verdict_of(co2, oxygen_arm(log, False, base, gas, before, after), base.acutely_hypercapnic, False)
            told = None if told == "better" and (in_doubt(base) or in_doubt(gas)) else told
        earlier = [g for g in on[:i] if base is None or g.at != base.at]
        out.append(Since(gas.at, told, co2_gain_lost(base, earlier, gas) or pf_gain_lost(base, earlier, gas)))
    return out


def co2_gain_lost(base: Gas | None, earlier: list[Gas], gas: Gas) -> bool:
    """A relapse from the best gas: of the highest pH, of equal ones the lowest PaCO2, if better than the start."""
    known = [g for g in earlier if g.ph is not None]
    if not known or gas.ph is None:
        return False
    best = sorted(known, key=lambda g: (-(g.ph or 0), g.paco2 or 0))[0]
    if base is not None and base.ph is not None and (best.ph or 0) <= base.ph:
        return False
    if gas.ph >= 7.35 and not gas.hypercapnic:
        return False
    fell = up_or_down(best.ph, gas.ph, 0.033) == -1
    return (gas.ph < 7.35 and fell) or co2_arm(best, gas) == "worse"


def pf_gain_lost(base: Gas | None, earlier: list[Gas], gas: Gas) -> bool:
    """The same of P/F, on an FiO2 that can be compared, where it was a gain from hypoxaemia."""
    alike = [g for g in earlier if pf_arm(g, gas) is not None]
    if not alike or gas.pf is None:
        return False
    top = max(g.pf or 0 for g in alike)
    if base is not None and (not base.hypoxaemic or top <= (base.pf or 0)):
        return False
    return up_or_down(top, gas.pf, 0.14 * top) == -1
