"""What a gas is in plain words: acute, chronic, acute-on-chronic or mixed, with the reasoning shown.

The rules are those of `compensation`, with a tolerance of 2 mmol/L or 2 mmHg; the pH limits 7.35 and 7.45, the
PCO2 limits 35 and 45 mmHg (4.7 and 6.0 kPa), bicarbonate 22-26 mmol/L. The bands between are common practice.
The words describe; no marker is judged by them.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import IntEnum
from typing import Any, Final

import numpy as np
from numpy.typing import ArrayLike, NDArray

from core.physiology import acid_base, compensation
from core.physiology.constants import NORMAL_PH_HIGH, NORMAL_PH_LOW
from core.physiology.elementary import Values
from core.physiology.formula import why_undefined
from core.physiology.pressure import tenths_of_kpa
from core.record.message import Message, Value

HCO3_TOLERANCE = 2.0
HCO3_LOW = 22.0
HCO3_HIGH = 26.0
_PCO2_LOW_TENTHS = 47.0
_PCO2_HIGH_TENTHS = 60.0


class Disturbance(IntEnum):
    """The main disturbance."""

    NOT_KNOWN = 0
    NONE = 1
    ACUTE_RESPIRATORY_ACIDOSIS = 2
    ACUTE_ON_CHRONIC_RESPIRATORY_ACIDOSIS = 3
    CHRONIC_RESPIRATORY_ACIDOSIS = 4
    ACUTE_RESPIRATORY_ALKALOSIS = 5
    CHRONIC_RESPIRATORY_ALKALOSIS = 6
    METABOLIC_ACIDOSIS = 7
    METABOLIC_ALKALOSIS = 8
    BORDERLINE = 9
    """Outside normal by less than any rule can name."""


class Second(IntEnum):
    """What is mixed with the main disturbance."""

    NONE = 0
    METABOLIC_ACIDOSIS = 1
    METABOLIC_ALKALOSIS = 2
    RESPIRATORY_ACIDOSIS = 3
    RESPIRATORY_ALKALOSIS = 4


@dataclass(frozen=True, slots=True)
class Classes:
    """Codes of arrays of gases: `main` of `Disturbance`, `second` of `Second`."""

    main: NDArray[np.int8]
    second: NDArray[np.int8]


@dataclass(frozen=True, slots=True)
class Classification:
    """One gas in words: the main disturbance, what is mixed with it, and why, step by step.

    `acidotic` is True where pH is below 7.35 although the class is chronic: a rule says "compensated", the
    patient is still acidotic, and judgement goes by the pH.
    """

    main: Disturbance
    second: Second
    acidotic: bool
    steps: tuple[Message, ...]
    apart: bool = True
    """False where the bicarbonate fits the acute and the chronic line alike: then the words call it neither."""

    @property
    def message(self) -> Message:
        """The class as a message: `gas_class.` with the main disturbance's name."""
        second = self.second.name.lower()
        values: dict[str, Value] = {"second": second, "acidotic": self.acidotic, "apart": self.apart}
        return Message(f"gas_class.{self.main.name.lower()}", values)


def classify_codes(ph: ArrayLike, paco2: ArrayLike) -> Classes:
    """The classes of arrays of gases that broadcast (pH; PCO2 in mmHg); NOT_KNOWN where either is missing.

    >>> classify_codes([7.25, 7.37], [60.0, 57.0]).main.tolist()
    [2, 4]
    """
    ph_array, paco2_array = np.broadcast_arrays(np.asarray(ph, dtype=np.float64), np.asarray(paco2, dtype=np.float64))
    hco3: Values = np.asarray(acid_base.bicarbonate(ph_array, paco2_array))
    main = _main(ph_array, paco2_array, hco3)
    return Classes(main, _second(main, paco2_array, hco3))


