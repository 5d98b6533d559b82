"""Pictures of what a page draws, as PNG, SVG or PDF at their own size, never a grab of the screen.

They are drawn in the light look whatever the window's: a picture goes onto paper or into a document.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING, Final

from app.look.formats import wall
from app.telling.phrases import translate
from core.record.instant import Instant

if TYPE_CHECKING:
    from PySide6.QtGui import QPainter

    from app.chart.render import ChartSpec, Spec
    from app.look.theme import Theme
    from app.window.pages import Pages

SUFFIXES: Final = (".png", ".svg", ".pdf")
SIZE: Final = (1280, 800)
"""In pixels of 1/96 inch: on paper 34 by 21 cm, and it may be scaled, for SVG and PDF hold no pixels."""
SHARP: Final = 2.0
"""Dots per pixel of a PNG, so that it prints well."""


@dataclass(frozen=True, slots=True)
class Picture:
    """What is to be drawn, and its title."""

    spec: Spec
    title: str
    size: tuple[int, int] = SIZE


@dataclass(frozen=True, slots=True)
class Titled:
    """A chart under a line that says whose it is and as of when: a picture by itself must not be taken for another's.
    Needs a QApplication."""

    spec: ChartSpec
    theme: Theme
    title: str

    def paint_on(self, painter: QPainter, width: int, height: int) -> None:
        """Paint at the painter's origin on a surface of this size."""
        from app.chart.picture_title import draw_picture_title
        from app.chart.render import paint_chart

        top = draw_picture_title(painter, self.theme, self.title, width)
        painter.save()
        painter.translate(0, top)
        paint_chart(self.spec, self.theme, painter, width, height - top, painter.worldTransform().m11())
        painter.restore()


def write_picture(picture: Picture, theme: Theme, path: Path) -> None:
    """Write a picture; the suffix says which kind. Needs a QApplication.

    Raises:
        ValueError: the suffix is none of `SUFFIXES`.
        OSError: the file cannot be written; what was there before is gone only when the new one is whole.
    """
    from app.keeping.whole_file import write_whole

    write_whole(path, picture_data(picture, theme, path.suffix.lower()))


def picture_data(picture: Picture, theme: Theme, suffix: str) -> bytes:
    """A picture as bytes: Qt only warns where a disk is full, and would leave half a file. Needs a QApplication.

    Raises:
        ValueError: the suffix is none of `SUFFIXES`.
    """
    from app.chart.render import image_of, pdf_data, png_data, svg_data
    from app.picture.foot import Cautioned

    width, height = picture.size
    if suffix not in SUFFIXES:
        raise ValueError(f"'{suffix}' is none of {', '.join(SUFFIXES)}")
    spec = Cautioned(picture.spec, theme)
    if suffix == ".svg":
        return svg_data(spec, theme, width, height, picture.title)
    if suffix == ".pdf":
        return pdf_data(spec, theme, width, height, picture.title)
    return png_data(image_of(spec, theme, width, height, SHARP))


def compare_title(moment: str) -> str:
    """What stands over a comparison."""
    return translate("picture", "Episodes by hours since the start of support, {moment}").format(moment=moment)


def moment_words(as_of: Instant, as_known_at: Instant | None, zone: str) -> str:
    """As of when a picture is, and as known when.

    >>> moment_words(0, None, "UTC")
    'as of 01-Jan-1970 00:00'
    """
    if as_known_at is not None:
        return translate("picture", "as known at {time}").format(time=wall(as_known_at, zone))
    return translate("picture", "as of {time}").format(time=wall(as_of, zone))


def picture_of_page(pages: Pages, theme: Theme, moment: str) -> Picture | None:
    """What the page that shows draws; None where it is text. `theme` is the look of the picture, `moment` says as of
    when it is, e.g. `as of 28-Mar-2026 05:30`."""
    name = pages.name
    if name == "ward" and pages.ward.lanes.spec is not None:
        lanes = pages.ward.lanes.spec
        title = translate("picture", "The ward, {moment}").format(moment=moment)
        size = SIZE[0], max(280, 130 + 62 * len(lanes.lanes))
        return Picture(Titled(lanes, theme, title), title, size)
    shown = pages.episode.on_screen if name == "episode" else None
    if shown is not None and pages.episode.stack.spec is not None:
        spec = replace(pages.episode.stack.spec, window=pages.episode.stack.in_view)
        title = f"{shown.figures.label} ({shown.figures.episode}), {moment}"
        return Picture(Titled(spec, theme, title), title)
    if name == "map" and (map_spec := pages.map.picture_spec()) is not None:
        return Picture(map_spec, map_spec.name, (900, 760))
    if name == "compare" and pages.compare.chart.comparison is not None:
        from app.compare.picture import ComparisonPicture

        title = compare_title(moment)
        return Picture(ComparisonPicture(pages.compare.chart.comparison, theme, title), title, (1280, 960))
    if name == "statistics" and pages.statistics.found is not None:
        from app.statistics.bars import StatisticsPicture

        view, found = pages.statistics, pages.statistics.found
        return Picture(StatisticsPicture(found, view.reader, theme), view.title.text(), (900, 1000))
    return None
