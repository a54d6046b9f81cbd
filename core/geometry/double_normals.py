"""Where walls face one another squarely: pairs of points whose connecting line is normal to both walls.

Through the fluid such pairs are the necks of a channel, through the solid those of an island or of the
wall between two parts of a channel. At a sharp corner every direction between the normals of its two walls
is a normal: a corner is an arc of no radius. Two walls of a tapering nose face one another nowhere, so
that a nose is no neck.
"""

from __future__ import annotations

from enum import Enum
from typing import TYPE_CHECKING

import numpy as np

from core.geometry.edges import ON_EDGE_UM, Edges, boxes_apart_um, dot

if TYPE_CHECKING:
    from collections.abc import Iterator

    from core.geometry.contour import Flags, Floats, Indices

_PARALLEL = 1e-8  # lines at a smaller angle are parallel [rad]
_CORNER = 1e-9  # walls that turn by less go on smoothly [rad]
_CONCENTRIC_UM = 1e-5  # arcs about nearer centres have the same centre
_NO_RADIUS_UM = 1e-12

# points on the first wall, on the second, and which rows are real
Candidates = tuple["Floats", "Floats", "Flags"]


class Through(Enum):
    """What lies between two walls."""

    FLUID = 1.0
    SOLID = -1.0


def double_normals(
    edges: Edges, before: Indices, through: Through, *, below_um: float = np.inf
) -> tuple[Floats, Floats]:
    """Return pairs of points at which walls face one another squarely.

    Parameters
    ----------
    edges : Edges
        Walls with the fluid on the left.
    before : array of int
        Number of the wall before each wall; its own number where it starts at no corner.
    through : Through
        Whether the fluid or the solid side of the walls is meant.
    below_um : float
        Only pairs nearer than this are of interest [um].

    Returns
    -------
    tuple of array, each shape (k, 2)
        Points on the one and on the other wall, at most ``below_um`` apart [um]. Nothing is said about what
        else lies between them. Where walls face one another along a whole stretch, one pair of it.
    """
    walls = Edges.joined(edges, _corners(edges, before, through))
    i, j = np.triu_indices(len(walls), k=1)
    if np.isfinite(below_um):
        near = boxes_apart_um(walls.boxes_um(), walls.boxes_um(), i, j) < below_um
        i, j = i[near], j[near]
    # lines before arcs, so that there are three kinds of pairs
    swap = walls.is_arc[i] & ~walls.is_arc[j]
    i, j = np.where(swap, j, i), np.where(swap, i, j)
    kinds = walls.is_arc[i].astype(int) + walls.is_arc[j]
    found: list[Candidates] = []
    for kind, facing in enumerate((_line_line, _line_arc, _arc_arc)):
        rows = kinds == kind
        found += facing(walls.take(i[rows]), walls.take(j[rows]), through.value)
    p = np.concatenate([first[valid] for first, _, valid in found])
    q = np.concatenate([second[valid] for _, second, valid in found])
    near = np.hypot(q[:, 0] - p[:, 0], q[:, 1] - p[:, 1]) < below_um
    return p[near], q[near]


def _corners(edges: Edges, before: Indices, through: Through) -> Edges:
    """Return the corners that stick out into fluid or solid as arcs of no radius: their normals sweep like an arc's."""
    leaving, arriving = _tangents(edges)
    first = arriving[before]
    turn = np.arctan2(first[:, 0] * leaving[:, 1] - first[:, 1] * leaving[:, 0], dot(first, leaving))
    out = np.flatnonzero((turn * through.value < -_CORNER) & (before != np.arange(len(edges))))
    side = through.value
    point = edges.start_um[out]
    return Edges(
        start_um=point, end_um=point, centre_um=point, radius_um=np.full(len(out), _NO_RADIUS_UM),
        angle_rad=np.arctan2(side * first[out, 0], -side * first[out, 1]), sweep_rad=turn[out],
    )  # fmt: skip


