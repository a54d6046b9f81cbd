"""Contours and centre lines as painter paths, in micrometres with y upwards.

The painter's transform turns y over (see ``camera``); the paths stay as they are while the user
zooms and pans, so they are made once per shape.
"""

from __future__ import annotations

from math import ceil, cos, pi, sin, tan
from typing import TYPE_CHECKING

import numpy as np
from PySide6.QtCore import QPointF
from PySide6.QtGui import QPainterPath

from core.geometry.contour import Contour, arc_data

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

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
    centre, radius, start, sweep = arc_data(chain)
    ends = np.roll(chain.vertices_um, -1, axis=0)
    path = QPainterPath(QPointF(*chain.vertices_um[0].tolist()))
    paths = []
    for is_last, bulge, end, middle, size, angle, turn in zip(
        *(column.tolist() for column in (is_jump, chain.bulges, ends, centre, radius, start, sweep)), strict=True
    ):
        if is_last:
            path.closeSubpath()
            paths.append(path)
            path = QPainterPath(QPointF(*end))
        elif bulge == 0.0:
            path.lineTo(*end)
        else:
            _add_arc(path, middle, size, angle, turn)
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
    for stroke in strokes:
        begin = QPointF(*stroke.start_um.tolist())
        if path.currentPosition() != begin or path.elementCount() == 0:
            path.moveTo(begin)
        if stroke.bulge == 0.0:
            path.lineTo(*stroke.end_um.tolist())
        else:
            centre, radius, start, sweep = stroke.arc()
            _add_arc(path, centre.tolist(), radius, start, sweep)
    return path


def _add_arc(path: QPainterPath, centre: Sequence[float], radius: float, start: float, sweep: float) -> None:
    """Add an arc from the path's end, as cubic curves that touch the circle at both ends [um, rad]."""
    x, y = centre
    count = max(1, ceil(abs(sweep) / _LARGEST_PIECE - 1e-9))
    piece = sweep / count
    reach = 4.0 / 3.0 * tan(piece / 4.0)
    across, up = radius * cos(start), radius * sin(start)
    for i in range(1, count + 1):
        angle = start + i * piece
        next_across, next_up = radius * cos(angle), radius * sin(angle)
        path.cubicTo(
            x + across - reach * up, y + up + reach * across,
            x + next_across + reach * next_up, y + next_up - reach * next_across,
            x + next_across, y + next_up,
        )  # fmt: skip
        across, up = next_across, next_up