def _main(ph: Values, paco2: Values, hco3: Values) -> NDArray[np.int8]:
    tenths = tenths_of_kpa(paco2)
    high, low = tenths > _PCO2_HIGH_TENTHS, tenths < _PCO2_LOW_TENTHS
    acid, alkaline = ph < NORMAL_PH_LOW, ph > NORMAL_PH_HIGH
    acute, chronic = _expected(paco2)
    from_chronic = np.where(high, hco3 >= chronic - HCO3_TOLERANCE, hco3 <= chronic + HCO3_TOLERANCE)
    nearer_chronic = np.abs(hco3 - chronic) <= np.abs(hco3 - acute)
    settled = from_chronic & nearer_chronic
    near_acute = np.where(high, hco3 <= acute + HCO3_TOLERANCE, hco3 >= acute - HCO3_TOLERANCE)
    d = Disturbance
    rules: list[tuple[Any, Disturbance]] = [
        (np.isnan(hco3), d.NOT_KNOWN),
        (high & settled & ~alkaline, d.CHRONIC_RESPIRATORY_ACIDOSIS),
        (high & alkaline, d.METABOLIC_ALKALOSIS),
        (high & near_acute, d.ACUTE_RESPIRATORY_ACIDOSIS),
        (high, d.ACUTE_ON_CHRONIC_RESPIRATORY_ACIDOSIS),
        (low & acid, d.METABOLIC_ACIDOSIS),
        (low & settled, d.CHRONIC_RESPIRATORY_ALKALOSIS),
        (low, d.ACUTE_RESPIRATORY_ALKALOSIS),
        (hco3 < HCO3_LOW, d.METABOLIC_ACIDOSIS),
        (hco3 > HCO3_HIGH + HCO3_TOLERANCE, d.METABOLIC_ALKALOSIS),
        (alkaline & (hco3 > HCO3_HIGH), d.METABOLIC_ALKALOSIS),
        (acid | alkaline, d.BORDERLINE),
    ]
    codes = np.select([rule for rule, _ in rules], [code.value for _, code in rules], d.NONE.value)
    return codes.astype(np.int8)


def _expected(paco2: Values) -> tuple[Values, Values]:
    return (
        np.asarray(compensation.expected_hco3_acute(paco2)),
        np.asarray(compensation.expected_hco3_chronic(paco2)),
    )


def _second(main: NDArray[np.int8], paco2: Values, hco3: Values) -> NDArray[np.int8]:
    acute, chronic = _expected(paco2)
    upper = np.asarray(compensation.expected_hco3_chronic(paco2, compensation.CHRONIC_GAIN_HIGH))
    acidosis = np.asarray(compensation.expected_paco2_metabolic_acidosis(hco3))
    alkalosis = np.asarray(compensation.expected_paco2_metabolic_alkalosis(hco3))
    tolerance, winters = HCO3_TOLERANCE, compensation.WINTERS_TOLERANCE
    d, s = Disturbance, Second

    def kind(*wanted: Disturbance) -> NDArray[np.bool_]:
        return np.asarray(np.isin(main, [w.value for w in wanted]))

    up = kind(*list(d)[2:5])
    down = kind(d.ACUTE_RESPIRATORY_ALKALOSIS, d.CHRONIC_RESPIRATORY_ALKALOSIS)
    rules: list[tuple[Any, Second]] = [
        (up & (hco3 < acute - tolerance), s.METABOLIC_ACIDOSIS),
        (up & (hco3 > upper + tolerance), s.METABOLIC_ALKALOSIS),
        (down & (hco3 > acute + tolerance), s.METABOLIC_ALKALOSIS),
        (down & (hco3 < chronic - tolerance), s.METABOLIC_ACIDOSIS),
        (kind(d.METABOLIC_ACIDOSIS) & (paco2 > acidosis + winters), s.RESPIRATORY_ACIDOSIS),
        (kind(d.METABOLIC_ACIDOSIS) & (paco2 < acidosis - winters), s.RESPIRATORY_ALKALOSIS),
        (kind(d.METABOLIC_ALKALOSIS) & (paco2 > alkalosis + winters), s.RESPIRATORY_ACIDOSIS),
        (kind(d.METABOLIC_ALKALOSIS) & (paco2 < alkalosis - winters), s.RESPIRATORY_ALKALOSIS),
    ]
    codes = np.select([rule for rule, _ in rules], [code.value for _, code in rules], s.NONE.value)
    return codes.astype(np.int8)


