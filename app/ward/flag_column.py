"""Names of flags for the ward's narrow column."""

from __future__ import annotations

from app.telling.certainty import STAR

FLAG_COLUMN = 38
"""Letters that the flags' column holds at the least size of the window."""


def short_flags(names: list[str]) -> str:
    """Names for a narrow column: the strongest always, others while they fit, then how many more.

    >>> short_flags(["pH below 7.25", "GCS fallen", "SpO2 above range on oxygen at hypercapnic risk"])
    'pH below 7.25; GCS fallen +1'
    """
    short = [_short(name) for name in names]
    told = short[:1]
    for name in short[1:]:
        if len("; ".join((*told, name))) > FLAG_COLUMN:
            break
        told.append(name)
    more = len(short) - len(told)
    return "; ".join(told) + (f" +{more}" if more else "")


def _short(name: str) -> str:
    """A name without what stands behind its colon; the star of an unconfirmed threshold stays.

    >>> _short("HACOR above 5*"), _short("pH below 7.30 and not better: level of care*")
    ('HACOR above 5*', 'pH below 7.30 and not better*')
    """
    star = STAR if name.endswith(STAR) else ""
    return _brief(name.removesuffix(STAR).partition(":")[0]) + star


def _brief(name: str) -> str:
    """A name without its last part where the column has no room for it; the flag's sentence says it whole.

    >>> _brief("SpO2 above range on oxygen, hypercapnic risk")
    'SpO2 above range on oxygen'
    """
    return name.rpartition(", ")[0] or name if len(name) > FLAG_COLUMN else name
