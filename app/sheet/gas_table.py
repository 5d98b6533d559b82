"""The table of a shift's gases with their differences, as words."""

from __future__ import annotations

from dataclasses import dataclass

from app.look import formats
from app.telling.language import in_language as tr
from app.words.differences import paco2_change, ph_change
from app.words.figure_lines import FigureLines
from app.words.verdict_loss import with_loss
from core.figures.shift import ShiftFigures
from core.judgement.response_shapes import JudgedGas, ResponseFigure
from core.judgement.shapes import GasFigure

PLUS_MINUS = "+/\N{MINUS SIGN}"
HEADINGS = (
    "Time",
    "Site",
    "pH",
    PLUS_MINUS,
    "PaCO2",
    PLUS_MINUS,
    "PaO2",
    "HCO3",
    "P/F",
    "FiO2",
    "State",
    "Against the last change",
)
NO_VALUE = "-"


@dataclass(frozen=True, slots=True)
class GasRow:
    """One gas. `delta_ph` and `delta_paco2` are against the baseline of the change it judges ("" for none)."""

    at: str
    site: str
    ph: str
    delta_ph: str
    paco2: str
    delta_paco2: str
    pao2: str
    hco3: str
    pf: str
    fio2: str
    state: str
    verdict: str
    is_before: bool = False


def gas_rows(s: ShiftFigures, lines: FigureLines) -> tuple[GasRow, ...]:
    """The gases of the shift, and the last one before it to compare with."""
    judged = judgements(s.now.responses)
    bases = {r.baseline_at for r in s.now.responses}
    found = [(g, True) for g in (s.gas_before,) if g is not None] + [(g, False) for g in s.gases]
    return tuple(_row(g, judged.get(g.at), lines, is_before=b, is_base=g.at in bases) for g, b in found)


def judgements(responses: tuple[ResponseFigure, ...]) -> dict[int, JudgedGas]:
    """For each gas the change it is attributed to: the newest that it can judge."""
    found: dict[int, JudgedGas] = {}
    for r in responses:
        for g in r.gases:
            if g.attributable:
                found[g.at] = g
    return found


def _row(g: GasFigure, j: JudgedGas | None, lines: FigureLines, *, is_before: bool, is_base: bool) -> GasRow:
    unit = lines.reader.gas_unit

    def pressure(value: float | None) -> str:
        return NO_VALUE if value is None else formats.gas_pressure(value, unit).removesuffix(f" {unit}")

    hco3 = g.hco3_mmol_L if g.hco3_mmol_L is not None else g.hco3_calculated_mmol_L
    mark = "" if g.hco3_mmol_L is not None or hco3 is None else "c"
    state = lines.state(g.state, g.at) if g.state else ""
    marks = [m for m in lines.gas_marks(g) if m != state]
    return GasRow(
        lines.reader.time(g.at),
        g.site[:3] + ("?" if g.site_assumed else ""),
        NO_VALUE if g.ph is None else lines.ph(g), ph_change(j) if j else "",
        lines.paco2(g).removesuffix(f" {unit}") if g.paco2_mmHg is not None else NO_VALUE,
        paco2_change(j, unit).removesuffix(f" {unit}") if j else "",
        pressure(g.pao2_mmHg), NO_VALUE if hco3 is None else formats.fixed(hco3, 1) + mark,
        pressure(g.pf_mmHg), NO_VALUE if g.fio2 is None else formats.fraction(g.fio2),
        ", ".join([state or tr("not known"), *marks]), _verdict(j, is_base=is_base), is_before,
    )  # fmt: skip


def _verdict(j: JudgedGas | None, *, is_base: bool) -> str:
    if j is None:
        return tr("baseline") if is_base else tr("not used for a verdict")
    timing = {"early": tr(", early"), "late": tr(", late")}.get(j.timing, "")
    verdict = tr(with_loss(j.verdict or "not judged", lost=j.since_start.gain_lost))
    return f"{verdict} ({formats.minutes(j.minutes)}{timing})"
