"""The table of an episode holds what its charts draw, and says so where it thins."""

from dataclasses import replace

import numpy as np

from app.chart.shapes import Drawn, Span, Trace
from app.episode.stack_table import MOST_ROWS, table_of_stack
from app.episode.stack_words import stack_of
from tests.app.chart.conftest import MINUTE
from tests.app.episode.test_stack_words import shown
from tests.support.invented_ward import NOW, failing


def table(spec=None, window=None):
    spec = spec or stack_of(shown(failing()), NOW)
    return table_of_stack(spec, window or (spec.start, spec.end))


def test_settings_verdicts_breaks_events_and_expected_ranges_stand_in_it():
    made = table()
    said = {row[1]: row for row in made.rows}
    settings = [row[2] for row in made.rows if row[1] == "Settings in force"]
    assert len(settings) == 4
    assert "IPAP 12" in settings[0]
    assert any(row[1].startswith("Response, window") and row[2] and row[5] for row in made.rows)
    assert "until" in said["Off support"][2]
    assert "Mask off" in said


def test_only_what_is_in_view_and_the_words_say_which_time():
    spec = stack_of(shown(failing()), NOW)
    part = table(spec, (spec.start, spec.start + 30 * MINUTE))
    assert 0 < len(part.rows) < len(table(spec).rows)
    assert part.text.startswith(part.rows[0][0].split(" ")[0])


def test_a_long_line_is_told_by_lowest_and_highest_and_loses_no_extreme():
    spec = stack_of(shown(failing()), NOW)
    n = 60_000
    t = spec.start + np.linspace(0, spec.end - spec.start, n).astype(np.int64)
    v = np.sin(np.arange(n) / 700) * 10 + 400
    v[31_234], v[40_000] = 999.0, np.nan
    doubt = Span(int(t[31_000]), int(t[32_000]), "leak above 30 L/min")
    line = Trace("vte", "Tidal vol.", "mL", t, v, Drawn.LINE, doubts=(doubt,))
    panel = replace(spec.panels[-1], traces=(line,))
    made = table(replace(spec, panels=(panel,)))
    rows = [row for row in made.rows if row[1] == "Tidal vol."]
    assert 0 < len(rows) <= MOST_ROWS
    assert "lowest and highest of each" in made.text
    (peak,) = [row for row in rows if "999" in row[2]]
    assert peak[5] == "leak above 30 L/min"
    assert all(" to " in row[2] or row[2].isdigit() for row in rows)
    assert any(row[5] == "" for row in rows)
