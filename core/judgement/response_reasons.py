"""Why a response reads as it does: one message per reason, each with the values its sentence needs.

Pressures in mmHg, rates per minute, SpO2 in %, FiO2 as a fraction, instants in microseconds (names end in `_at`).
"""

from __future__ import annotations

from core.judgement.shapes import GasFigure
from core.judgement.vitals_near import Found
from core.record.instant import Instant
from core.record.message import Message, Value

Values = dict[str, Value]


def compared(quantity: str, before: float, after: float, noise: float, sign: int) -> Message:
    """What was compared, by how much, against which noise. `quantity`: ph, paco2, pf, rr, spo2."""
    beyond = {1: "up", -1: "down", 0: "inside noise"}[sign]
    change = round(after - before, 6)
    values: Values = {"quantity": quantity, "before": before, "after": after, "change": change, "noise": noise,
              "direction": beyond}  # fmt: skip
    return Message("response.compared", values)


def missing(quantity: str, side: str) -> Message:
    """A value that was not reported. `side`: baseline or gas."""
    return Message("response.value_missing", {"quantity": quantity, "side": side})


def co2_not_active(base: GasFigure) -> Message:
    """No verdict: the oxygen arm cannot answer, and CO2 does not where the baseline was not acutely hypercapnic."""
    return Message("response.co2_not_active", {"gas_at": base.at})


def over_correction(gas: GasFigure, base: GasFigure) -> Message:
    """CO2 fell so far that the pH is now alkalotic."""
    values: Values = {"ph": gas.ph, "before": base.paco2_mmHg, "after": gas.paco2_mmHg}
    return Message("response.over_correction", values)


def fio2_not_known(side: str) -> Message:
    """P/F cannot be compared: an FiO2 is not known."""
    return Message("response.fio2_not_known", {"side": side})


def fio2_differs(before: float, after: float) -> Message:
    """P/F cannot be compared: FiO2 changed by more than the policy allows."""
    return Message("response.fio2_differs", {"before": before, "after": after})


def pf_not_compared(site: str) -> Message:
    """P/F cannot be compared: no arterial PO2 on both sides."""
    return Message("response.pf_not_compared", {"site": site})


def spo2_range(before: Found | None, after: Found, low: float, high: float, where: str) -> Message:
    """SpO2 against its range. `where`: below, within, above (above counts only while oxygen is given)."""
    values: Values = {"after": after.value, "at": after.at, "since": after.since, "low": low, "high": high,
                      "where": where}  # fmt: skip
    if before is None:
        return Message("response.spo2_range_after", values)
    return Message("response.spo2_range", {**values, "before": before.value, **_taken(before, after)})


def in_doubt(baseline: GasFigure, gas: GasFigure) -> Message:
    """Better is not said: a value of the gas, or of its baseline, is in doubt."""
    side = "gas" if gas.in_doubt else "baseline"
    return Message("response.not_better_in_doubt", {"side": side, "gas_at": (gas if gas.in_doubt else baseline).at})


def towards_normal(before: float, after: float) -> Message:
    """A pH that fell from above its normal limits to within them counts as a fall by the letter of the rule."""
    return Message("response.towards_normal", {"before": before, "after": after})


def tiring(before: Found, after: Found, noise: float, beyond: bool) -> Message:
    """The rate fell while PaCO2 rose and P/F did not: tiring is not excluded."""
    values: Values = {"before": before.value, "after": after.value, **_taken(before, after), "noise": noise,
                      "beyond_noise": beyond}  # fmt: skip
    return Message("response.tiring_not_excluded", values)


def _taken(before: Found, after: Found) -> Values:
    """When two values were taken, and since when each is a median, if it is one."""
    return {"before_at": before.at, "before_since": before.since, "at": after.at, "since": after.since}


def no_baseline(kind: str, limit_h: float, because: str, newest_at: Instant | None) -> Message:
    """No gas can serve as baseline. `because`: no gas, too old, other support, venous."""
    values: Values = {"anchor": kind, "limit_h": limit_h, "because": because, "newest_at": newest_at}
    return Message("response.no_baseline", values)


def about_gas(key: str, gas: GasFigure) -> Message:
    """A plain fact about one gas: `response.<key>` with its moment and site."""
    return Message(f"response.{key}", {"gas_at": gas.at, "site": gas.site})


def off_support(gas: GasFigure) -> list[Message]:
    """Why a gas off support judges nothing, and that it shows an acidosis, as it was drawn."""
    if gas.back_on_minutes is not None:
        drawn = {"gas_at": gas.at, "minutes": gas.back_on_minutes, "back_on_at": gas.back_on_at}
        said = [Message("response.not_steady", drawn)]
    else:
        key = "response.after_support" if gas.support_ended else "response.off_support"
        said = [Message(key, {"gas_at": gas.at, "site": gas.site})]
    if gas.state in ("severe", "acidotic"):
        said.append(Message("response.acidosis_off_support", {"gas_at": gas.at, "ph": gas.ph}))
    return said


def doubts(baseline: GasFigure | None, gas: GasFigure) -> list[Message]:
    """What makes either gas doubtful. A doubt is always shown."""
    said: list[Message] = []
    for side, g in (("baseline", baseline), ("gas", gas)):
        if g is None:
            continue
        unusual = g.doubt and not (g.unconfirmed or g.implausible)
        for name, true in (("unconfirmed", g.unconfirmed), ("unusual", unusual),
                           ("implausible", g.implausible is not None), ("inconsistent", g.consistent is False),
                           ("corrected", g.corrected), ("disputed", g.disputed)):  # fmt: skip
            if true:
                said.append(Message(f"response.{name}", {"side": side, "gas_at": g.at}))
    return said
