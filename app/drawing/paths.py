"""Contours and centre lines as painter paths, in micrometres with y upwards.

The painter's transform turns y over (see ``camera``); the paths stay as they are while the user
zooms and pans, so they are made once per shape.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import pi
from typing import TYPE_CHECKING, Any

import numpy as np
from PySide6.QtCore import QPointF
from PySide6.QtGui import QPainterPath

from core.geometry.contour import Contour, arc_data

if TYPE_CHECKING:
    from collections.abc import Iterable, Iterator, Sequence

    from numpy.typing import NDArray

    from core.geometry.centreline import Stroke
    from core.geometry.contour import Outline

# A cubic curve over an eighth of a turn is 4e-6 of the radius off the circle, which no zoom allowed
# here can show; the tool kit's own arcs are cubic curves over a quarter, 3e-4 off.
_LARGEST_PIECE = pi / 4


def ring_paths(contours: Sequence[Contour]) -> list[QPainterPath]:
    """Return closed rings, each as a path of lines and arcs.

    Rings that share their bulges are one ring in several places (the islands of a long chain), and
    are drawn once.

    Parameters
    ----------
    contours : sequence of Contour
        Rings, one or more.

    Returns
    -------
    list of QPainterPath
        In micrometres, in the same order.
    """
    distinct: dict[int, Contour] = {}
    for ring in contours:
        distinct.setdefault(id(ring.bulges), ring)
    drawn = dict(zip(distinct, _drawn(list(distinct.values())), strict=True))
    paths = []
    for ring in contours:
        dx, dy = (ring.vertices_um[0] - distinct[id(ring.bulges)].vertices_um[0]).tolist()
        path = drawn[id(ring.bulges)]
        paths.append(path.translated(dx, dy) if dx or dy else path)
    return paths


def _drawn(contours: Sequence[Contour]) -> list[QPainterPath]:
    # all rings in one go: each ends with its first vertex again, whose edge leads to the next ring
    chain = Contour.joined(
        (np.concatenate((ring.vertices_um, ring.vertices_um[:1])), np.append(ring.bulges, 0.0)) for ring in contours
    )
    is_jump = np.zeros(len(chain.bulges), dtype=bool)
    is_jump[np.cumsum([len(ring.bulges) + 1 for ring in contours]) - 1] = True
    steps = _steps(chain)
    path = QPainterPath(QPointF(*chain.vertices_um[0].tolist()))
    paths = []
    for is_last, is_straight, *points in _told(is_jump[steps.edge], *steps.columns):
        if is_last:
            path.closeSubpath()
            paths.append(path)
            path = QPainterPath(QPointF(*points[-2:]))
        elif is_straight:
            path.lineTo(*points[-2:])
        else:
            path.cubicTo(*points)
    return paths


def merged(paths: Iterable[QPainterPath]) -> QPainterPath:
    """Return rings as one path; where they overlap is outside, as it is for islands."""
    path = QPainterPath()
    for ring in paths:
        path.addPath(ring)
    return path


def outline_path(outline: Outline) -> QPainterPath:
    """Return the area of a channel, islands left out, in micrometres."""
    return merged(ring_paths(outline.contours))


def strokes_path(strokes: Iterable[Stroke]) -> QPainterPath:
    """Return centre lines as one open path, in micrometres."""
    path = QPainterPath()
    listed = list(strokes)
    if not listed:
        return path
    # each stroke is an edge, followed by the straight one that leads to the next stroke
    vertices = np.array([point for stroke in listed for point in (stroke.start_um, stroke.end_um)])
    bulges = np.array([bulge for stroke in listed for bulge in (stroke.bulge, 0.0)])
    steps = _steps(Contour(vertices, bulges))
    current, end = -1, None
    for edge, is_straight, *points in _told(steps.edge, *steps.columns):
        if edge % 2:
            continue
        if edge != current and vertices[edge].tolist() != end:
            path.moveTo(*vertices[edge].tolist())
        if is_straight:
            path.lineTo(*points[-2:])
        else:
            path.cubicTo(*points)
        current, end = edge, points[-2:]
    return path


def _told(*columns: NDArray[Any]) -> Iterator[tuple[Any, ...]]:
    """Yield the entries of several arrays side by side, as plain numbers."""
    return zip(*(column.tolist() for column in columns), strict=True)


@dataclass(frozen=True, slots=True)
class _Steps:
    """What a painter path is told, one entry a line or cubic curve.

    Attributes
    ----------
    edge : array of int, shape (n,)
        Which edge of the contour it belongs to.
    columns : tuple of array
        Whether it is straight; then x and y of both control points and of the end [um].
    """

    edge: NDArray[np.int_]
    columns: tuple[NDArray[np.bool_], *tuple[NDArray[np.float64], ...]]


def _steps(chain: Contour) -> _Steps:
    """Return all edges as lines and as cubic curves that touch their circle at both ends."""
    centre, radius, start, sweep = arc_data(chain)
    count = np.maximum(1, np.ceil(np.abs(sweep) / _LARGEST_PIECE - 1e-9)).astype(int)
    edge = np.repeat(np.arange(len(count)), count)
    number = np.arange(len(edge)) - np.repeat(np.cumsum(count) - count, count)
    piece = sweep[edge] / count[edge]
    first = start[edge] + number * piece
    is_straight = chain.bulges[edge] == 0.0
    size = np.where(is_straight, 0.0, radius[edge])
    reach = 4.0 / 3.0 * np.tan(piece / 4.0)
    x, y = centre[edge].T
    across, up = size * np.cos(first), size * np.sin(first)
    next_across, next_up = size * np.cos(first + piece), size * np.sin(first + piece)
    ends = np.roll(chain.vertices_um, -1, axis=0)[edge]
    is_end = is_straight | (number == count[edge] - 1)
    return _Steps(
        edge,
        (
            is_straight,
            x + across - reach * up,
            y + up + reach * across,
            x + next_across + reach * next_up,
            y + next_up - reach * next_across,
            np.where(is_end, ends[:, 0], x + next_across),
            np.where(is_end, ends[:, 1], y + next_up),
        ),
    )
