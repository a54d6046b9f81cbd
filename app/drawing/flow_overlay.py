"""The solved flow laid into the large drawing: speed, pressure or streamlines at one depth.

The picture is made once for a view and then only copied. While the user zooms or drags, the last
one is moved along; a sharp one follows when the view has come to rest.
"""

from __future__ import annotations

from enum import StrEnum
from math import atan2
from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtCore import QObject, QPointF, QRectF, Qt, QTimer, Signal
from PySide6.QtGui import QColor, QImage, QPainterPath, QPixmap

from app.drawing.signs import draw_arrow_head, line_pen, text_size, veil
from app.look import SPACING, font
from app.shown_values import ShownUnits, number_text
from core.flow.field_map import FieldMap, round_levels
from core.units import unit_symbol

if TYPE_CHECKING:
    from collections.abc import Sequence

    from PySide6.QtGui import QPainter

    from app.drawing.camera import Camera
    from app.look import Palette
    from core.flow.result import FlowField

_REST_MS = 90  # after the last move, before the picture is made anew
_BAR_PX = 9.0
_BAND_PX = 38.0
_ROW_PX = 17.0
_ARROW_PX = 7.0
_ARROW_EVERY = 220  # points of a streamline from one arrow head to the next
# from little to much, by falling (light) or rising (dark) lightness, so that it reads without colour
_RAMPS = {
    "light": ("#eef4ee", "#a9d3cf", "#4f9ba6", "#2c5f8f", "#3b2a6b", "#1d0f33"),
    "dark": ("#101a20", "#1d4a57", "#2f7f86", "#5fb3a1", "#b3d68c", "#f7f0b2"),
}


class Shown(StrEnum):
    """What of the flow is shown."""

    NOTHING = "nothing"
    SPEED = "speed"
    PRESSURE = "pressure"
    STREAMLINES = "streamlines"


