"""Small drawings of parameter sets, for lists."""

from __future__ import annotations

from typing import TYPE_CHECKING

from PySide6.QtCore import QRectF, Qt
from PySide6.QtGui import QColor, QGuiApplication, QPainter, QPixmap

from app.drawing.camera import Camera
from app.drawing.paths import outline_path, strokes_path
from app.drawing.signs import line_pen

if TYPE_CHECKING:
    from app.look import Palette
    from core.geometry.shape import ChannelShape

_MARGIN_PX = 4.0


def set_thumbnail(
    shape: ChannelShape, *, width_px: int, height_px: int, palette: Palette, pixel_ratio: float | None = None
) -> QPixmap:
    """Return a small drawing of a shape, as large as fits.

    Parameters
    ----------
    shape : ChannelShape
        What to draw; without an outline its centre lines are drawn dash-dotted, with a cross.
    width_px, height_px : int
        Size in device-independent pixels.
    palette : Palette
        Colours.
    pixel_ratio : float, optional
        Device pixels per pixel; default: the finest of the screens.

    Returns
    -------
    QPixmap
        With its device pixel ratio set and a transparent background.
    """
    ratio = pixel_ratio or max((screen.devicePixelRatio() for screen in QGuiApplication.screens()), default=1.0)
    pixmap = QPixmap(round(width_px * ratio), round(height_px * ratio))
    pixmap.setDevicePixelRatio(ratio)
    pixmap.fill(Qt.GlobalColor.transparent)
    area = QRectF(0.0, 0.0, width_px, height_px).adjusted(_MARGIN_PX, _MARGIN_PX, -_MARGIN_PX, -_MARGIN_PX)
    with QPainter(pixmap) as painter:
        painter.setRenderHint(QPainter.RenderHint.Antialiasing)
        if shape.outline is not None:
            path = outline_path(shape.outline)
            painter.setTransform(Camera.fitting(shape.outline.bounds_um, area).transform(), True)
            painter.fillPath(path, QColor(palette.fluid))
            painter.strokePath(path, line_pen(palette.fluid_edge))
        else:
            _draw_impossible(painter, shape, area, palette)
    return pixmap


def _draw_impossible(painter: QPainter, shape: ChannelShape, area: QRectF, palette: Palette) -> None:
    path = strokes_path(shape.centreline.strokes)
    box = path.boundingRect()
    to_px = Camera.fitting((box.left(), box.top(), box.right(), box.bottom()), area).transform()
    painter.strokePath(to_px.map(path), line_pen(palette.error, dashes=[6.0, 2.0, 1.0, 2.0]))
    painter.setPen(line_pen(palette.error, width_px=2.0))
    corner = QRectF(area.right() - 9.0, area.top(), 9.0, 9.0)
    painter.drawLine(corner.topLeft(), corner.bottomRight())
    painter.drawLine(corner.topRight(), corner.bottomLeft())
