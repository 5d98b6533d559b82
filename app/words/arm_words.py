"""Both arms of a judged gas in words: CO2 is called better or worse only where CO2 was or is at issue.

A hypoxaemic patient whose alkalosis grows is not "CO2 better", nor "CO2 worse" when pH comes back to its limits:
there pH and PaCO2 are told as they moved.
"""

from __future__ import annotations

from collections.abc import Iterator

from app.words.template import Reader, quantity_name
from core.judgement.response_shapes import JudgedGas

_OVER_CORRECTION = "over-correction"
"""From a high PaCO2 without acidosis too: always told."""


def arm_words(g: JudgedGas, reader: Reader) -> str:
    """Each arm with its verdict, or how pH and PaCO2 moved; "" where neither says anything.

    >>> arm_words(JudgedGas(0, 60.0, "in_window", co2_arm="better", oxygen_arm="mixed"), Reader())
    'CO2 better, oxygen mixed'
    """
    tr = reader.translate
    told = g.co2_at_issue or g.co2_arm == _OVER_CORRECTION
    found = ((tr("CO2"), g.co2_arm if told else None), (tr("oxygen"), g.oxygen_arm))
    said = [f"{name} {tr(verdict)}" for name, verdict in found if verdict]
    return ", ".join(said if told else [*_moved(g, reader), *said])


def arms_agree(g: JudgedGas) -> bool:
    """Whether every arm that speaks says what the verdict says, so that a short line may leave the arms out."""
    return g.co2_at_issue and {g.co2_arm, g.oxygen_arm} - {None} == {g.verdict}


def _moved(g: JudgedGas, reader: Reader) -> Iterator[str]:
    """pH and PaCO2 beyond measurement error, without a verdict."""
    moves = []
    for m in (m for m in g.why if m.key == "response.compared"):
        quantity, way = str(m.values["quantity"]), str(m.values["direction"])
        if quantity in ("ph", "paco2") and way in ("up", "down"):
            moves.append(f"{quantity_name(quantity)} {reader.translate(way)}")
    if moves:
        both = f" {reader.translate('and')} ".join(moves)
        yield reader.translate("{moves} without acute hypercapnia").format(moves=both)
