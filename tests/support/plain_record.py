"""The record as the plain telling of the rules sees it: slow, of scalars and loops.

With `plain_anchors`, `plain_rules`, `plain_scores` and `plain_due` the oracle of `test_against_plain_rules`. It
shares no code with the program and knows nothing but what was logged: rows of (minute, channel, text as typed in the
canonical unit). Minutes count from any zero.
"""

from __future__ import annotations

from dataclasses import dataclass
from decimal import ROUND_HALF_UP, Decimal

Row = tuple[int, str, str]
BILEVEL = ("BPAP-ST", "BPAP-S", "BPAP-T", "pressure control", "volume-assured")
RISK = ("copd", "obesity hypoventilation", "neuromuscular", "chest wall")
NUMERIC = ("ipap", "epap", "cpap", "fio2", "o2_flow", "rate_set", "ti")
WRITTEN = ("rr", "spo2", "hr", "gcs", "sbp", "temp", "acvpu", "gas_sent", "mask_off", "break_start")
GAS = ("ph", "paco2", "pao2", "hco3", "lactate")
OF_A_BLOOD_GAS = ("ph", "paco2", "pao2")
KPA = 7.50062


def half_up(text: str | float, places: int) -> float:
    """Decimal half-up rounding: 7.345 is 7.35."""
    return float(Decimal(str(text)).quantize(Decimal(1).scaleb(-places), ROUND_HALF_UP))


def tenths_of_kpa(mmhg: float) -> float:
    """A pressure in tenths of a kPa, in which limits are compared so that the unit never decides."""
    return half_up(repr(round(mmhg / KPA, 9)), 1)


@dataclass
class Gas:
    at: int
    site: str
    ph: float | None
    paco2: float | None
    pao2: float | None
    hco3: float | None
    fio2: float | None
    off: bool = False

    @property
    def counts(self) -> bool:
        return self.site in ("arterial", "capillary")

    @property
    def pf(self) -> float | None:
        if self.site != "arterial" or self.pao2 is None or self.fio2 is None:
            return None
        return self.pao2 / self.fio2

    @property
    def state(self) -> str | None:
        if not self.counts or self.ph is None:
            return None
        if self.ph >= 7.35:
            return None if self.paco2 is None else "resolved"
        return "severe" if self.ph < 7.25 else "acidotic"

    @property
    def hypercapnic(self) -> bool | None:
        return None if self.paco2 is None else tenths_of_kpa(self.paco2) > 6.0

    @property
    def acutely_hypercapnic(self) -> bool:
        return self.ph is not None and self.ph < 7.35 and bool(self.hypercapnic)

    @property
    def hypoxaemic(self) -> bool:
        return self.pf is not None and self.pf <= 300 + 1e-9

    @property
    def bicarbonate(self) -> float | None:
        if self.ph is None or self.paco2 is None:
            return None
        return 0.0307 * self.paco2 * 10 ** (self.ph - 6.1)

    @property
    def consistent(self) -> bool | None:
        if self.hco3 is None or self.bicarbonate is None:
            return None
        return abs(self.hco3 - self.bicarbonate) <= 2

    @property
    def gradient(self) -> float | None:
        if self.site != "arterial" or self.pao2 is None or self.paco2 is None or self.fio2 is None:
            return None
        return self.fio2 * (760 - 47) - self.paco2 / 0.8 - self.pao2

    @property
    def sbe(self) -> float | None:
        b = self.bicarbonate
        return None if b is None or self.ph is None else b - 24.8 + 16.2 * (self.ph - 7.40)


