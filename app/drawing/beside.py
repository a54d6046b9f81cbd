"""Beside the wanted walls: those on the mask, and those that come out, where they differ."""

from __future__ import annotations

from enum import StrEnum
from typing import TYPE_CHECKING

from PySide6.QtCore import QPointF, QRectF, Qt
from PySide6.QtGui import QColor

from app.drawing.labels import free_box
from app.drawing.paths import outline_path
from app.drawing.signs import line_pen, text_size, veil
from app.look import SPACING, font

if TYPE_CHECKING:
    from collections.abc import Iterator, Mapping

    from PySide6.QtGui import QPainter, QPainterPath, QPen

    from app.drawing.camera import Camera
    from app.look import Palette
    from core.geometry.shape import ChannelShape

_SAMPLE_PX = 34.0  # length of the line in the legend
_ROW_PX = 17.0


class Walls(StrEnum):
    """Walls shown beside the wanted ones; the value is their name in the legend."""

    DRAWN = "as drawn, before scaling"
    MADE = "as made"


_WANTED = "as wanted"


def _pen(walls: Walls, palette: Palette) -> QPen:
    """Return dashes for what is drawn, dots for what is made; the wanted walls are plain lines."""
    if walls is Walls.DRAWN:
        return line_pen(palette.accent, width_px=1.6, dashes=[7.0, 3.5])
    return line_pen(palette.ink, width_px=1.6, dashes=[1.5, 2.5])


def _corners(area: QRectF, width: float, height: float) -> Iterator[QRectF]:
    """Yield places for a box: at the right rim from the top down, then at the left."""
    inner = area.adjusted(SPACING.medium, SPACING.medium, -SPACING.medium, -SPACING.medium)
    for left in (inner.right() - width, inner.left()):
        top = inner.top()
        while top + height <= inner.bottom():
            yield QRectF(left, top, width, height)
            top += _ROW_PX


class Beside:
    """Keeps the other walls ready to be painted."""

    def __init__(self) -> None:
        self._shapes: dict[Walls, ChannelShape] = {}
        self._paths: dict[Walls, QPainterPath] = {}

    @property
    def is_shown(self) -> bool:
        """Whether there is anything to paint."""
        return bool(self._paths)

    def show(self, shapes: Mapping[Walls, ChannelShape]) -> bool:
        """Take the walls that differ from the wanted ones; returns whether anything is new."""
        if {walls: id(shape) for walls, shape in shapes.items()} == {
            walls: id(shape) for walls, shape in self._shapes.items()
        }:
            return False
        self._shapes = dict(shapes)
        self._paths = {
            walls: outline_path(shape.outline) for walls, shape in shapes.items() if shape.outline is not None
        }
        return True

    def paint(self, painter: QPainter, camera: Camera, palette: Palette) -> None:
        """Paint the walls."""
        painter.save()
        painter.setTransform(camera.transform(), True)
        for walls, path in self._paths.items():
            painter.strokePath(path, _pen(walls, palette))
        painter.restore()

    def paint_legend(
        self, painter: QPainter, area: QRectF, palette: Palette, *, taken: list[QRectF], avoided: QRectF
    ) -> QRectF:
        """Paint what the lines mean in the first free corner; returns the box it takes.

        Parameters
        ----------
        painter : QPainter
            In device-independent pixels.
        area : QRectF
            The drawing [px].
        palette : Palette
            Colours.
        taken : list of QRectF
            Places that should stay clear [px].
        avoided : QRectF
            A place that stays clear if there is room elsewhere [px].
        """
        rows = [(_WANTED, line_pen(palette.fluid_edge, width_px=2.0))]
        rows += [(str(walls), _pen(walls, palette)) for walls in self._paths]
        width = max(text_size(text).width() for text, _ in rows) + _SAMPLE_PX + 3.0 * SPACING.small
        height = len(rows) * _ROW_PX + 2.0 * SPACING.hair
        box = free_box(_corners(area, width, height), taken=[*taken, avoided])
        box = box or free_box(_corners(area, width, height), taken=taken, is_needed=True)
        assert box is not None
        painter.setPen(Qt.PenStyle.NoPen)
        painter.setBrush(veil(palette))
        painter.drawRoundedRect(box, SPACING.corner, SPACING.corner)
        painter.setFont(font("small"))
        for number, (text, pen) in enumerate(rows):
            left = QPointF(box.left() + SPACING.small, box.top() + SPACING.hair + (number + 0.5) * _ROW_PX)
            painter.setPen(pen)
            painter.drawLine(left, left + QPointF(_SAMPLE_PX, 0.0))
            painter.setPen(QColor(palette.ink))
            room = QRectF(left.x() + _SAMPLE_PX + SPACING.small, left.y() - _ROW_PX / 2.0, width, _ROW_PX)
            painter.drawText(room, Qt.AlignmentFlag.AlignVCenter, text)
        return box
