"""How a shift figure was counted, for the key that explains."""

from __future__ import annotations

from app.explain.explanation import Explanation
from app.statistics.measures import Measure
from app.telling.phrases import translate
from app.words import Reader
from core.figures.ward_statistics import WardStatistics


def explain_measure(measure: Measure, found: WardStatistics, reader: Reader) -> Explanation:
    """How one figure of a span came about, what it leaves out, and where a limit comes from."""
    span = translate("statistics", "Counted from {start} to {end}, over {count} episodes.").format(
        start=reader.time(found.start), end=reader.time(found.end), count=found.episodes)  # fmt: skip
    return Explanation(
        f"{measure.name}: {measure.shown}",
        rules=(span, *_how(measure.group)),
        notes=(measure.note,) if measure.note else (),
        source=measure.source or translate("statistics", "counted from the record, no limit in it"),
    )


def _how(group: str) -> tuple[str, ...]:
    """How the figures of a group are counted; groups are known by the words they are shown under."""
    return {
        translate("statistics", "Episodes"): (
            translate("statistics", "An episode counts where it was on the ward at any moment of the span."),
            translate("statistics", "Starts and ends count in the span in which they happened; logged breaks are no "
                                    "hours on the mask, breaks that nobody logged are."),
        ),
        translate("statistics", "Time to start"): (
            translate("statistics", "A start counts in the span in which it happened, where both ends of its "
                                    "clock are recorded; the median is the middle of the sorted waits."),
        ),
        translate("statistics", "Gases"): (
            translate("statistics", "A gas counts by its sample time, once, by its minutes after the latest change."),
        ),
        translate("statistics", "Responses"): (
            translate("statistics", "A start or change counts once, by its headline, in the span in which it "
                                    "was made."),
        ),
        translate("statistics", "Flags"): (
            translate("statistics", "A flag counts where it began; who saw or settled it counts by the end of "
                                    "the span."),
        ),
    }.get(group, ())  # fmt: skip
