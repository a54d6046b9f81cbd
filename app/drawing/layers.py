"""The layers of the large drawing, from the paper up; each function paints one of them."""

from __future__ import annotations

from math import ceil, degrees, pi
from typing import TYPE_CHECKING

from PySide6.QtCore import QLineF, QPointF, QRectF, Qt
from PySide6.QtGui import QBrush, QColor, QPainter, QPainterPath

from app.drawing.dimensions import length_text
from app.drawing.signs import (
    draw_arrow_head,
    draw_flow_arrow,
    draw_label,
    draw_note,
    draw_scale_bar,
    label_box,
    length_px,
    line_pen,
    text_size,
)
from app.look import SPACING, font
from core.units import round_length_um

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

    from app.drawing.camera import Camera
    from app.look import Palette
    from core.geometry.centreline import OpenEnd
    from core.geometry.contour import Floats

_GRID_PX = 110.0  # grid lines are at most this far apart
_SCALE_PX = 170.0  # longest scale bar
_SMALL_PX = 50.0  # islands of less size show no ruled lines
_FLOW_ARROW_PX = 46.0
_FLOW_GAP_PX = 9.0
_EDGE_PASSES_PX = ((0.0, 0.0), (0.5, 0.4))  # a hair line drawn twice is many times faster than a wide one
SHARES_ROOM_PX = 150.0  # least length of a bypass on the screen to be labelled with shares


def draw_grid(painter: QPainter, area: QRectF, camera: Camera, palette: Palette) -> None:
    """Fill the background and rule it at round lengths."""
    painter.fillRect(area, QColor(palette.solid))
    colour = QColor(palette.grid)
    step_um = round_length_um(_GRID_PX * camera.um_per_px)
    first_x, first_y = ceil(camera.left_um / step_um), ceil(-camera.top_um / step_um)
    left, top = camera.to_px((first_x * step_um, -first_y * step_um)).toTuple()
    step = step_um / camera.um_per_px
    painter.setRenderHint(QPainter.RenderHint.Antialiasing, False)
    for n in range(int(area.width() / step) + 1):
        painter.fillRect(QRectF(round(left + n * step), area.top(), 1.0, area.height()), colour)
    for n in range(int(area.height() / step) + 1):
        painter.fillRect(QRectF(area.left(), round(top + n * step), area.width(), 1.0), colour)
    painter.setRenderHint(QPainter.RenderHint.Antialiasing, True)


def draw_channel(
    painter: QPainter, path: QPainterPath, rings: Sequence[QPainterPath], camera: Camera, palette: Palette
) -> None:
    """Draw a valid channel: filled, with its walls.

    Parameters
    ----------
    painter : QPainter
        In device-independent pixels.
    path : QPainterPath
        The whole area [um].
    rings : sequence of QPainterPath
        The same ring by ring, the outer one first [um].
    camera : Camera
        From micrometres to pixels.
    palette : Palette
        Colours.
    """
    painter.save()
    painter.setTransform(camera.transform(), True)
    if _are_small(rings[1:], camera):  # one by one is twice as fast, but covers the ruled lines on the islands
        painter.fillPath(rings[0], QColor(palette.fluid))
        for island in rings[1:]:
            painter.fillPath(island, QColor(palette.solid))
    else:
        painter.fillPath(path, QColor(palette.fluid))
    painter.restore()
    draw_walls(painter, path, camera, palette)


def draw_walls(painter: QPainter, path: QPainterPath, camera: Camera, palette: Palette) -> None:
    """Draw the walls of a valid channel."""
    for dx, dy in _EDGE_PASSES_PX:
        painter.save()
        painter.translate(dx, dy)
        painter.setTransform(camera.transform(), True)
        painter.strokePath(path, line_pen(palette.fluid_edge))
        painter.restore()


def _are_small(islands: Sequence[QPainterPath], camera: Camera) -> bool:
    return bool(islands) and islands[0].controlPointRect().width() < _SMALL_PX * camera.um_per_px


def draw_last_good(painter: QPainter, path: QPainterPath, camera: Camera, palette: Palette) -> None:
    """Draw a channel that is no longer what the user asked for: pale and hatched."""
    hatch = QBrush(QColor(palette.pale_edge), Qt.BrushStyle.BDiagPattern)
    transform = camera.transform()
    hatch.setTransform(transform.inverted()[0])  # the same hatch on the screen at every zoom
    painter.save()
    painter.setTransform(transform, True)
    painter.fillPath(path, QColor(palette.pale))
    painter.fillPath(path, hatch)
    painter.strokePath(path, line_pen(palette.pale_edge))
    painter.restore()


def draw_centrelines(
    painter: QPainter, path: QPainterPath, camera: Camera, palette: Palette, *, is_error: bool
) -> None:
    """Draw centre lines, dash-dotted; those of an impossible shape heavier and in the error's colour."""
    painter.save()
    painter.setTransform(camera.transform(), True)
    colour, width_px = (palette.error, 2.0) if is_error else (palette.ink_soft, 1.0)
    painter.strokePath(path, line_pen(colour, width_px=width_px, dashes=[9.0, 3.0, 1.5, 3.0]))
    painter.restore()


