"""Time on the mask and leak, as rows."""

from __future__ import annotations

from collections.abc import Iterator

from app.figures.rows import FigureRow, RowInput, RowMaker
from app.figures.values import slope_band, slope_text, span_text
from app.look import formats
from app.policy.names import in_force
from app.telling.presumed import presumed_word
from core.judgement.shapes import EpisodeFigures, LeakFigure
from core.record.instant import MINUTE, Instant


def mask_rows(f: EpisodeFigures, make: RowMaker) -> Iterator[FigureRow]:
    """Hours on the mask, since the start and in the last 24 h."""
    s = f.support
    given = [RowInput(make.tr("Support started"), "", s.since)] if s.since is not None else []
    if s.ended_at is not None:
        given.append(RowInput(make.tr("Support ended"), "", s.ended_at))
    if s.break_since is not None:
        given.append(RowInput(make.tr("Off the mask since"), "", s.break_since))
    unlogged = make.tr("Doubtful: a break that nobody logged may count as on the mask")
    doubt = unlogged if f.leak.probable_breaks else ""
    presumed = {
        "hours_on_mask": presumed_word(s, make.reader.zone),
        "hours_on_mask_last_24h": presumed_word(s, make.reader.zone, last_day=True),
    }
    at = s.ended_at if s.ended_at is not None else f.as_of
    rows = (
        ("hours_on_mask", make.tr("Hours on the mask"), s.hours_on_mask),
        ("hours_on_mask_last_24h", make.tr("Hours on the mask, last 24 h"), s.hours_on_mask_last_24h),
    )
    for key, name, hours in rows:
        value = "" if hours is None else formats.hours(hours)
        why = "" if value else make.say(s.reasons.get(key)) or make.tr("Not known")
        told = ". ".join(part for part in (presumed[key], doubt) if part)
        yield FigureRow(key, name, value, at if value else None, told if value else "", (), why, tuple(given))


def leak_rows(f: EpisodeFigures, make: RowMaker) -> Iterator[FigureRow]:
    """Leak: its middle, its limit, time over it, what an adjustment of the mask did, breaks nobody logged."""
    leak = f.leak
    yield _median(leak, make)
    yield _limit(leak, make)
    yield _over(leak, make)
    if leak.readings_typed and leak.limit_L_per_min is not None:
        yield _typed_over(leak, make)
    if leak.over_since is not None:
        lasts = (_how_long(f.as_of - leak.over_since, make),)
        yield FigureRow("leak_over_since", make.name("leak_over_since"), make.reader.time(leak.over_since),
                        notes=lasts, inputs=_of_limit(leak, make))  # fmt: skip
    if leak.adjusted_at is not None:
        yield _adjustment(leak, leak.adjusted_at, make)
    if leak.probable_breaks:
        yield _breaks(leak, make)


def leak_trend(leak: LeakFigure, make: RowMaker) -> FigureRow:
    """Leak's slope per hour with its interval."""
    slope, low, high = leak.slope_L_per_min_per_h, leak.slope_low, leak.slope_high
    value = "" if slope is None else slope_text("leak", slope, make.reader)
    why = "" if value else make.say(leak.reasons.get("slope_L_per_min_per_h")) or make.tr("Too few values")
    band = "" if low is None or high is None or not value else slope_band("leak", low, high, make.reader)
    notes = [band, make.say(leak.reasons.get("slope_low")) if value else ""]
    latest = _newest(leak, make)
    inputs = (latest,) if leak.latest_at is not None else ()
    return FigureRow("slope", make.tr("Leak"), value, leak.latest_at if value else None, "",
                     tuple(n for n in notes if n), why, inputs)  # fmt: skip


def _median(leak: LeakFigure, make: RowMaker) -> FigureRow:
    value = _amount(leak.median_L_per_min)
    why = "" if value else make.say(leak.reasons.get("median_L_per_min")) or make.tr("Not known")
    meant = leak.definition if leak.definition else make.tr("meaning not said")
    notes = [make.tr("Leak as the device means it: {meant}").format(meant=make.tr(meant))] if value else []
    latest = _newest(leak, make)
    inputs = (latest,) if leak.latest_at is not None else ()
    return FigureRow("leak_median", make.tr("Leak, median"), value, leak.latest_at if value else None,
                     "", tuple(notes), why, inputs, median_of=leak.median_of if value else None)  # fmt: skip


def _newest(leak: LeakFigure, make: RowMaker) -> RowInput:
    """The leak now, beside its middle over hours."""
    return RowInput(make.tr("Newest"), _amount(leak.latest_L_per_min), leak.latest_at, leak.latest_median_of)


