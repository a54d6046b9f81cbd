"""Where the drawing is looked at from: micrometres to pixels and back.

A camera is a value. Blending two of them linearly keeps the point that both show at the same
pixel where it is, so that an animated zoom stays under the pointer all the way.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

from PySide6.QtCore import QPointF, QRectF
from PySide6.QtGui import QTransform

if TYPE_CHECKING:
    from collections.abc import Iterable

# one pixel may show from 2 mm down to 20 nm
COARSEST_UM_PER_PX = 2000.0
FINEST_UM_PER_PX = 0.02


@dataclass(frozen=True, slots=True, kw_only=True)
class Camera:
    """A view of the drawing plane.

    Attributes
    ----------
    left_um, top_um : float
        Place shown at the upper left corner of the widget; y points upwards [um].
    um_per_px : float
        Length shown by one pixel [um].
    """

    left_um: float = 0.0
    top_um: float = 0.0
    um_per_px: float = 10.0

    @classmethod
    def fitting(cls, bounds_um: tuple[float, float, float, float], area_px: QRectF) -> Camera:
        """Return the camera that shows bounds as large as an area of the widget allows.

        Parameters
        ----------
        bounds_um : tuple of four floats
            x_min, y_min, x_max, y_max [um].
        area_px : QRectF
            Where they should appear, in the middle.
        """
        x_min, y_min, x_max, y_max = bounds_um
        size = max((x_max - x_min) / max(area_px.width(), 1.0), (y_max - y_min) / max(area_px.height(), 1.0))
        size = min(max(size, FINEST_UM_PER_PX), COARSEST_UM_PER_PX)
        return cls(
            left_um=(x_min + x_max) / 2.0 - area_px.center().x() * size,
            top_um=(y_min + y_max) / 2.0 + area_px.center().y() * size,
            um_per_px=size,
        )

    def to_px(self, point_um: Iterable[float]) -> QPointF:
        """Return the pixel that shows a place, given as (x, y) [um]."""
        x, y = point_um
        return QPointF((float(x) - self.left_um) / self.um_per_px, (self.top_um - float(y)) / self.um_per_px)

    def to_um(self, point_px: QPointF) -> tuple[float, float]:
        """Return the place shown at a pixel (x, y) [um]."""
        return self.left_um + point_px.x() * self.um_per_px, self.top_um - point_px.y() * self.um_per_px

    def zoomed(self, factor: float, at_px: QPointF) -> Camera:
        """Return a closer (factor above 1) or wider camera; the place at a pixel stays there."""
        size = min(max(self.um_per_px / factor, FINEST_UM_PER_PX), COARSEST_UM_PER_PX)
        x, y = self.to_um(at_px)
        return Camera(left_um=x - at_px.x() * size, top_um=y + at_px.y() * size, um_per_px=size)

    def moved(self, dx_px: float, dy_px: float) -> Camera:
        """Return the camera after the paper was dragged by some pixels."""
        return Camera(
            left_um=self.left_um - dx_px * self.um_per_px,
            top_um=self.top_um + dy_px * self.um_per_px,
            um_per_px=self.um_per_px,
        )

    def blended(self, other: Camera, share: float) -> Camera:
        """Return a camera on the way to another one, share 0 to 1."""
        keep = 1.0 - share
        return Camera(
            left_um=keep * self.left_um + share * other.left_um,
            top_um=keep * self.top_um + share * other.top_um,
            um_per_px=keep * self.um_per_px + share * other.um_per_px,
        )

    def transform(self) -> QTransform:
        """Return the painter's transform from micrometres to pixels."""
        scale = 1.0 / self.um_per_px
        return QTransform(scale, 0.0, 0.0, -scale, -self.left_um * scale, self.top_um * scale)
