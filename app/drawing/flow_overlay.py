"""The solved flow laid into the large drawing: speed, pressure or streamlines at one depth.

The picture is made once for a view and then only copied. While the user zooms or drags, the last
one is moved along; a sharp one follows when the view has come to rest.
"""

from __future__ import annotations

from enum import StrEnum
from math import atan2
from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtCore import QObject, QRectF, QTimer, Signal
from PySide6.QtGui import QColor, QImage, QPainterPath, QPixmap

from app.drawing.flow_legend import band_colours, draw_flow_legend
from app.drawing.signs import draw_arrow_head, line_pen
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
_ARROW_PX = 7.0
_ARROW_EVERY = 220  # points of a streamline from one arrow head to the next


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
        texts = [] if self._shown is Shown.STREAMLINES else self._level_texts()
        return draw_flow_legend(painter, area, palette, title=self._title(), remark=self._remark, texts=texts)

    def _level_texts(self) -> list[str]:
        self._nodal()
        return [number_text(float(level), 3) for level in self._levels]

    def _title(self) -> str:
        if self._shown is Shown.STREAMLINES:
            return f"Streamlines {height_text(self._height_share)}, {self._caption}"
        return f"{self._quantity().capitalize()} in {self._unit()} {height_text(self._height_share)}, {self._caption}"


def height_text(height_share: float) -> str:
    """Return a height over the floor in words."""
    return "at mid-depth" if height_share == 0.5 else f"at {100 * height_share:.0f} % of the depth"


def _path_of(lines: Sequence[np.ndarray]) -> QPainterPath:
    path = QPainterPath()
    for line in lines:
        points = line[:: max(1, len(line) // 800)].tolist()
        path.moveTo(*points[0])
        for x, y in points[1:]:
            path.lineTo(x, y)
    return path