def _limit(leak: LeakFigure, make: RowMaker) -> FigureRow:
    value = _amount(leak.limit_L_per_min)
    why = "" if value else make.say(leak.reasons.get("limit_L_per_min")) or make.tr("Not known")
    assumed = make.say(leak.reasons.get("assumption")) if value else ""
    return FigureRow("leak_limit", make.name("leak_limit"), value, notes=(assumed,) if assumed else (), why=why,
                     inputs=_meaning(leak, make))  # fmt: skip


def _over(leak: LeakFigure, make: RowMaker) -> FigureRow:
    minutes = leak.minutes_over_limit
    value = "" if minutes is None else formats.minutes(minutes)
    why = "" if value else make.say(leak.reasons.get("minutes_over_limit")) or make.tr("Not known")
    counted = _counted(leak, make) if value else ()
    if value and leak.sampled_in_part and leak.minutes_sampled is not None:
        length = formats.minutes(leak.minutes_sampled)
        counted += (make.tr("The device's samples cover {length} of it").format(length=length),)
    name = make.tr("Time over the leak limit")
    return FigureRow("leak_minutes_over", name, value, notes=counted, why=why, inputs=_of_limit(leak, make))


def _typed_over(leak: LeakFigure, make: RowMaker) -> FigureRow:
    """How many of the readings that people typed were over the limit: none of them has a length."""
    value = make.tr("{over} of {of} readings").format(over=leak.readings_typed_over, of=leak.readings_typed)
    notes = (make.tr("Typed now and then: how long it was over is not known"), *_counted(leak, make))
    if leak.readings_typed_over and leak.minutes_sampled is None:
        rules = in_force().leak
        asked = make.tr("Its flag asks for {n} of {m} min: not judged from typed readings")
        n, m = (formats.trimmed(bound.value) for bound in (rules.over_minutes, rules.of_minutes))
        notes += (asked.format(n=n, m=m),)
    name = make.name("leak_readings_over")
    return FigureRow("leak_readings_over", name, value, notes=notes, inputs=_of_limit(leak, make))


def _counted(leak: LeakFigure, make: RowMaker) -> tuple[str, ...]:
    if leak.counted is None:
        return ()
    first, last = (make.reader.time(at) for at in leak.counted)
    return (make.tr("Counted from {first} to {last} only").format(first=first, last=last),)


def _adjustment(leak: LeakFigure, at: Instant, make: RowMaker) -> FigureRow:
    before, after = leak.before_adjustment_L_per_min, leak.after_adjustment_L_per_min
    both = before is not None and after is not None
    value = span_text(_amount(before), _amount(after), make.reader) if both else ""
    given = (
        RowInput(make.tr("Before"), _amount(before) or make.tr("not known"), at),
        RowInput(make.tr("After"), _amount(after) or make.tr("not known"), at),
    )
    why = "" if both else make.tr("Leak not known on one side of the adjustment")
    span = formats.trimmed(in_force().trend.device_median_min.value)
    notes = (make.tr("Medians of the {span} min before and after it").format(span=span),) if both else ()
    return FigureRow("leak_around_adjustment", make.tr("Leak around the last mask adjustment"), value, at, "", notes,
                     why, given)  # fmt: skip


def _breaks(leak: LeakFigure, make: RowMaker) -> FigureRow:
    count = len(leak.probable_breaks)
    spans = []
    for start, end in leak.probable_breaks:
        until = make.tr("still") if end is None else make.reader.time(end)
        spans.append(RowInput(make.tr("From {start}").format(start=make.reader.time(start)), until, None))
    newest = leak.probable_breaks[-1][0]
    return FigureRow("probable_breaks", make.name("probable_breaks"), str(count), newest, "",
                     (make.tr("Asked about, never taken as logged"),), inputs=tuple(spans))  # fmt: skip


def _meaning(leak: LeakFigure, make: RowMaker) -> tuple[RowInput, ...]:
    if not leak.definition:
        return ()
    return (RowInput(make.tr("What the device calls leak"), make.tr(leak.definition)),)


def _of_limit(leak: LeakFigure, make: RowMaker) -> tuple[RowInput, ...]:
    limit = _amount(leak.limit_L_per_min)
    return (*((RowInput(make.name("leak_limit"), limit),) if limit else ()), *_meaning(leak, make))


def _amount(value: float | None) -> str:
    return "" if value is None else formats.quantity("leak", value)


def _how_long(length: int, make: RowMaker) -> str:
    return make.tr("For {length}").format(length=formats.minutes(length / MINUTE))
