"""Dimensions on the screen: lines, arrows, and a free place for each label.

Labels are placed in order of importance; one that finds no free place near its line is left out
with its line, unless the user is handling it.
"""

from __future__ import annotations

from dataclasses import dataclass
from itertools import pairwise
from math import cos, degrees, isfinite, pi, sin
from typing import TYPE_CHECKING

from PySide6.QtCore import QLineF, QPointF, QRectF, Qt

from app.drawing.dimensions import Kind
from app.drawing.signs import angle_px, draw_arrow_head, draw_label, label_box, length_px, line_pen

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator, Sequence

    from PySide6.QtGui import QPainter

    from app.drawing.camera import Camera
    from app.drawing.dimensions import Dimension
    from app.look import Palette

    Line = tuple[float, float, float, float]  # x, y of both ends [px]
    Sides = tuple[float, float, float, float]  # left, top, right, bottom [px]

_ANGLE_PX = 46.0  # size of an angle's arc
_SPAN_PX = 26.0  # how far a span keeps off the drawing
_RING_PX = 11.0
_OUTSIDE_PX = 30.0  # walls nearer than this get their arrows from outside
_LEADER_PX = 22.0  # a label further off gets a leader
_STEPS_PX = (0.0, 14.0, 32.0, 56.0)  # how far a label may move off its line


@dataclass(frozen=True, slots=True, kw_only=True)
class PlacedDimension:
    """A dimension with its place on the screen [px]."""

    dimension: Dimension
    points: tuple[QPointF, ...]
    box: QRectF
    is_handled: bool
    leader: QLineF | None  # from a label that had to move away to what it names


def place_dimensions(
    dimensions: Iterable[Dimension],
    *,
    camera: Camera,
    area: QRectF,
    taken: list[QRectF],
    walls: list[Line],
    handled: str | None,
) -> list[PlacedDimension]:
    """Return the dimensions that have room, each with a free place for its label.

    Parameters
    ----------
    dimensions : iterable of Dimension
        The most telling first.
    camera : Camera
        From micrometres to pixels.
    area : QRectF
        Where labels may be [px].
    taken : list of QRectF
        Places that are not free; those found are added [px].
    walls : list of lines
        Centre lines of the channel around, which labels would rather not cover [px].
    handled : str or None
        Field whose slider is moved: its dimension is shown whatever the room.
    """
    shown = [
        (dimension, points)
        for dimension, points in ((d, _points_px(d, camera)) for d in dimensions)
        if dimension.field == handled or _has_room(dimension, points, area, camera)
    ]
    drawn = [(dimension, [(*a.toTuple(), *b.toTuple()) for a, b in pairwise(points)]) for dimension, points in shown]
    placed: list[PlacedDimension] = []
    for dimension, points in shown:
        is_handled = dimension.field == handled
        others = [line for other, lines in drawn if other is not dimension for line in lines]
        boxes = (box for box in _boxes(dimension, points, camera) if area.contains(box))
        box = free_box(boxes, taken=taken, avoided=(others, walls), is_needed=is_handled)
        if box is not None:
            taken.append(box.adjusted(-4, -3, 4, 3))
            leader = _leader(box, dimension, points, camera)
            placed.append(
                PlacedDimension(dimension=dimension, points=points, box=box, is_handled=is_handled, leader=leader)
            )
    return placed


def _leader(box: QRectF, dimension: Dimension, points: tuple[QPointF, ...], camera: Camera) -> QLineF | None:
    anchor, _, clear = min(_anchors(dimension, points, camera), key=lambda a: length_px(a[0], box.center()))
    reach = QPointF(max(0.0, abs(anchor.x() - box.center().x()) - box.width() / 2.0),
                    max(0.0, abs(anchor.y() - box.center().y()) - box.height() / 2.0))  # fmt: skip
    return QLineF(box.center(), anchor) if reach.x() + reach.y() > clear + _LEADER_PX else None