def draw_end(
    painter: QPainter, end: OpenEnd, camera: Camera, palette: Palette, *, is_forward: bool, area: QRectF
) -> QRectF | None:
    """Draw the direction that enters at an open end, with its word; returns the box, None if out of view."""
    heading = QLineF.fromPolar(1.0, degrees(end.outward_heading_rad))
    outward = QPointF(heading.dx(), heading.dy())
    tail = camera.to_px(end.point_um) + outward * (_FLOW_GAP_PX + _FLOW_ARROW_PX)
    tip = camera.to_px(end.point_um) + outward * _FLOW_GAP_PX
    arrow = QRectF(tail, tip).normalized().adjusted(-8, -8, 8, 8)
    word = "forward" if is_forward else "reverse"
    box = label_box(word, arrow.center() - QPointF(0.0, arrow.height() / 2.0 + 10.0))
    box.moveLeft(max(area.left() + 2.0, min(box.left(), area.right() - box.width() - 2.0)))
    if not area.contains(arrow.adjusted(8, 0, -8, 0)):
        return None
    draw_flow_arrow(painter, tail, -end.outward_heading_rad + pi, length=_FLOW_ARROW_PX, palette=palette,
                    is_forward=is_forward)  # fmt: skip
    painter.setFont(font("small"))
    painter.setPen(QColor(palette.forward if is_forward else palette.reverse))
    painter.drawText(box, Qt.AlignmentFlag.AlignCenter, word)
    return arrow.united(box)


def draw_direction_key(painter: QPainter, corner: QPointF, palette: Palette) -> QRectF:
    """Draw both directions in a corner, for when the open ends are out of view."""
    sizes = [text_size(word) for word in ("forward", "reverse")]
    width, height = max(size.width() for size in sizes), sizes[0].height()
    box = QRectF(corner.x(), corner.y(), 2.0 * (width + 46.0) + 26.0, height + 12.0)
    draw_note(painter, box, "", palette)
    middle = box.center().y()
    draw_flow_arrow(painter, QPointF(box.left() + 44.0, middle), pi, length=36.0, palette=palette, is_forward=True)
    draw_flow_arrow(painter, QPointF(box.right() - 44.0, middle), 0.0, length=36.0, palette=palette, is_forward=False)
    for word, left, colour in (
        ("forward", box.left() + 50.0, palette.forward),
        ("reverse", box.right() - 50.0 - width, palette.reverse),
    ):
        painter.setPen(QColor(colour))
        painter.drawText(QRectF(left, box.top(), width, box.height()), Qt.AlignmentFlag.AlignVCenter, word)
    return box


def draw_scale(painter: QPainter, area: QRectF, camera: Camera, palette: Palette, *, unit: str) -> QRectF:
    """Draw the scale bar in the lower left corner; returns its box."""
    length_um = round_length_um(_SCALE_PX * camera.um_per_px)
    left = QPointF(area.left() + 2.0 * SPACING.medium, area.bottom() - 2.0 * SPACING.medium)
    return draw_scale_bar(painter, left, length_um / camera.um_per_px, length_text(length_um, unit), palette)


def draw_depth(painter: QPainter, beside: QRectF, text: str, palette: Palette, *, is_handled: bool) -> QRectF:
    """Write the depth, which the drawing cannot show, beside the scale bar."""
    box = label_box(text, beside.center())
    box.moveLeft(beside.right() + SPACING.medium)
    draw_note(painter, box, text, palette, is_handled=is_handled)
    return box


def share_boxes(section_um: Floats, camera: Camera, rows: tuple[str, str]) -> Iterator[QRectF]:
    """Yield places for the shares of a branch, the best first: outside its wall.

    Parameters
    ----------
    section_um : array, shape (2, 2)
        Inner and outer wall of the branch [um].
    camera : Camera
        From micrometres to pixels.
    rows : tuple of two str
        The longest text expected in each row.
    """
    sizes = [text_size(row) for row in rows]
    width = max(size.width() for size in sizes) + 34.0
    box = QRectF(0.0, 0.0, width, 3.0 * sizes[0].height() + 6.0)
    inner, outer = (camera.to_px(point) for point in section_um)
    unit = (outer - inner) / max(length_px(inner, outer), 1e-6)
    for off in (8.0, 34.0, 60.0, 90.0):
        for along in (0.0, 0.6, -0.6, 1.2, -1.2):
            reach = QPointF(unit.x() * (width / 2.0 + off), unit.y() * (box.height() / 2.0 + off))
            box.moveCenter(outer + reach + QPointF(-unit.y() * along * width, unit.x() * along * width))
            yield QRectF(box)


def draw_shares(
    painter: QPainter, box: QRectF, wall: QPointF, title: str, rows: tuple[str, str], palette: Palette
) -> None:
    """Write the shares of one branch beside its wall: forward points left, reverse right."""
    painter.setPen(line_pen(palette.ink_soft))
    painter.drawLine(box.center(), wall)
    draw_label(painter, box, "", palette)
    height = (box.height() - 6.0) / 3.0
    line = QRectF(box.left() + SPACING.small, box.top() + 3.0, box.width() - 2.0 * SPACING.small, height)
    painter.setPen(QColor(palette.ink_soft))
    painter.drawText(line, Qt.AlignmentFlag.AlignCenter, title)
    for row, colour, angle, shift in ((rows[0], palette.forward, pi, 0.0), (rows[1], palette.reverse, 0.0, 9.0)):
        line.translate(0.0, height)
        draw_arrow_head(painter, QPointF(line.left() + shift, line.center().y()), angle, colour)
        painter.setPen(QColor(colour))
        painter.drawText(line.adjusted(17.0, 0.0, 0.0, 0.0), Qt.AlignmentFlag.AlignVCenter, row)