def _tangents(edges: Edges) -> tuple[Floats, Floats]:
    """Return the directions in which edges are walked at their starts and ends, shape (n, 2)."""
    d = edges.end_um - edges.start_um
    d = d / np.maximum(np.hypot(d[:, 0], d[:, 1]), 1e-30)[:, None]
    arc, sense = edges.is_arc[:, None], np.sign(edges.sweep_rad)[:, None]
    ahead, behind = _spoke(edges, 1.0), _spoke(edges, 0.0)
    leaving = np.where(arc, sense * np.stack((-behind[:, 1], behind[:, 0]), axis=1), d)
    arriving = np.where(arc, sense * np.stack((-ahead[:, 1], ahead[:, 0]), axis=1), d)
    return leaving, arriving


def _directions(lines: Edges, side: float) -> tuple[Floats, Floats, Floats]:
    """Return unit vectors along lines, their normals into the side that is meant, and their lengths."""
    d = lines.end_um - lines.start_um
    length = np.maximum(np.hypot(d[:, 0], d[:, 1]), 1e-30)
    d = d / length[:, None]
    return d, side * np.stack((-d[:, 1], d[:, 0]), axis=1), length


def _line_line(one: Edges, other: Edges, side: float) -> Iterator[Candidates]:
    d, normal, length = _directions(one, side)
    e, _, other_length = _directions(other, side)
    facing = (np.abs(d[:, 0] * e[:, 1] - d[:, 1] * e[:, 0]) < _PARALLEL) & (dot(d, e) < 0.0)
    rel = other.start_um - one.start_um
    away, first = dot(rel, normal), dot(rel, d)
    low, high = np.maximum(first - other_length, 0.0), np.minimum(first, length)
    middle = one.start_um + (0.5 * (low + high))[:, None] * d
    yield middle, middle + away[:, None] * normal, facing & (away > ON_EDGE_UM) & (high - low > -ON_EDGE_UM)


def _line_arc(lines: Edges, arcs: Edges, side: float) -> Iterator[Candidates]:
    d, normal, length = _directions(lines, side)
    rel = arcs.centre_um - lines.start_um
    sense = side * np.sign(arcs.sweep_rad)
    along, away = dot(rel, d), dot(rel, normal) + sense * arcs.radius_um
    foot = lines.start_um + along[:, None] * d
    on_line = (along > -ON_EDGE_UM) & (along < length + ON_EDGE_UM)
    valid = on_line & (away > ON_EDGE_UM) & arcs.on_arc(_angle(sense[:, None] * normal))
    yield foot, foot + away[:, None] * normal, valid


def _arc_arc(one: Edges, other: Edges, side: float) -> Iterator[Candidates]:
    axis = other.centre_um - one.centre_um
    apart = np.hypot(axis[:, 0], axis[:, 1])
    distinct = apart > _CONCENTRIC_UM
    unit = axis / np.where(distinct, apart, 1.0)[:, None]
    for sign in (1.0, -1.0):
        p, q, valid = _facing_along(one, other, sign * unit, side)
        yield p, q, valid & distinct
    if distinct.all():
        return
    one, other = one.take(~distinct), other.take(~distinct)
    own, others = -side * np.sign(one.sweep_rad), side * np.sign(other.sweep_rad)
    # where arcs face one another along a stretch, an end of one of them, or its middle, faces the other
    for share in (0.5, 0.0, 1.0):
        yield _facing_along(one, other, own[:, None] * _spoke(one, share), side)
        yield _facing_along(one, other, others[:, None] * _spoke(other, share), side)


def _facing_along(one: Edges, other: Edges, along: Floats, side: float) -> Candidates:
    """Return the points of arcs whose normals run along directions, each towards the other arc."""
    own = -side * np.sign(one.sweep_rad)[:, None] * along
    others = side * np.sign(other.sweep_rad)[:, None] * along
    p = one.centre_um + one.radius_um[:, None] * own
    q = other.centre_um + other.radius_um[:, None] * others
    valid = (dot(q - p, along) > ON_EDGE_UM) & one.on_arc(_angle(own)) & other.on_arc(_angle(others))
    return p, q, valid


def _spoke(arcs: Edges, share: float) -> Floats:
    """Return unit vectors from the centres to a part of the way along each arc, shape (n, 2)."""
    angle = arcs.angle_rad + share * arcs.sweep_rad
    return np.stack((np.cos(angle), np.sin(angle)), axis=1)


def _angle(spoke: Floats) -> Floats:
    angle: Floats = np.arctan2(spoke[..., 1], spoke[..., 0])
    return angle
