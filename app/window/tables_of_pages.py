"""Every chart as a table and a text: for screen readers, for copying, and for whoever trusts numbers more."""

from __future__ import annotations

from app.chart.shapes import LanesSpec
from app.compare.courses import Comparison, words_of
from app.look.formats import fixed, wall
from app.telling.phrases import translate
from app.telling.table import Table
from app.ward.view import WardContent
from app.window.shell import Shell


def table_of_lanes(spec: LanesSpec, content: WardContent) -> Table:
    """The ward as a table: a row for each lane."""
    heads = (
        translate("tables", "Bed"),
        translate("tables", "About"),
        translate("tables", "State"),
        translate("tables", "Response"),
        translate("tables", "Open flags"),
        translate("tables", "Next due"),
        translate("tables", "Items along the clock"),
    )
    rows = tuple(
        (
            lane.title,
            lane.subtitle,
            lane.state_word,
            lane.verdict_word,
            lane.flag_word,
            lane.due_word,
            "; ".join(i.sentence for i in lane.items),
        )
        for lane in spec.lanes
    )
    title = translate("tables", "Ward as of {time}").format(time=wall(content.as_of, content.zone))
    return Table(title, heads, rows, "\n".join(lane.sentence for lane in spec.lanes))


def table_of_comparison(comparison: Comparison) -> Table:
    """A comparison as a table: a row for each value."""
    heads = (
        translate("tables", "Quantity"),
        translate("tables", "Episode"),
        translate("tables", "Hours since start"),
        translate("tables", "Value"),
        translate("tables", "Unit"),
    )
    rows = tuple(
        (
            row.title,
            comparison.names[line.number],
            fixed(float(h), 2),
            fixed(float(v), row.decimals),
            row.unit,
        )
        for row in comparison.rows
        for line in row.lines
        for h, v in zip(line.hours, line.values, strict=True)
        if v == v
    )
    return Table(translate("tables", "Episodes by hours since start"), heads, rows, "\n".join(words_of(comparison)))


def table_of_page(window: Shell) -> Table | None:
    """The table of the page that the window shows; None where it is text already."""
    pages, feed = window.pages, window.feed
    if pages is None or feed is None:
        return None
    if pages.name == "ward" and pages.ward.lanes.spec is not None:
        return table_of_lanes(pages.ward.lanes.spec, feed.content())
    if pages.name == "episode" and pages.episode.on_screen is not None and pages.episode.stack.spec is not None:
        from app.episode.stack_table import table_of_stack

        return table_of_stack(pages.episode.stack.spec, pages.episode.stack.in_view)
    if pages.name == "compare" and pages.compare.chart.comparison is not None:
        return table_of_comparison(pages.compare.chart.comparison)
    if pages.name == "map":
        return pages.map.as_table()
    if pages.name == "statistics":
        return pages.statistics.as_table()
    return None