def classify(ph: float, paco2: float) -> Classification:
    """One gas in plain words, with the reasoning. Bicarbonate is the calculated one.

    >>> c = classify(7.22, 80.0)
    >>> c.main.name, [step.key for step in c.steps]
    ('ACUTE_ON_CHRONIC_RESPIRATORY_ACIDOSIS', ['reason.ph', 'reason.paco2', 'reason.respiratory_lines'])
    """
    why = why_undefined(acid_base.bicarbonate, ph, paco2)
    if why is not None:
        return Classification(Disturbance.NOT_KNOWN, Second.NONE, False, (why,))
    codes = classify_codes(ph, paco2)
    main, second = Disturbance(int(codes.main)), Second(int(codes.second))
    chronic = main is Disturbance.CHRONIC_RESPIRATORY_ACIDOSIS
    acidotic = chronic and ph < NORMAL_PH_LOW
    apart = main not in _RESPIRATORY or not _fits_both(acid_base.bicarbonate(ph, paco2), paco2)
    return Classification(main, second, acidotic, _steps(ph, paco2, main, acidotic, apart), apart)


_RESPIRATORY: Final = frozenset({
    Disturbance.ACUTE_RESPIRATORY_ACIDOSIS, Disturbance.CHRONIC_RESPIRATORY_ACIDOSIS,
    Disturbance.ACUTE_RESPIRATORY_ALKALOSIS, Disturbance.CHRONIC_RESPIRATORY_ALKALOSIS,
})  # fmt: skip


def _fits_both(hco3: float, paco2: float) -> bool:
    """Whether a bicarbonate lies within the tolerance of what is expected both when acute and when chronic."""
    expected = (compensation.expected_hco3_acute(paco2), compensation.expected_hco3_chronic(paco2))
    return all(abs(hco3 - line) <= HCO3_TOLERANCE for line in expected)


def _steps(ph: float, paco2: float, main: Disturbance, acidotic: bool, apart: bool) -> tuple[Message, ...]:
    hco3 = acid_base.bicarbonate(ph, paco2)
    steps = [
        Message("reason.ph", {"ph": ph, "low": NORMAL_PH_LOW, "high": NORMAL_PH_HIGH}),
        Message("reason.paco2", {"paco2": paco2, "low": 35.0, "high": 45.0}),
    ]
    if main in (Disturbance.METABOLIC_ACIDOSIS, Disturbance.METABOLIC_ALKALOSIS):
        rule = (
            compensation.expected_paco2_metabolic_acidosis
            if main is Disturbance.METABOLIC_ACIDOSIS
            else compensation.expected_paco2_metabolic_alkalosis
        )
        values = {"hco3": hco3, "expected_paco2": rule(hco3), "tolerance": compensation.WINTERS_TOLERANCE}
        return (*steps, Message("reason.metabolic_line", {**values}))
    if main in (Disturbance.NONE, Disturbance.BORDERLINE):
        return (*steps, Message("reason.bicarbonate", {"hco3": hco3, "low": HCO3_LOW, "high": HCO3_HIGH}))
    acute, chronic = compensation.expected_hco3_acute(paco2), compensation.expected_hco3_chronic(paco2)
    lines = {"hco3": hco3, "acute": acute, "chronic": chronic, "tolerance": HCO3_TOLERANCE}
    steps.append(Message("reason.respiratory_lines", {**lines}))
    if not apart:
        steps.append(Message("reason.lines_too_close", {"acute": acute, "chronic": chronic}))
    if acidotic:
        steps.append(Message("reason.acidotic_all_the_same", {"ph": ph, "low": NORMAL_PH_LOW}))
    return tuple(steps)
