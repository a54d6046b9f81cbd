"""Smallest distance between two sets of walls, exact on lines and arcs."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from core.geometry.edges import boxes_apart_um

if TYPE_CHECKING:
    from collections.abc import Iterator

    from core.geometry.contour import Flags, Floats, Indices
    from core.geometry.edges import Boxes, Edges

_BLOCK = 24  # edges whose common box is looked at first


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Nearest:
    """Where two sets of walls come nearest to one another.

    Attributes
    ----------
    um : float
        Distance [um]; 0 where they cross, infinite where one of them is empty.
    at_um : array, shape (2, 2)
        One point on each [um].
    """

    um: float
    at_um: Floats


def nearest(first: Edges, second: Edges) -> Nearest:
    """Return the smallest distance between two sets of walls.

    Parameters
    ----------
    first, second : Edges
        Lines and arcs in the same coordinates.

    Returns
    -------
    Nearest
        Exact up to rounding.
    """
    best = Nearest(um=np.inf, at_um=np.full((2, 2), np.nan))
    if not len(first) or not len(second):
        return best
    boxes, others = first.boxes_um(), second.boxes_um()
    blocks, other_blocks = _blocks(boxes), _blocks(others)
    apart = boxes_apart_um(blocks, other_blocks, *np.ix_(np.arange(len(blocks[0])), np.arange(len(other_blocks[0]))))
    order = np.argsort(apart, axis=None)
    limits = apart.ravel()[order]
    done = 0
    for size in (1, 7, len(order)):  # a bound first, then all that could beat it
        chosen = order[done : done + size][limits[done : done + size] < best.um]
        done += size
        if not len(chosen):
            break
        i, j = _pairs(chosen // apart.shape[1], chosen % apart.shape[1], len(first), len(second))
        lower = boxes_apart_um(boxes, others, i, j)
        near = lower < min(best.um, _upper(first, second, i, j))
        if not near.any():
            continue
        touching = lower <= 0.0
        crossing = crossing_point(first.take(i[touching]), second.take(j[touching]))
        if crossing is not None:
            return Nearest(um=0.0, at_um=np.stack((crossing, crossing)))
        found = _nearest_pair(first.take(i[near]), second.take(j[near]))
        best = found if found.um < best.um else best
    return best


def _blocks(boxes: Boxes) -> Boxes:
    at = np.arange(0, len(boxes[0]), _BLOCK)
    return np.minimum.reduceat(boxes[0], at), np.maximum.reduceat(boxes[1], at)


def _pairs(blocks: Indices, others: Indices, count: int, other_count: int) -> tuple[Indices, Indices]:
    """Return all pairs of edges of pairs of blocks."""
    a, b = (grid.ravel() for grid in np.meshgrid(np.arange(_BLOCK), np.arange(_BLOCK), indexing="ij"))
    i = (blocks[:, None] * _BLOCK + a[None]).ravel()
    j = (others[:, None] * _BLOCK + b[None]).ravel()
    real = (i < count) & (j < other_count)
    return i[real], j[real]


def _upper(first: Edges, second: Edges, i: Indices, j: Indices) -> float:
    """Return a distance that is really there, a hair enlarged so that ties survive."""
    away = np.hypot(*(first.start_um[i] - second.start_um[j]).T)
    return float(away.min()) * (1.0 + 1e-12) + 1e-9


def _nearest_pair(first: Edges, second: Edges) -> Nearest:
    """Return the nearest points of edges taken row by row."""
    best = Nearest(um=np.inf, at_um=np.full((2, 2), np.nan))
    for p, q, valid in (*_from_ends(first, second), *_between(first, second)):
        away = np.where(valid, np.hypot(q[:, 0] - p[:, 0], q[:, 1] - p[:, 1]), np.inf)
        at = int(np.argmin(away))
        if away[at] < best.um:
            best = Nearest(um=float(away[at]), at_um=np.stack((p[at], q[at])))
    return best


def _from_ends(first: Edges, second: Edges) -> Iterator[tuple[Floats, Floats, Flags]]:
    everywhere = np.ones(len(first), dtype=bool)
    for point in (first.start_um, first.end_um):
        yield point, second.nearest(point), everywhere
    for point in (second.start_um, second.end_um):
        yield first.nearest(point), point, everywhere


def _between(first: Edges, second: Edges) -> Iterator[tuple[Floats, Floats, Flags]]:
    """Yield points between the ends where the normals of both edges are one line."""
    for is_arc, other_is_arc in ((True, True), (True, False), (False, True)):
        rows = np.flatnonzero((first.is_arc == is_arc) & (second.is_arc == other_is_arc))
        if len(rows):
            yield from normal_points(first.take(rows), second.take(rows))


def normal_points(first: Edges, second: Edges) -> Iterator[tuple[Floats, Floats, Flags]]:
    """Yield all common normals of edges taken row by row, of which at least one is an arc.

    All rows must be of one kind (arc and arc, arc and line, line and arc). Yields arrays of points on
    the first and second edges, and whether both really lie on them.
    """
    if not first.is_arc[0]:
        for q, p, valid in normal_points(second, first):
            yield p, q, valid
        return
    if second.is_arc[0]:
        axis = second.centre_um - first.centre_um
        away = np.hypot(axis[:, 0], axis[:, 1])
        distinct = away > 1e-9
        axis = axis / np.where(distinct, away, 1.0)[:, None]
        other_ends = [
            (second.centre_um + sign * second.radius_um[:, None] * axis, second.on_arc(_angle(sign * axis)) & distinct)
            for sign in (1.0, -1.0)
        ]
    else:
        d = second.end_um - second.start_um
        length = np.maximum(np.hypot(d[:, 0], d[:, 1]), 1e-30)
        d = d / length[:, None]
        along = np.sum((first.centre_um - second.start_um) * d, axis=1)
        axis = np.stack((-d[:, 1], d[:, 0]), axis=1)
        on_line = (along >= -1e-7) & (along <= length + 1e-7)
        other_ends = [(second.start_um + along[:, None] * d, on_line)]
    for sign in (1.0, -1.0):
        p = first.centre_um + sign * first.radius_um[:, None] * axis
        on_first = first.on_arc(_angle(sign * axis))
        for q, on_second in other_ends:
            yield p, q, on_first & on_second


def crossing_point(first: Edges, second: Edges) -> Floats | None:
    """Return a point where edges taken row by row cross, or None."""
    for is_arc, other_is_arc, cross in (
        (False, False, _line_line), (False, True, _line_arc), (True, False, _arc_line), (True, True, _arc_arc),
    ):  # fmt: skip
        rows = np.flatnonzero((first.is_arc == is_arc) & (second.is_arc == other_is_arc))
        if len(rows):
            points, valid = cross(first.take(rows), second.take(rows))
            if valid.any():
                point: Floats = points[int(np.argmax(valid))]
                return point
    return None


def _line_line(first: Edges, second: Edges) -> tuple[Floats, Flags]:
    d, e, r = first.end_um - first.start_um, second.end_um - second.start_um, second.start_um - first.start_um
    cross = d[:, 0] * e[:, 1] - d[:, 1] * e[:, 0]
    skew = np.abs(cross) > 1e-12 * np.hypot(*d.T) * np.hypot(*e.T)
    cross = np.where(skew, cross, 1.0)
    s = (r[:, 0] * e[:, 1] - r[:, 1] * e[:, 0]) / cross
    t = (r[:, 0] * d[:, 1] - r[:, 1] * d[:, 0]) / cross
    return first.start_um + s[:, None] * d, skew & (s >= 0.0) & (s <= 1.0) & (t >= 0.0) & (t <= 1.0)


def _arc_line(first: Edges, second: Edges) -> tuple[Floats, Flags]:
    return _line_arc(second, first)


def _line_arc(lines: Edges, arcs: Edges) -> tuple[Floats, Flags]:
    d = lines.end_um - lines.start_um
    length = np.maximum(np.hypot(d[:, 0], d[:, 1]), 1e-30)
    d = d / length[:, None]
    r = arcs.centre_um - lines.start_um
    along, across = np.sum(r * d, axis=1), r[:, 0] * d[:, 1] - r[:, 1] * d[:, 0]
    inside = arcs.radius_um**2 - across**2
    half = np.sqrt(np.maximum(inside, 0.0))
    found = []
    for s in (along - half, along + half):
        points = lines.start_um + s[:, None] * d
        valid = (inside >= 0.0) & (s >= 0.0) & (s <= length) & arcs.on_arc(_angle(points - arcs.centre_um))
        found.append((points, valid))
    return np.concatenate([p for p, _ in found]), np.concatenate([v for _, v in found])


def _arc_arc(first: Edges, second: Edges) -> tuple[Floats, Flags]:
    axis = second.centre_um - first.centre_um
    away = np.maximum(np.hypot(axis[:, 0], axis[:, 1]), 1e-30)
    axis = axis / away[:, None]
    along = 0.5 * (away + (first.radius_um**2 - second.radius_um**2) / away)
    inside = np.where(away > 1e-9, first.radius_um**2 - along**2, -1.0)
    half = np.sqrt(np.maximum(inside, 0.0))
    found = []
    for s in (-half, half):
        points = first.centre_um + along[:, None] * axis + s[:, None] * np.stack((-axis[:, 1], axis[:, 0]), axis=1)
        on_both = first.on_arc(_angle(points - first.centre_um)) & second.on_arc(_angle(points - second.centre_um))
        found.append((points, (inside >= 0.0) & on_both))
    return np.concatenate([p for p, _ in found]), np.concatenate([v for _, v in found])


def _angle(spoke: Floats) -> Floats:
    angle: Floats = np.arctan2(spoke[:, 1], spoke[:, 0])
    return angle
