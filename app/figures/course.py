"""What is expected, and what lies between gases, after the last change: shown, never judged by."""

from __future__ import annotations

from bisect import bisect_left
from collections.abc import Iterator

from app.figures.rows import FigureRow, RowInput, RowMaker, with_lines
from app.figures.values import span_text
from app.look import formats
from core.judgement.response_shapes import CourseValue
from core.judgement.shapes import EpisodeFigures, ExpectedCO2


def course_rows(f: EpisodeFigures, make: RowMaker) -> Iterator[FigureRow]:
    """The expected PaCO2 against the gas, and pH and PaCO2 at set minutes after the last change."""
    if f.expected_co2 is not None:
        yield _expected(f.expected_co2, make)
    if f.responses:
        last = f.responses[-1]
        for minutes, value in sorted(last.at_minutes.items(), key=lambda item: int(item[0])):
            change = RowInput(make.tr("The change"), "", last.anchor_at)
            yield _at_minutes(int(minutes), value, change, make)


def _expected(found: ExpectedCO2, make: RowMaker) -> FigureRow:
    key, name = "expected_co2", make.tr("PaCO2 expected")
    if not found.t:
        why = make.say(found.reasons.get("expected_mmHg")) or make.tr("Not known")
        return FigureRow(key, name, why=why)
    at = found.t[-1] if found.observed_at is None else found.observed_at
    i = min(bisect_left(found.t, at), len(found.t) - 1)
    band = span_text(_pressure(found.low_mmHg[i], make), _pressure(found.high_mmHg[i], make), make.reader)
    value = f"{_pressure(found.expected_mmHg[i], make)} ({band})"
    notes = [make.tr("Expected, never measured")]
    gap = found.observed_minus_expected_mmHg
    if gap is not None:
        by = formats.gas_pressure(gap, make.reader.gas_unit, sign=True)
        notes.insert(0, make.tr("Measured minus expected: {by}").format(by=by))
    reasons = "; ".join(make.say(m) for m in found.explanations)
    lines = [make.tr("What may explain it: {reasons}").format(reasons=reasons)] if reasons else []
    lines += [make.say(m) for m in found.assumptions]
    row = FigureRow(key, name, value, at, "", tuple(notes), wide=True, inputs=_measured(found, make))
    return with_lines(row, lines)


def _measured(found: ExpectedCO2, make: RowMaker) -> tuple[RowInput, ...]:
    gap, at = found.observed_minus_expected_mmHg, found.observed_at
    if gap is None or at is None:
        return ()
    i = min(bisect_left(found.t, at), len(found.t) - 1)
    return (RowInput(make.tr("PaCO2, measured"), _pressure(found.expected_mmHg[i] + gap, make), at),)


def _at_minutes(minutes: int, value: CourseValue, change: RowInput, make: RowMaker) -> FigureRow:
    name = make.tr("{minutes} after it").format(minutes=formats.minutes(minutes))
    parts = [
        _span("pH", value.ph, value.ph_low, value.ph_high, make, is_pressure=False),
        _span("PaCO2", value.paco2_mmHg, value.paco2_low_mmHg, value.paco2_high_mmHg, make, is_pressure=True),
    ]
    text = ", ".join(p for p in parts if p)
    basis = make.say(value.basis)
    notes = (basis,) if text and basis else ()
    return FigureRow("course", name, text, None, "", notes, "" if text else basis or make.tr("Not known"), (change,),
                     wide=True)  # fmt: skip


def _span(
    name: str, value: float | None, low: float | None, high: float | None, make: RowMaker, *, is_pressure: bool
) -> str:
    def text(number: float) -> str:
        return _pressure(number, make) if is_pressure else formats.fixed(number, 2)

    if low is None or high is None:
        return "" if value is None else f"{name} {text(value)}"
    band = span_text(text(low), text(high), make.reader)
    return f"{name} {band}" if value is None else f"{name} {text(value)} ({band})"


def _pressure(mmhg: float, make: RowMaker) -> str:
    return formats.gas_pressure(mmhg, make.reader.gas_unit)