class FlowOverlay(QObject):
    """One direction of a solved flow as a layer of the drawing.

    Signals
    -------
    changed()
        The drawing should be painted again.
    """

    changed = Signal()

    def __init__(self, parent: QObject | None = None) -> None:
        super().__init__(parent)
        self._map: FieldMap | None = None
        self._seeds_um: np.ndarray = np.empty((0, 2))
        self._cell_um = 10.0
        self._shown, self._height_share, self._caption, self._units = Shown.NOTHING, 0.5, "", ShownUnits()
        self._remark = ""
        self._values: np.ndarray | None = None
        self._levels: np.ndarray = np.empty(0)
        self._lines: list[np.ndarray] | None = None
        self._line_path = QPainterPath()
        self._picture: tuple[Camera, tuple[object, ...], QPixmap] | None = None
        self._rest = QTimer(self, singleShot=True, interval=_REST_MS)
        self._rest.timeout.connect(self._on_rest_timeout)

    # --- what is shown --------------------------------------------------------------------

    def set_field(self, field: FlowField | None, *, seeds_um: np.ndarray, cell_um: float, caption: str) -> None:
        """Show another field.

        Parameters
        ----------
        field : FlowField or None
            None shows nothing.
        seeds_um : ndarray, shape (s, 2)
            Places through which streamlines go [um].
        cell_um : float
            How finely streamlines are followed [um].
        caption : str
            What the field is, for the legend.
        """
        self._map = None if field is None else FieldMap(field)
        self._seeds_um, self._cell_um, self._caption = seeds_um, cell_um, caption
        self._forget()

    def set_view(self, shown: Shown, *, height_share: float) -> None:
        """Choose quantity and height (0 floor, 0.5 mid-depth, 1 roof)."""
        if (shown, height_share) != (self._shown, self._height_share):
            self._shown, self._height_share = shown, height_share
            self._forget()

    def set_units(self, units: ShownUnits) -> None:
        """Write values in other units."""
        if units != self._units:
            self._units = units
            self._forget()

    def set_remark(self, remark: str) -> None:
        """Write a remark into the legend, such as that the picture is stale; empty for none."""
        if remark != self._remark:
            self._remark = remark
            self.changed.emit()

    @property
    def is_shown(self) -> bool:
        """Whether there is anything to paint."""
        return self._map is not None and self._shown is not Shown.NOTHING

    @property
    def remark(self) -> str:
        """What is written into the legend."""
        return self._remark

    def _forget(self) -> None:
        self._values = self._lines = self._picture = None
        self.changed.emit()

    def _quantity(self) -> str:
        return "pressure" if self._shown is Shown.PRESSURE else "speed"

    def _nodal(self) -> np.ndarray:
        assert self._map is not None
        if self._values is None:
            values = self._map.values(self._quantity(), self._height_share)
            self._values = self._units.shown(values, "Pa") if self._shown is Shown.PRESSURE else values  # type: ignore[arg-type,assignment]  # works on arrays alike
            assert self._values is not None
            low = 0.0 if self._shown is not Shown.PRESSURE else float(self._values.min())
            self._levels = round_levels(low, float(self._values.max()))
        return self._values

    def text_at(self, x_um: float, y_um: float) -> str:
        """Return the value at a place with its unit; empty where there is none."""
        if not self.is_shown:
            return ""
        assert self._map is not None
        value = self._map.at(self._nodal(), x_um, y_um)
        return "" if value is None else f"{self._quantity()} {number_text(value, 3)} {self._unit()}"

    def _unit(self) -> str:
        return unit_symbol(self._units.pressure) if self._shown is Shown.PRESSURE else "m/s"

    # --- painting -------------------------------------------------------------------------

    def paint(
        self, painter: QPainter, area: QRectF, camera: Camera, palette: Palette, *, at_once: bool = False
    ) -> None:
        """Paint the layer.

        Parameters
        ----------
        painter : QPainter
            In device-independent pixels.
        area : QRectF
            What is to be covered, from the origin [px].
        camera : Camera
            From micrometres to pixels.
        palette : Palette
            Colours.
        at_once : bool
            True for pictures that are kept: sharp now, not when the view has come to rest.
        """
        if not self.is_shown:
            return
        if self._shown is Shown.STREAMLINES:
            self._paint_lines(painter, camera, palette)
            return
        ratio = painter.device().devicePixelRatioF()
        key = (area.width(), area.height(), ratio, palette.name)
        if self._picture is None or at_once or self._picture[1] != key:
            self._picture = (camera, key, self._rendered(area, camera, palette, ratio))
        made_for, _, pixmap = self._picture
        if made_for == camera:
            painter.drawPixmap(area.topLeft(), pixmap)
            return
        corner = camera.to_px((made_for.left_um, made_for.top_um))
        scale = made_for.um_per_px / camera.um_per_px
        painter.drawPixmap(
            QRectF(corner.x(), corner.y(), area.width() * scale, area.height() * scale), pixmap, QRectF(pixmap.rect())
        )
        self._rest.start()

    def _on_rest_timeout(self) -> None:
        self._picture = None
        self.changed.emit()

    def _rendered(self, area: QRectF, camera: Camera, palette: Palette, ratio: float) -> QPixmap:
        assert self._map is not None
        values = self._nodal()
        width, height = max(1, round(area.width() * ratio)), max(1, round(area.height() * ratio))
        raster = self._map.raster(
            values[None],
            left_um=camera.left_um,
            top_um=camera.top_um,
            um_per_px=camera.um_per_px / ratio,
            width_px=width,
            height_px=height,
        )[0]
        colours = np.array(
            [QColor(name).rgba() for name in band_colours(palette, len(self._levels) - 1)], dtype=np.uint32
        )
        inside = np.isfinite(raster)
        band = np.clip(np.digitize(np.where(inside, raster, 0.0), self._levels) - 1, 0, len(colours) - 1)
        pixels = np.ascontiguousarray(np.where(inside, colours[band], np.uint32(0)))
        image = QImage(pixels.data, width, height, 4 * width, QImage.Format.Format_ARGB32)
        pixmap = QPixmap.fromImage(image)
        pixmap.setDevicePixelRatio(ratio)
        return pixmap

    def _paint_lines(self, painter: QPainter, camera: Camera, palette: Palette) -> None:
        if self._lines is None:
            assert self._map is not None
            velocity = self._map.field.velocity_m_s(self._height_share)
            self._lines = self._map.streamlines(velocity, self._seeds_um, cell_um=self._cell_um)
            self._line_path = _path_of(self._lines)
        painter.save()
        painter.setTransform(camera.transform(), True)
        painter.strokePath(self._line_path, line_pen(palette.ink, width_px=1.2))
        painter.restore()
        for line in self._lines:
            for start, end in zip(line[_ARROW_EVERY // 2 :: _ARROW_EVERY], line[_ARROW_EVERY // 2 + 1 :: _ARROW_EVERY]):  # noqa: B905 - the last may lack its end
                tail, tip = camera.to_px(start), camera.to_px(end)
                draw_arrow_head(
                    painter, tip, atan2(tip.y() - tail.y(), tip.x() - tail.x()), palette.ink, size_px=_ARROW_PX
                )

    def paint_legend(self, painter: QPainter, area: QRectF, palette: Palette) -> QRectF:
        """Paint what the colours mean, along the upper rim; returns the box it takes."""
        title, remark = self._title(), self._remark and f"   {self._remark}"
        texts = [] if self._shown is Shown.STREAMLINES else self._level_texts()
        bar_width = min(_BAND_PX * max(len(texts) - 1, 0), area.width() - 6.0 * SPACING.medium)
        ends = text_size("00000").width()
        width = max(text_size(title + remark).width(), bar_width + ends) + 2.0 * SPACING.small
        height = _ROW_PX * (2 if texts else 1) + (_BAR_PX if texts else 0.0) + 2.0 * SPACING.hair
        box = QRectF(area.left() + SPACING.medium, area.top() + SPACING.small, width, height)
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(veil(palette))
        painter.drawRoundedRect(box, SPACING.corner, SPACING.corner)
        painter.setFont(font("small"))
        line = QRectF(box.left() + SPACING.small, box.top() + SPACING.hair, width, _ROW_PX)
        for text, colour in ((title, palette.ink), (remark, palette.warning)):
            painter.setPen(QColor(colour))
            painter.drawText(line, Qt.AlignmentFlag.AlignVCenter, text)
            line.setLeft(line.left() + text_size(text).width())
        if texts:
            self._paint_bar(painter, QPointF(box.left() + ends / 2.0, line.bottom()), bar_width, texts, palette)
        return box

    def _level_texts(self) -> list[str]:
        self._nodal()
        return [number_text(float(level), 3) for level in self._levels]

    def _paint_bar(
        self, painter: QPainter, top_left: QPointF, width: float, texts: Sequence[str], palette: Palette
    ) -> None:
        """Paint the bands from left to right, each limit with its value below."""
        colours = band_colours(palette, len(texts) - 1)
        band = width / max(len(texts) - 1, 1)
        for number, text in enumerate(texts):
            x = top_left.x() + number * band
            if number < len(texts) - 1:
                painter.fillRect(QRectF(x, top_left.y(), band, _BAR_PX), QColor(colours[number]))
            painter.setPen(line_pen(palette.ink))
            painter.drawLine(QPointF(x, top_left.y()), QPointF(x, top_left.y() + _BAR_PX + 3.0))
            place = QRectF(x - 50.0, top_left.y() + _BAR_PX + 2.0, 100.0, _ROW_PX)
            painter.drawText(place, Qt.AlignmentFlag.AlignCenter, text)

    def _title(self) -> str:
        if self._shown is Shown.STREAMLINES:
            return f"Streamlines {height_text(self._height_share)}, {self._caption}"
        return f"{self._quantity().capitalize()} in {self._unit()} {height_text(self._height_share)}, {self._caption}"


def height_text(height_share: float) -> str:
    """Return a height over the floor in words."""
    return "at mid-depth" if height_share == 0.5 else f"at {100 * height_share:.0f} % of the depth"


def band_colours(palette: Palette, count: int) -> list[str]:
    """Return so many colours from little to much, evenly along the ramp of a palette."""
    ramp = [QColor(name) for name in _RAMPS["dark" if palette.is_dark else "light"]]
    places = np.linspace(0.0, len(ramp) - 1.0, max(count, 1))
    made = []
    for place in places.tolist():
        first = min(int(place), len(ramp) - 2)
        share = place - first
        pair = zip(ramp[first].getRgbF()[:3], ramp[first + 1].getRgbF()[:3], strict=True)
        made.append(QColor.fromRgbF(*((1.0 - share) * a + share * b for a, b in pair)).name())
    return made


def _path_of(lines: Sequence[np.ndarray]) -> QPainterPath:
    path = QPainterPath()
    for line in lines:
        points = line[:: max(1, len(line) // 800)].tolist()
        path.moveTo(*points[0])
        for x, y in points[1:]:
            path.lineTo(x, y)
    return path