def free_box(
    boxes: Iterable[QRectF], *, taken: list[QRectF], avoided: Sequence[list[Line]] = (), is_needed: bool = False
) -> QRectF | None:
    """Return the best of some boxes.

    Parameters
    ----------
    boxes : iterable of QRectF
        The most wanted first.
    taken : list of QRectF
        Places that must stay clear.
    avoided : sequence of lists of lines
        Lines to stay clear of if possible, the worst to lie on first.
    is_needed : bool
        Return the first box rather than none.

    Returns
    -------
    QRectF or None
        The first free box on no line; else the free one with the least bad lines under it.
    """
    best: tuple[int, QRectF | None] = (0, None)
    for box in boxes:
        if any(box.intersects(other) for other in taken):
            if is_needed and best[1] is None:
                best = (-1, box)
            continue
        merit, sides = 1, (box.left(), box.top(), box.right(), box.bottom())
        for lines in avoided:
            if any(_crosses(sides, line) for line in lines):
                break
            merit += 1
        if merit > len(avoided):
            return box
        if best[1] is None or merit > best[0]:
            best = (merit, box)
    return best[1]


def _crosses(box: Sides, line: Line) -> bool:
    """Whether a line and a box have a point in common."""
    left, top, right, bottom = box
    x1, y1, x2, y2 = line
    if max(x1, x2) < left or min(x1, x2) > right or max(y1, y2) < top or min(y1, y2) > bottom:
        return False
    dx, dy = x2 - x1, y2 - y1
    # the corners lie on both sides of the endless line, or on it
    sides = [dx * (y - y1) - dy * (x - x1) for x in (left, right) for y in (top, bottom)]
    return min(sides) <= 0.0 <= max(sides)


def _points_px(dimension: Dimension, camera: Camera) -> tuple[QPointF, ...]:
    points = tuple(camera.to_px(point) for point in dimension.points_um)
    down = QPointF(0.0, _SPAN_PX if dimension.kind is Kind.SPAN else 0.0)
    return tuple(point + down for point in points)


def _has_room(dimension: Dimension, points: tuple[QPointF, ...], area: QRectF, camera: Camera) -> bool:
    if not isfinite(dimension.least_px):
        return False
    if dimension.kind is Kind.ANGLE:
        return area.contains(points[0]) and dimension.clear_um / camera.um_per_px >= dimension.least_px
    length = sum(length_px(a, b) for a, b in pairwise(points))
    return length >= dimension.least_px and all(area.contains(point) for point in points)


def _boxes(dimension: Dimension, points: tuple[QPointF, ...], camera: Camera) -> Iterator[QRectF]:
    """Yield places for a label, the best first."""
    size = label_box(dimension.text, QPointF())
    for anchor, direction, clear in _anchors(dimension, points, camera):
        reach = abs(cos(direction)) * size.width() / 2.0 + abs(sin(direction)) * size.height() / 2.0
        for step in _STEPS_PX:
            off = clear + reach + 5.0 + step
            yield size.translated(anchor.x() + off * cos(direction), anchor.y() + off * sin(direction))


def _anchors(
    dimension: Dimension, points: tuple[QPointF, ...], camera: Camera
) -> Iterator[tuple[QPointF, float, float]]:
    """Yield (point on the line, direction to move the label in, distance to keep)."""
    if dimension.kind is Kind.ANGLE:
        middle = -(dimension.start_rad + dimension.sweep_rad / 2.0)
        yield points[0], middle, _ANGLE_PX
        yield points[0], middle + pi, 6.0
    elif dimension.kind is Kind.RING:
        for turn in (pi / 2, -pi / 2, 0.0, pi):
            yield points[0], turn, _RING_PX
    elif dimension.kind is Kind.ACROSS:
        along = angle_px(points[0], points[-1])
        extra = 0.0 if length_px(points[0], points[-1]) >= _OUTSIDE_PX else 14.0
        yield points[0], along + pi, extra
        yield points[0], along + pi * 0.75, extra + 6.0
        yield points[0], along + pi * 1.25, extra + 6.0
        yield points[-1], along, extra
    else:
        middle = len(points) // 2
        start, end = points[middle - 1], points[middle]
        along, clear = angle_px(start, end), dimension.clear_um / camera.um_per_px
        towards = along - dimension.side * pi / 2  # the screen's angles run clockwise
        for direction in (towards, towards + pi):
            for share in (0.5, 0.3, 0.7):
                yield start + (end - start) * share, direction, clear


