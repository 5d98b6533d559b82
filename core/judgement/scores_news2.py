"""NEWS2 (Royal College of Physicians 2017) on both SpO2 scales. Range 0-20.

Inputs: respiratory rate /min, SpO2 %, oxygen or air, systolic pressure mmHg, pulse /min, ACVPU, temperature
degC. Whole-number inputs are rounded half-up to whole numbers, temperature to one decimal, and then binned.
Scale 2 only where a clinician recorded it, for hypercapnic failure with a prescribed target of 88-92 %.
"""

from __future__ import annotations

from collections.abc import Mapping
from math import isfinite
from typing import Final

from core.judgement.scores_binning import Input, half_up
from core.judgement.scores_result import Part, Score, frozen, known, missing_part, total
from core.record.message import Message

SOURCE: Final = "Royal College of Physicians, National Early Warning Score (NEWS) 2, 2017"
CERTAINTY: Final = "confirmed"

Bins = tuple[tuple[float, int], ...]
_INFINITE: Final = float("inf")

BINS: Final[Mapping[str, tuple[int, Bins]]] = {
    "rr": (0, ((8, 3), (11, 1), (20, 0), (24, 2), (_INFINITE, 3))),
    "sbp": (0, ((90, 3), (100, 2), (110, 1), (219, 0), (_INFINITE, 3))),
    "hr": (0, ((40, 3), (50, 1), (90, 0), (110, 1), (130, 2), (_INFINITE, 3))),
    "temp": (1, ((35.0, 3), (36.0, 1), (38.0, 0), (39.0, 1), (_INFINITE, 2))),
}
"""Per input: decimals it is rounded to; upper edges, each included, with their points."""

SCALE_1: Final[Bins] = ((91, 3), (93, 2), (95, 1), (_INFINITE, 0))
SCALE_2_ON_OXYGEN: Final[Bins] = ((83, 3), (85, 2), (87, 1), (92, 0), (94, 1), (96, 2), (_INFINITE, 3))
SCALE_2_ON_AIR: Final[Bins] = ((83, 3), (85, 2), (87, 1), (_INFINITE, 0))
ACVPU: Final[Mapping[str, int]] = {"alert": 0, "confusion": 3, "voice": 3, "pain": 3, "unresponsive": 3}


def _points(bins: Bins, binned: float) -> int:
    return next(points for upper, points in bins if binned <= upper + 1e-9)


def _number_part(name: str, value: Input, text: str | None) -> Part:
    decimals, bins = BINS[name]
    binned = half_up(value, decimals, text)
    if binned is None or value is None:
        return missing_part(0, max(points for _, points in bins))
    return known(float(value), binned, _points(bins, binned))


def _spo2_part(value: Input, on_oxygen: bool | None, scale: int, text: str | None) -> Part:
    binned = half_up(value, 0, text)
    if binned is None or value is None:
        return missing_part(0, 3)
    if scale == 1:
        return known(float(value), binned, _points(SCALE_1, binned))
    on_air, on_o2 = _points(SCALE_2_ON_AIR, binned), _points(SCALE_2_ON_OXYGEN, binned)
    if on_oxygen is None and on_air != on_o2:
        return Part(float(value), binned, None, on_air, on_o2)
    return known(float(value), binned, on_o2 if on_oxygen else on_air)


def _oxygen_part(on_oxygen: bool | None) -> Part:
    if on_oxygen is None:
        return missing_part(0, 2)
    return known(on_oxygen, on_oxygen, 2 if on_oxygen else 0)


def _consciousness_part(acvpu: str | None) -> Part:
    if acvpu is None or not acvpu.strip():
        return missing_part(0, 3)
    level = acvpu.strip().casefold()
    if level not in ACVPU:
        raise ValueError(f"NEWS2 consciousness {acvpu!r} is not one of {', '.join(ACVPU)}")
    return known(acvpu, level, ACVPU[level])


