"""Rings on the drawing grid: rounded, tidied, and cut to the size old readers take."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

from core.errors import ExportError
from core.units import NM_PER_UM

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from core.geometry.contour import Floats

    Whole = NDArray[np.int64]

MOST_VERTICES = 199  # with the repeated first one 200, the limit of the first GDSII definition
_ENDS = 100  # vertices of a long ring at which cuts are looked for
_BATCH = 64  # cuts looked at together
_SHARE = 4  # a cut leaves at least a quarter of the vertices on either side


def on_grid_nm(points_um: Floats, *, grid_nm: int = 1) -> Whole:
    """Return points rounded to multiples of the grid, any shape [nm]."""
    return np.rint(np.asarray(points_um) * (NM_PER_UM / grid_nm)).astype(np.int64) * grid_nm


def tidy_ring(ring_nm: Whole) -> Whole:
    """Return a ring without doubled vertices and without spurs, which rounding can create.

    Parameters
    ----------
    ring_nm : array of int, shape (n, 2)
        Vertices in order, the first not repeated [nm].

    Returns
    -------
    array of int, shape (m, 2)
        m <= n; fewer than 3 when nothing with an area is left.
    """
    while len(ring_nm) >= 3:
        forward = np.roll(ring_nm, -1, axis=0) - ring_nm
        is_doubled = ~forward.any(axis=1)
        if is_doubled.any():
            ring_nm = ring_nm[~is_doubled]
            continue
        back = np.roll(forward, 1, axis=0)
        cross = back[:, 0] * forward[:, 1] - back[:, 1] * forward[:, 0]
        is_spur = (cross == 0) & (np.sum(back * forward, axis=1) < 0)
        if not is_spur.any():
            break
        ring_nm = ring_nm[~is_spur]
    return ring_nm


def split_ring(ring_nm: Whole, *, most_vertices: int = MOST_VERTICES) -> list[Whole]:
    """Cut a ring into butting rings of few vertices.

    Every cut runs between two vertices that are there already, so nothing is rounded a second
    time and neighbours share whole edges: the pieces cover exactly what the ring did.

    Parameters
    ----------
    ring_nm : array of int, shape (n, 2)
        A counter-clockwise ring that does not touch or cross itself [nm].
    most_vertices : int
        Largest number of vertices of a piece.

    Returns
    -------
    list of array of int, shape (m, 2)
        Pieces in order along the ring.

    Raises
    ------
    ExportError
        If the ring touches or crosses itself.
    """
    from shapely import Polygon

    if len(ring_nm) < 3 or not Polygon(ring_nm).is_valid:
        raise ExportError("touches itself on the drawing grid")
    pending, done = [ring_nm], []
    while pending:
        ring = pending.pop()
        if len(ring) <= most_vertices:
            done.append(ring)
            continue
        first, last = _best_cut(ring)
        pending.append(np.concatenate((ring[last:], ring[: first + 1])))
        pending.append(ring[first : last + 1])
    return done


def _best_cut(ring: Whole) -> tuple[int, int]:
    """Return the shortest inner diagonal that leaves enough vertices on both sides."""
    import shapely

    count = len(ring)
    polygon = shapely.Polygon(ring)
    for stride in (1 + count // _ENDS, 1):
        ends = np.arange(0, count, stride)
        first, last = (ends[pick] for pick in np.triu_indices(len(ends), k=1))
        is_fit = np.abs(2 * (last - first) - count) <= count - 2 * (count // _SHARE)
        is_fit &= _is_inward(ring, first, last) & _is_inward(ring, last, first)
        first, last = first[is_fit], last[is_fit]
        order = np.argsort(np.sum((ring[last] - ring[first]).astype(float) ** 2, axis=1), kind="stable")
        for start in range(0, len(order), _BATCH):
            batch = order[start : start + _BATCH]
            lines = shapely.linestrings(np.stack((ring[first[batch]], ring[last[batch]]), axis=1).astype(float))
            # the inside of the line lies wholly inside: it touches the outline at its ends alone
            is_inner = shapely.relate_pattern(lines, polygon, "TFF******")
            if is_inner.any():
                best = batch[int(np.argmax(is_inner))]
                return int(first[best]), int(last[best])
    raise ExportError("cannot be cut into smaller polygons")


def _is_inward(ring: Whole, here: Whole, there: Whole) -> NDArray[np.bool_]:
    """Return which lines leave their vertex into the inside of the ring, which lies on the left of its edges."""
    points = ring.astype(float)
    ahead, behind = np.roll(points, -1, axis=0) - points, np.roll(points, 1, axis=0) - points
    line = points[there] - points[here]
    is_convex = (_cross(ahead, behind) >= 0.0)[here]
    is_left_of_next, is_left_of_last = _cross(ahead[here], line) > 0.0, _cross(line, behind[here]) > 0.0
    return np.where(is_convex, is_left_of_next & is_left_of_last, is_left_of_next | is_left_of_last)


def _cross(a: Floats, b: Floats) -> Floats:
    return a[:, 0] * b[:, 1] - a[:, 1] * b[:, 0]