class Log:
    """What was logged until a moment, looked up slowly."""

    def __init__(self, rows: list[Row], as_of: int) -> None:
        self.as_of = as_of
        self.rows = sorted((r for r in rows if r[0] <= as_of), key=lambda r: r[0])

    def all(self, channel: str) -> list[tuple[int, str]]:
        return [(m, v) for m, c, v in self.rows if c == channel]

    def last(self, channel: str, at: int) -> str | None:
        found = [v for m, v in self.all(channel) if m <= at]
        return found[-1] if found else None

    def number(self, channel: str, at: int) -> float | None:
        found = self.last(channel, at)
        return None if found is None else float(found)

    def fact(self, channel: str) -> str | None:
        return self.last(channel, self.as_of)

    def fio2(self, at: int) -> float | None:
        """The known FiO2: a flow without one ends it, a flow of nothing is room air."""
        moments = sorted({m for c in ("fio2", "o2_flow") for m, _ in self.all(c) if m <= at})
        if not moments:
            return None
        now = moments[-1]
        own = [float(v) for m, v in self.all("fio2") if m == now]
        if own:
            return own[-1]
        return 0.21 if float([v for m, v in self.all("o2_flow") if m == now][-1]) == 0 else None

    def flow(self, at: int) -> float | None:
        """The oxygen flow: an FiO2 logged later takes its place."""
        flows = [m for m, _ in self.all("o2_flow") if m <= at]
        fractions = [m for m, _ in self.all("fio2") if m <= at]
        if not flows or (fractions and fractions[-1] > flows[-1]):
            return None
        return self.number("o2_flow", at)

    def drawn_on(self, at: int) -> float | None:
        """The FiO2 a gas of a minute was drawn on: what was set before that minute, where anything was."""
        before = [m for c in ("fio2", "o2_flow") for m, _ in self.all(c) if m < at]
        return self.fio2(at - 1) if before else self.fio2(at)

    @property
    def at_risk(self) -> bool:
        """By indication, by a range prescribed for it, or by a gas that shows it."""
        prescribed = float(self.fact("target_spo2_high") or 100) <= 92
        shown = any(g.counts and g.hypercapnic for g in self.gases)
        return self.fact("indication") in RISK or prescribed or shown

    @property
    def target(self) -> tuple[float, float]:
        low, high = (88, 92) if self.at_risk else (94, 98)
        return (float(self.fact("target_spo2_low") or low), float(self.fact("target_spo2_high") or high))

    # --- support ---

    @property
    def start(self) -> int | None:
        begun = [m for m, v in self.all("mode") if v != "off"]
        begun += [m for c in ("ipap", "cpap") for m, _ in self.all(c) if self.last("mode", m) is None]
        begun += [m for m, _ in self.all("mask_on")] if not begun else []
        return min(begun) if begun else None

    @property
    def end(self) -> int | None:
        ends = [m for c in ("stopped", "intubated", "arrest") for m, _ in self.all(c)]
        if not ends:
            return None
        later = [m for m, c, _ in self.rows if c in (*NUMERIC, "interface") and m > max(ends)]
        later = [m for m in later if self.last("mode", m) != "off"]
        later += [m for m, v in self.all("mode") if m > max(ends) and v != "off"]
        later += [m for m, _ in self.all("mask_on") if m > max(ends)]
        return None if later else max(ends)

    @property
    def breaks(self) -> list[tuple[int, int | None]]:
        moves: list[tuple[int, int]] = []
        for m, c, v in self.rows:
            if c in ("mask_off", "break_start", "stopped") or (c == "mode" and v == "off"):
                moves.append((m, 1))
            elif c in ("mask_on", "break_end") or (c == "mode" and self.last("mode", m - 1) == "off"):
                moves.append((m, 0))
        out: list[tuple[int, int | None]] = []
        opened = None
        for m, going_off in sorted(moves):
            if self.end is not None and m >= self.end:
                break
            if going_off and opened is None:
                opened = m
            elif not going_off and opened is not None:
                out.append((opened, m))
                opened = None
        return [*out, (opened, self.end)] if opened is not None else out

    def hours_on_mask(self, since: int | None = None) -> float | None:
        """Minute by minute."""
        if self.start is None:
            return None
        end = self.as_of if self.end is None else min(self.end, self.as_of)
        first = self.start if since is None else max(self.start, since)
        on = sum(1 for m in range(first, end) if not any(a <= m and (b is None or m < b) for a, b in self.breaks))
        return on / 60

    # --- gases ---

    def off_support(self, at: int) -> bool:
        """In a break (a gas of its first minute came before it), within 30 min after one, or after the end."""
        if self.start is None or at < self.start:
            return False
        after_it = self.end is not None and at > self.end
        return after_it or any(a < at and (b is None or at <= b + 30) for a, b in self.breaks)

    def mask_is_off(self, at: int) -> bool:
        """What is set then is not what is breathed."""
        return (self.end is not None and at > self.end) or any(
            a < at and (b is None or at <= b) for a, b in self.breaks
        )

    @property
    def start_seen(self) -> bool:
        """Whether the record shows it: a gas or, ten minutes before, an observation; the mask going on around it."""
        s = self.start
        if s is None:
            return False
        if any(s - 30 <= m <= s + 10 for m, _ in self.all("mask_on")) or any(g.at < s for g in self.gases):
            return True
        return any(m <= s - 10 and c in WRITTEN for m, c, _ in self.rows)

    @property
    def gases(self) -> list[Gas]:
        out = []
        for at in sorted({m for c in OF_A_BLOOD_GAS for m, _ in self.all(c)}):
            own = {c: v for m, c, v in self.rows if m == at}
            num = {c: float(own[c]) for c in (*GAS, "gas_fio2") if c in own}
            fio2 = num.get("gas_fio2", None if self.mask_is_off(at) else self.drawn_on(at))
            out.append(
                Gas(at, own.get("site", "arterial"), num.get("ph"), num.get("paco2"), num.get("pao2"),
                    num.get("hco3"), fio2, self.off_support(at))
            )  # fmt: skip
        return out
