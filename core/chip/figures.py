"""Plain closed figures: rings of straight edges, rectangles, circles."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from core.geometry.contour import Contour, Outline, arc_run

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    from core.geometry.contour import Floats

# (x_min, y_min, x_max, y_max) [um]
Box = tuple[float, float, float, float]


def polygon(points_um: Iterable[Sequence[float]]) -> Outline:
    """Return the area inside a ring of straight edges, whichever way it is walked.

    Parameters
    ----------
    points_um : iterable of pairs
        Corners in order, the first not repeated [um].
    """
    vertices = np.array([tuple(point) for point in points_um], dtype=float)
    ring = Contour(vertices, np.zeros(len(vertices)))
    return Outline(ring if ring.area_um2 > 0.0 else ring.reversed())


def rectangle(box_um: Box) -> Outline:
    """Return the area of a rectangle along the axes."""
    x0, y0, x1, y1 = box_um
    return polygon([(x0, y0), (x1, y0), (x1, y1), (x0, y1)])


def circle(centre_um: Sequence[float] | Floats, radius_um: float) -> Outline:
    """Return the area of a circle, as four true arcs."""
    return Outline(Contour(*arc_run(np.asarray(centre_um, dtype=float), radius_um, 0.0, 2.0 * np.pi)))


def thick_line(points_um: Floats, thickness_um: float) -> Outline:
    """Return the area of an open run of straight lines with square ends and mitred corners.

    Parameters
    ----------
    points_um : array, shape (n, 2)
        Points along its middle, at least two, no two alike in a row [um].
    thickness_um : float
        Thickness [um].
    """
    along = np.diff(points_um, axis=0)
    along /= np.hypot(along[:, 0], along[:, 1])[:, None]
    left = np.stack((-along[:, 1], along[:, 0]), axis=1)
    before, after = np.vstack((left[:1], left)), np.vstack((left, left[-1:]))
    mitre = (before + after) / (1.0 + np.sum(before * after, axis=1))[:, None]
    offset = 0.5 * thickness_um * mitre
    return polygon(np.concatenate((points_um - offset, (points_um + offset)[::-1])))


def shifted_box(box_um: Box, dx_um: float, dy_um: float) -> Box:
    """Return a box moved by a shift."""
    x0, y0, x1, y1 = box_um
    return x0 + dx_um, y0 + dy_um, x1 + dx_um, y1 + dy_um


def grown_box(box_um: Box, by_um: float) -> Box:
    """Return a box with a margin on every side."""
    x0, y0, x1, y1 = box_um
    return x0 - by_um, y0 - by_um, x1 + by_um, y1 + by_um


def boxes_overlap(one: Box, other: Box) -> bool:
    """Return whether two boxes have more than a rim in common."""
    return one[0] < other[2] and other[0] < one[2] and one[1] < other[3] and other[1] < one[3]
