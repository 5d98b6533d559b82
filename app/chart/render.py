"""Pictures of charts at their own resolution, drawn by QPainter and never grabbed from a screen.

A chart is laid out off-screen at the wanted size and painted into the device.
"""

from pathlib import Path
from typing import TYPE_CHECKING, Protocol

from PySide6.QtCore import QBuffer, QIODevice, QMarginsF, QRectF, QSize, QSizeF, Qt
from PySide6.QtGui import QColor, QImage, QPageSize, QPainter, QPdfWriter
from PySide6.QtWidgets import QApplication

from app.chart.acid_base_map import AcidBaseMap
from app.chart.lanes import WardLanes
from app.chart.shapes import LanesSpec, MapSpec, StackSpec
from app.look.theme import Theme

if TYPE_CHECKING:
    from app.chart.stack import PanelStack


class Painted(Protocol):
    """Something that paints itself at any size, without being a chart of this package."""

    def paint_on(self, painter: QPainter, width: int, height: int) -> None:
        """Paint at the painter's origin on a surface of this size."""


ChartSpec = StackSpec | LanesSpec | MapSpec
Spec = ChartSpec | Painted
_DOTS_PER_INCH = 96  # one pixel of a chart is 1/96 inch on paper


def chart_of(
    spec: ChartSpec, theme: Theme, width: int, height: int, scale: float = 1.0
) -> "PanelStack | WardLanes | AcidBaseMap":
    """A chart laid out off-screen at a size in pixels, to be painted with `scale` dots per pixel."""
    chart = _made(spec, theme)
    chart.setAttribute(Qt.WidgetAttribute.WA_DontShowOnScreen)
    chart.setAttribute(Qt.WidgetAttribute.WA_ShowWithoutActivating)
    chart.setMinimumHeight(0)
    chart.resize(width, height)
    chart.show()  # lays it out; it never reaches a screen
    QApplication.sendPostedEvents()
    if isinstance(spec, StackSpec):
        chart.use_pen_scale(scale)  # type: ignore[union-attr]
    return chart


def _made(spec: ChartSpec, theme: Theme) -> "PanelStack | WardLanes | AcidBaseMap":
    if isinstance(spec, StackSpec):
        from app.chart.stack import PanelStack  # brings pyqtgraph, which a picture of the ward does without

        stack = PanelStack(theme)
        stack.set_spec(spec)
        return stack
    if isinstance(spec, LanesSpec):
        lanes = WardLanes(theme)
        lanes.set_spec(spec)
        return lanes
    chart = AcidBaseMap(theme)
    chart.set_spec(spec)
    return chart


def image_of(spec: Spec, theme: Theme, width: int, height: int, scale: float = 1.0) -> QImage:
    """A picture of `width` x `height` pixels with `scale` dots per pixel each way."""
    image = QImage(QSize(round(width * scale), round(height * scale)), QImage.Format.Format_RGB32)
    image.setDotsPerMeterX(round(_DOTS_PER_INCH * scale / 0.0254))
    image.setDotsPerMeterY(round(_DOTS_PER_INCH * scale / 0.0254))
    image.fill(QColor(theme.colours.ground))
    painter = QPainter(image)
    painter.setRenderHint(QPainter.RenderHint.TextAntialiasing)
    painter.scale(scale, scale)
    _paint(spec, theme, painter, width, height, scale)
    painter.end()
    return image


def svg_data(spec: Spec, theme: Theme, width: int, height: int, title: str = "") -> bytes:
    """The chart as the bytes of an SVG."""
    from PySide6.QtSvg import QSvgGenerator

    buffer = _buffer()
    generator = QSvgGenerator()
    generator.setOutputDevice(buffer)
    generator.setSize(QSize(width, height))
    generator.setViewBox(QRectF(0, 0, width, height))
    generator.setResolution(_DOTS_PER_INCH)
    generator.setTitle(title)
    _fill_and_paint(spec, theme, QPainter(generator), width, height)
    return _bytes_of(buffer)


def pdf_data(spec: Spec, theme: Theme, width: int, height: int, title: str = "") -> bytes:
    """The chart as the bytes of a PDF of one page of its own size."""
    buffer = _buffer()
    writer = QPdfWriter(buffer)
    points = QSizeF(width * 72 / _DOTS_PER_INCH, height * 72 / _DOTS_PER_INCH)
    writer.setPageSize(QPageSize(points, QPageSize.Unit.Point, "", QPageSize.SizeMatchPolicy.ExactMatch))
    writer.setPageMargins(QMarginsF(0, 0, 0, 0))
    writer.setResolution(_DOTS_PER_INCH)
    writer.setTitle(title)
    _fill_and_paint(spec, theme, QPainter(writer), width, height)
    return _bytes_of(buffer)


def png_data(image: QImage) -> bytes:
    """An image as the bytes of a PNG."""
    buffer = _buffer()
    image.save(buffer, "PNG")  # type: ignore[call-overload]
    return _bytes_of(buffer)


def _buffer() -> QBuffer:
    buffer = QBuffer()
    buffer.open(QIODevice.OpenModeFlag.WriteOnly)
    return buffer


def _bytes_of(buffer: QBuffer) -> bytes:
    buffer.close()
    return bytes(buffer.data().data())


def _fill_and_paint(spec: Spec, theme: Theme, painter: QPainter, width: int, height: int) -> None:
    painter.fillRect(QRectF(0, 0, width, height), QColor(theme.colours.ground))
    _paint(spec, theme, painter, width, height, 1.0)
    painter.end()


def svg_of(spec: Spec, theme: Theme, width: int, height: int, path: Path, title: str = "") -> None:
    """Writes the chart as SVG; OSError where the file cannot be written."""
    _check_writable(path)
    path.write_bytes(svg_data(spec, theme, width, height, title))


def pdf_of(spec: Spec, theme: Theme, width: int, height: int, path: Path, title: str = "") -> None:
    """Writes the chart as a PDF of one page of its own size; OSError where the file cannot be written."""
    _check_writable(path)
    path.write_bytes(pdf_data(spec, theme, width, height, title))


def _check_writable(path: Path) -> None:
    """Qt only warns where it cannot write, and would leave the reader without a file or a reason."""
    try:
        with path.open("wb"):
            pass
    except OSError as error:
        raise OSError(
            f"{path}: cannot be written ({error.strerror}); a folder that exists and may be written to is accepted"
        ) from error


def paint_chart(spec: Spec, theme: Theme, painter: QPainter, width: int, height: int, scale: float = 1.0) -> None:
    """Paints a chart at the painter's origin, for a page that holds more than the chart; `scale` dots per pixel."""
    _paint(spec, theme, painter, width, height, scale)


def _paint(spec: Spec, theme: Theme, painter: QPainter, width: int, height: int, scale: float) -> None:
    if not isinstance(spec, StackSpec | LanesSpec | MapSpec):
        spec.paint_on(painter, width, height)
        return
    chart = chart_of(spec, theme, width, height, scale)
    try:
        chart.paint_on(painter, width, height)
    finally:
        chart.close()
        chart.deleteLater()