def draw_dimensions(painter: QPainter, placed: Sequence[PlacedDimension], palette: Palette) -> None:
    """Draw all lines and arrows, then all labels, the handled one last."""
    for one in placed:
        colour = palette.accent if one.is_handled else palette.ink
        painter.setBrush(Qt.BrushStyle.NoBrush)
        painter.setPen(line_pen(colour, width_px=2.0 if one.is_handled else 1.0))
        if one.leader is not None:
            painter.drawLine(one.leader)
        _PAINTERS[one.dimension.kind](painter, one, colour)
    for one in sorted(placed, key=lambda one: one.is_handled):
        draw_label(painter, one.box, one.dimension.text, palette, is_handled=one.is_handled)


def _draw_along(painter: QPainter, placed: PlacedDimension, colour: str) -> None:
    painter.drawPolyline(list(placed.points))
    first, second, *_ = placed.points
    draw_arrow_head(painter, first, angle_px(second, first), colour)
    before, last = placed.points[-2:]
    draw_arrow_head(painter, last, angle_px(before, last), colour)


def _draw_span(painter: QPainter, placed: PlacedDimension, colour: str) -> None:
    for point in placed.points:
        painter.drawLine(point - QPointF(0.0, _SPAN_PX - 4.0), point + QPointF(0.0, 5.0))
    _draw_along(painter, placed, colour)


def _draw_across(painter: QPainter, placed: PlacedDimension, colour: str) -> None:
    if length_px(*placed.points) >= _OUTSIDE_PX:
        _draw_along(painter, placed, colour)
        return
    angle = angle_px(*placed.points)
    back = QPointF(16.0 * cos(angle), 16.0 * sin(angle))
    first, last = placed.points
    painter.drawLine(first - back, last + back)
    draw_arrow_head(painter, first, angle, colour, size_px=7.0)
    draw_arrow_head(painter, last, angle + pi, colour, size_px=7.0)


def _draw_radius(painter: QPainter, placed: PlacedDimension, colour: str) -> None:
    centre, end = placed.points
    painter.drawLine(centre, end)
    painter.drawLine(centre - QPointF(4.0, 0.0), centre + QPointF(4.0, 0.0))
    painter.drawLine(centre - QPointF(0.0, 4.0), centre + QPointF(0.0, 4.0))
    draw_arrow_head(painter, end, angle_px(centre, end), colour)


def _draw_angle(painter: QPainter, placed: PlacedDimension, colour: str) -> None:
    apex, start, sweep = placed.points[0], placed.dimension.start_rad, placed.dimension.sweep_rad
    square = QRectF(apex.x() - _ANGLE_PX, apex.y() - _ANGLE_PX, 2.0 * _ANGLE_PX, 2.0 * _ANGLE_PX)
    painter.drawArc(square, round(degrees(start) * 16.0), round(degrees(sweep) * 16.0))
    for ray in (start, start + sweep):
        painter.drawLine(QLineF.fromPolar(_ANGLE_PX + 10.0, degrees(ray)).translated(apex))


def _draw_ring(painter: QPainter, placed: PlacedDimension, colour: str) -> None:
    painter.drawEllipse(placed.points[0], _RING_PX, _RING_PX)


_PAINTERS = {
    Kind.ALONG: _draw_along, Kind.SPAN: _draw_span, Kind.ACROSS: _draw_across,
    Kind.RADIUS: _draw_radius, Kind.ANGLE: _draw_angle, Kind.RING: _draw_ring,
}  # fmt: skip
