"""Updated HACOR (Duan, Crit Care 2022;26:196). Its added points are FROM MEMORY: off until a ward switches it on.

Updated = HACOR 2017 + 0.5 x SOFA; pneumonia +2.5; cardiogenic pulmonary oedema -4; pulmonary ARDS +3;
immunosuppression +1.5; septic shock +2.5. Confirmed in the source: population (hypoxaemic failure, at 1-2 h),
cut-offs 7, 10.5 and 14 for a failure probability of 25, 50 and 75 %, and the bands.
"""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace
from typing import Final

from core.judgement.scores_binning import Input, half_up
from core.judgement.scores_hacor import hacor
from core.judgement.scores_result import Part, Score, frozen, known, missing_part, total
from core.record.message import Message

SOURCE: Final = "Duan, Crit Care 2022;26:196 (added points from memory)"
CERTAINTY: Final = "from memory"
FROM_MEMORY: Final = Message("caveat.points_from_memory", {"source": "Duan, Crit Care 2022;26:196"})
SWITCHED_OFF: Final = Message("score.switched_off", {"score": "hacor_updated"})

SOFA_WEIGHT: Final = 0.5
SOFA_MOST: Final = 24.0
FACTS: Final[Mapping[str, float]] = {
    "pneumonia": 2.5,
    "cardiogenic_oedema": -4.0,
    "pulmonary_ards": 3.0,
    "immunosuppression": 1.5,
    "septic_shock": 2.5,
}
BANDS: Final = ((7.0, 25), (10.5, 50), (14.0, 75))
"""Upper edge of points, included, and the failure probability (%) that the edge stands for."""


def _fact_part(name: str, present: bool | None) -> Part:
    points = FACTS[name]
    if present is None:
        return missing_part(min(points, 0.0), max(points, 0.0))
    return known(present, present, points if present else 0.0)


def _sofa_part(sofa: Input) -> Part:
    binned = half_up(sofa, 0)
    if binned is None or sofa is None:
        return missing_part(0.0, SOFA_WEIGHT * SOFA_MOST)
    return known(float(sofa), binned, SOFA_WEIGHT * binned)


def hacor_updated(
    *,
    enabled: bool,
    hr: Input = None,
    ph: Input = None,
    gcs: Input = None,
    pf: Input = None,
    rr: Input = None,
    sofa: Input = None,
    pneumonia: bool | None = None,
    cardiogenic_oedema: bool | None = None,
    pulmonary_ards: bool | None = None,
    immunosuppression: bool | None = None,
    septic_shock: bool | None = None,
    paco2: Input = None,
    texts: Mapping[str, str | None] | None = None,
    on_mask: bool | None = True,
) -> Score:
    """Updated HACOR with its bounds; without figures, and saying why, unless the ward has switched it on.

    Args:
        enabled: the ward's switch. Off: points, lowest and highest are None.
        sofa: 0-24. The risk facts are True, False, or None where nobody said.
        others: as for `scores_hacor.hacor`.

    >>> seen = dict(hr=128, ph=7.28, gcs=14, pf=140, rr=34, sofa=6, pneumonia=True, cardiogenic_oedema=False)
    >>> facts = dict(pulmonary_ards=True, immunosuppression=False, septic_shock=False)
    >>> hacor_updated(enabled=True, **seen, **facts).points
    19.5
    >>> hacor_updated(enabled=False, **seen, **facts).points is None
    True
    """
    original = hacor(hr=hr, ph=ph, gcs=gcs, pf=pf, rr=rr, paco2=paco2, texts=texts, on_mask=on_mask)
    parts = dict(original.parts)
    parts["sofa"] = _sofa_part(sofa)
    given = (pneumonia, cardiogenic_oedema, pulmonary_ards, immunosuppression, septic_shock)
    parts.update({name: _fact_part(name, fact) for name, fact in zip(FACTS, given, strict=True)})
    points, lowest, highest, missing = total(parts)
    made = replace(
        original, name="hacor_updated", points=points, lowest=lowest, highest=highest, missing=missing,
        parts=frozen(parts), certainty=CERTAINTY, source=SOURCE, notes=(FROM_MEMORY,),
    )  # fmt: skip
    if enabled:
        return made
    return replace(made, points=None, lowest=None, highest=None, parts=frozen({}), notes=(SWITCHED_OFF, FROM_MEMORY))


def updated_band(points: float) -> Message:
    """The published band of an updated HACOR: <= 7, 7.5-10.5, 11-14, > 14.

    >>> updated_band(7).values["band"], updated_band(7.5).values["band"], updated_band(19.5).values["band"]
    (0, 1, 3)
    """
    band = sum(points > edge for edge, _ in BANDS)
    return Message("hacor_updated.band", {"band": band, "points": points})
