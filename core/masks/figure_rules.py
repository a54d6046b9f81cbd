"""Rules for the figures that one block holds on one layer, whatever the file format.

Mask writers fill the inside of every figure; what a reader could take in two ways is refused.
Cutters follow lines, so that loops may lie within loops there, the inner ones first.
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
_STRAIGHT_BACK = 1e-9  # sine of the angle below which an edge runs back on the one before


def figure_problems(rings: Sequence[Floats], *, grain: float, is_nested: bool = False) -> list[str]:
    """Return what is wrong with the figures on one layer; the simplest kind of problem first.

    Parameters
    ----------
    rings : sequence of array, shape (n, 2)
        Corners in order, the first not repeated; arcs as chords.
    grain : float
        Points no further apart than this are the same point [unit of the rings].
    is_nested : bool
        Loops may lie within loops, to be cut in the order given.

    Returns
    -------
    list of str
        One sentence for the first kind of problem found; empty when all rules are kept.
    """
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
    if twice := _drawn_twice(rings, grain):
        return [f"{twice} figure{'s' * (twice > 1)} drawn twice"]
    return _nesting_problems(rings) if is_nested else _overlap_problems(rings)


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


def _drawn_twice(rings: Sequence[Floats], grain: float) -> int:
    scale = max(grain, 1e-9)
    seen = {tuple(sorted(map(tuple, np.rint(ring / scale).tolist()))) for ring in rings}
    return len(rings) - len(seen)


def _overlap_problems(rings: Sequence[Floats]) -> list[str]:
    import shapely

    total = float(sum(shapely.Polygon(ring).area for ring in rings))
    covered = area_of(rings).area
    if abs(total - covered) > _SAME_AREA * total:
        return [f"figures on one layer overlap or lie inside one another (by {total - covered:.3g} of {total:.6g})"]
    return []


def _nesting_problems(rings: Sequence[Floats]) -> list[str]:
    import shapely

    lines = [shapely.LinearRing(ring) for ring in rings]
    first, second = shapely.STRtree(lines).query(lines, predicate="intersects")
    if (first < second).any():
        x, y = rings[int(first[first < second][0])][0]
        return [f"loops to be cut cross or touch one another, first near ({x:g}, {y:g})"]
    inner, outer = rings_within(rings)
    if (np.bincount(inner, minlength=1) > 1).any():
        return ["a loop lies within a loop that lies within a loop"]
    if (inner > outer).any():
        x, y = rings[int(outer[inner > outer][0])][0]
        return [f"an outer loop comes before one that lies inside it, first near ({x:g}, {y:g})"]
    return []


def rings_within(rings: Sequence[Floats]) -> NDArray[np.int64]:
    """Return pairs of numbers, shape (2, n): a ring, and one that it lies within; rings neither cross nor touch."""
    import shapely

    areas = [shapely.Polygon(ring) for ring in rings]
    return shapely.STRtree(areas).query(shapely.points([ring[0] for ring in rings]), predicate="within")


def area_of(rings: Sequence[Floats], *, is_nested: bool = False) -> BaseGeometry:
    """Return what rings cover together, as a mask writer exposes it, or as loops within loops bound it.

    Parameters
    ----------
    rings : sequence of array, shape (n, 2)
        Corners in order, the first not repeated.
    is_nested : bool
        True: rings within rings bound holes. False: every ring is filled.
    """
    import shapely

    polygons = np.array([shapely.Polygon(ring) for ring in rings])
    if not is_nested or not len(polygons):
        return shapely.union_all(polygons)
    is_inner = np.zeros(len(rings), bool)
    is_inner[rings_within(rings)[0]] = True
    return shapely.union_all(polygons[~is_inner]).difference(shapely.union_all(polygons[is_inner]))