def news2(
    *,
    rr: Input = None,
    spo2: Input = None,
    on_oxygen: bool | None = None,
    sbp: Input = None,
    hr: Input = None,
    acvpu: str | None = None,
    temp: Input = None,
    scale: int = 1,
    texts: Mapping[str, str | None] | None = None,
    age: Input = None,
) -> Score:
    """NEWS2 with its bounds.

    Args:
        rr, spo2, sbp, hr, temp: the inputs, None or NaN where not known.
        on_oxygen: True on oxygen, mask ventilation with FiO2 above 0.21 included (common practice).
        acvpu: alert, confusion (new), voice, pain or unresponsive.
        scale: SpO2 scale 1, or 2 where a clinician recorded it.
        texts: the inputs as typed, by name, in the same unit; they decide a rounding edge.
        age: years; below 16 the score was not made for the patient.

    Raises:
        ValueError: a scale or a level of consciousness that NEWS2 does not know.

    >>> seen = dict(rr=26, spo2=90, on_oxygen=True, sbp=118, hr=112, acvpu="alert", temp=37.4)
    >>> news2(**seen, scale=2).points, news2(**seen, scale=1).points
    (7, 10)
    """
    if scale not in (1, 2):
        raise ValueError(f"NEWS2 SpO2 scale {scale!r} is not 1 or 2")
    texts = texts or {}
    parts = {
        "rr": _number_part("rr", rr, texts.get("rr")),
        "spo2": _spo2_part(spo2, on_oxygen, scale, texts.get("spo2")),
        "on_oxygen": _oxygen_part(on_oxygen),
        "sbp": _number_part("sbp", sbp, texts.get("sbp")),
        "hr": _number_part("hr", hr, texts.get("hr")),
        "acvpu": _consciousness_part(acvpu),
        "temp": _number_part("temp", temp, texts.get("temp")),
    }
    points, lowest, highest, _ = total(parts)
    missing = tuple(name for name, part in parts.items() if part.points is None and part.value is None)
    child = age is not None and isfinite(age) and age < 16
    reason = Message("population.below_16", {"age": age}) if child else None
    return Score(
        "news2", points, lowest, highest, missing, frozen(parts), "outside" if child else "inside", reason,
        CERTAINTY, SOURCE, (Message("news2.scale", {"scale": scale}),),
    )  # fmt: skip


def single_three(score: Score) -> bool:
    """Whether one input alone scores 3, which asks for an urgent look whatever the sum.

    >>> single_three(news2(acvpu="voice"))
    True
    """
    return any(part.points == 3 for part in score.parts.values())


def band(score: Score) -> Message:
    """The clinical risk band of a NEWS2, by its points, or its lowest possible points where inputs are missing.

    How often to look is given where a source says so: `sure` tells which. `at_least` is True where inputs are
    missing, so that the band can only be this or higher.

    >>> band(news2(rr=26, spo2=90, on_oxygen=True, sbp=118, hr=112, acvpu="alert", temp=37.4, scale=2)).key
    'news2.high'
    """
    lowest = score.lowest or 0.0
    values: dict[str, str | float | int | bool | None] = {"points": score.points, "lowest": lowest}
    values["at_least"] = score.points is None
    if lowest >= 7:
        return Message("news2.high", values | {"sure": "confirmed"})
    if lowest >= 5:
        return Message("news2.medium", values | {"sure": "confirmed"})
    if single_three(score):
        return Message("news2.low_medium", values | {"sure": "confirmed"})
    if lowest >= 1:
        return Message("news2.low", values | {"sure": "secondary"})
    return Message("news2.none", values | {"sure": "from memory"})


def breathes_oxygen(fio2: Input, o2_flow: Input) -> bool | None:
    """Whether a patient counts as on oxygen: FiO2 above 0.21 or any flow is yes; None where neither is known.

    An oxygen flow without FiO2 is yes. Common practice, no source.

    >>> [breathes_oxygen(*known) for known in ((0.21, None), (0.28, None), (None, 2), (None, None))]
    [False, True, True, None]
    """
    flow = o2_flow if o2_flow is not None and isfinite(o2_flow) else None
    fraction = fio2 if fio2 is not None and isfinite(fio2) else None
    if flow is not None and flow > 0:
        return True
    if fraction is not None:
        return fraction > 0.21 + 1e-9
    return None if flow is None else False
