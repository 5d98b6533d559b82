"""Pictures of what a page draws, as PNG, SVG or PDF at their own size, never a grab of the screen.

They are drawn in the light look whatever the window's: a picture goes onto paper or into a document.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from pathlib import Path
from typing import TYPE_CHECKING, Final

from app.phrases import translate

if TYPE_CHECKING:
    from app.chart.render import Spec
    from app.pages import Pages
    from app.theme import Theme

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


def write_picture(picture: Picture, theme: Theme, path: Path) -> None:
    """Write a picture; the suffix says which kind. Needs a QApplication.

    Raises:
        ValueError: the suffix is none of `SUFFIXES`.
        OSError: the file cannot be written; what was there before is gone only when the new one is whole.
    """
    from app.whole_file import write_whole

    write_whole(path, picture_data(picture, theme, path.suffix.lower()))


def picture_data(picture: Picture, theme: Theme, suffix: str) -> bytes:
    """A picture as bytes: Qt only warns where a disk is full, and would leave half a file. Needs a QApplication.

    Raises:
        ValueError: the suffix is none of `SUFFIXES`.
    """
    from app.chart.render import image_of, pdf_data, png_data, svg_data

    width, height = picture.size
    if suffix not in SUFFIXES:
        raise ValueError(f"'{suffix}' is none of {', '.join(SUFFIXES)}")
    if suffix == ".svg":
        return svg_data(picture.spec, theme, width, height, picture.title)
    if suffix == ".pdf":
        return pdf_data(picture.spec, theme, width, height, picture.title)
    return png_data(image_of(picture.spec, theme, width, height, SHARP))


def picture_of_page(pages: Pages, theme: Theme) -> Picture | None:
    """What the page that shows draws; None where it is text. `theme` is the look of the picture."""
    name = pages.name
    if name == "ward" and pages.ward.lanes.spec is not None:
        lanes = pages.ward.lanes.spec
        return Picture(lanes, lanes.name, (SIZE[0], max(240, 90 + 62 * len(lanes.lanes))))
    if name == "episode" and pages.episode.stack.spec is not None:
        spec = replace(pages.episode.stack.spec, window=pages.episode.stack.in_view)
        return Picture(spec, spec.name)
    if name == "map" and (map_spec := pages.map.picture_spec()) is not None:
        return Picture(map_spec, map_spec.name, (900, 760))
    if name == "compare" and pages.compare.chart.comparison is not None:
        from app.compare.picture import ComparisonPicture

        title = translate("picture", "Episodes by hours since the start of support")
        return Picture(ComparisonPicture(pages.compare.chart.comparison, theme, title), title, (1280, 960))
    if name == "statistics" and pages.statistics.found is not None:
        from app.statistics.bars import StatisticsPicture

        view, found = pages.statistics, pages.statistics.found
        return Picture(StatisticsPicture(found, view.reader, theme), view.title.text(), (900, 1000))
    return None
