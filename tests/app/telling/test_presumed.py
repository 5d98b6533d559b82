"""Hours on the mask after a silence are said as presumed, in the row, the sheet's line and the figures."""

from app.telling.presumed import presumed_word, silent_word
from app.words import Reader
from app.words.figure_lines import FigureLines
from core.judgement.shapes import SupportFigure
from core.record.instant import parse

LAST = parse("2026-03-28T05:30:00Z")
SILENT = SupportFigure(
    since=LAST, on_mask=True, hours_on_mask=5968.0, hours_on_mask_last_24h=24.0, silent_since=LAST,
    hours_presumed=5960.0, hours_presumed_last_24h=24.0,
)  # fmt: skip


def test_a_silence_is_said_with_its_moment_and_long_spans_in_days() -> None:
    assert silent_word(SILENT, "UTC") == "nothing logged since 28-Mar-2026 05:30"
    assert presumed_word(SILENT, "UTC") == "248 days 8 h of it presumed: nothing logged since 28-Mar-2026 05:30"
    assert presumed_word(SILENT, "UTC", last_day=True).startswith("24 h of it presumed")
    assert "presumed: nothing logged since" in FigureLines(Reader(zone="UTC")).on_mask(SILENT)


def test_a_fresh_record_says_nothing_of_it() -> None:
    fresh = SupportFigure(since=LAST, on_mask=True, hours_on_mask=3.0)
    assert (silent_word(fresh, "UTC"), presumed_word(fresh, "UTC")) == ("", "")
    assert "presumed" not in FigureLines(Reader(zone="UTC")).on_mask(fresh)
