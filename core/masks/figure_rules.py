"""Rules for the figures of one layer, whatever the file format.

Mask writers fill the inside of every figure; what a reader could take in two ways is refused.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Sequence

    from numpy.typing import NDArray
    from shapely.geometry.base import BaseGeometry

    Floats = NDArray[np.float64]

_SAME_AREA = 1e-9  # relative; figures that only share edges agree to about 1e-15
_STRAIGHT_BACK = 1e-12  # sine of the angle below which an edge runs back on the one before


def figure_problems(rings: Sequence[Floats], *, grain: float) -> list[str]:
    """Return what is wrong with the figures on one layer; the simplest kind of problem first.

    Parameters
    ----------
    rings : sequence of array, shape (n, 2)
        Corners in order, the first not repeated; arcs as chords.
    grain : float
        Points no further apart than this are the same point [unit of the rings].

    Returns
    -------
    list of str
        One sentence for the first kind of problem found; empty when all rules are kept.
    """
    if not rings:
        return ["nothing is drawn on the layer"]
    for is_bad, what in (
        (lambda ring: len(ring) < 3, "with fewer than three corners"),
        (lambda ring: _has_doubled_vertex(ring, grain), "with a doubled vertex"),
        (_has_spur, "with a spur, where the outline runs back on itself"),
        (_is_crossing, "where the outline crosses or touches itself"),
    ):
        bad = [ring for ring in rings if is_bad(ring)]
        if bad:
            place = f", first near ({bad[0][0][0]:g}, {bad[0][0][1]:g})" if len(bad[0]) else ""
            return [f"{len(bad)} figure{'s' * (len(bad) > 1)} {what}{place}"]
    return _problems_between(rings, grain)


def _has_doubled_vertex(ring: Floats, grain: float) -> bool:
    step = np.roll(ring, -1, axis=0) - ring
    return bool((np.hypot(step[:, 0], step[:, 1]) <= grain).any())


def _has_spur(ring: Floats) -> bool:
    ahead = np.roll(ring, -1, axis=0) - ring
    back = np.roll(ahead, 1, axis=0)
    size = np.hypot(*ahead.T) * np.hypot(*back.T)
    sine = np.abs(back[:, 0] * ahead[:, 1] - back[:, 1] * ahead[:, 0])
    return bool(((sine <= _STRAIGHT_BACK * size) & (np.sum(back * ahead, axis=1) < 0.0)).any())


def _is_crossing(ring: Floats) -> bool:
    from shapely import Polygon

    return not Polygon(ring).is_valid


def _problems_between(rings: Sequence[Floats], grain: float) -> list[str]:
    import shapely

    scale = max(grain, 1e-12)
    seen = {tuple(sorted(map(tuple, np.rint(ring / scale).tolist()))) for ring in rings}
    if len(seen) < len(rings):
        return [f"{len(rings) - len(seen)} figures drawn twice"]
    polygons = [shapely.Polygon(ring) for ring in rings]
    total = sum(polygon.area for polygon in polygons)
    covered = united(polygons).area
    if abs(total - covered) > _SAME_AREA * total:
        return [f"figures on one layer overlap or lie inside one another (by {total - covered:.3g} of {total:.6g})"]
    return []


def united(polygons: Sequence[BaseGeometry]) -> BaseGeometry:
    """Return the union of polygons, as a mask writer exposes them."""
    import shapely

    return shapely.union_all(list(polygons))
