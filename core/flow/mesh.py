"""Graded triangles for a flow domain: finer at noses, edges following the arcs.

The rings arrive with arcs as many short chords. Those are thinned to the mesh size first, so that
they do not force tiny triangles; afterwards vertices and edge middles on the wall are moved back on
the ring that was given, which makes the boundary triangles curved.
"""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from core.errors import SolveError
from core.flow.domain import edges_on_chord

if TYPE_CHECKING:
    from skfem import MeshTri1, MeshTri2

    from core.flow.domain import FlowDomain

OPEN_ENDS = ("forward_inlet", "forward_outlet")

_SAG = 0.015  # distance of a thinned chord from its arc, as a share of the mesh size
_NOSE_TURN_DEG = 40.0  # turn of the wall into the liquid that counts as a nose
_NOSE_WINDOW = 0.15  # ... within this length of wall, in channel widths
_END_DIVISION = (0.11, 0.28, 0.5, 0.72, 0.89)  # of each open end, however coarse the rest may be
_NOSE_SIZE = 0.2  # size at a nose as a share of the size elsewhere

_GRADING = 0.3  # how fast the size of triangles may change, 0 (slow) to 1
_START_SIZE = 0.6  # triangles larger than this only begin a solve, so that fewer do;
_START_GRADING = 0.4  # ... yet with 0.6 flows of Re 300 were lost on them
_WALL_PER_DEPTH = 1.4  # edge length at walls over mesh size, for each unit of depth / width
_THINNEST_WALL = 0.25


@dataclass(frozen=True, slots=True)
class MeshPlan:
    """How fine a mesh is asked for.

    Attributes
    ----------
    size : float
        Edge length away from noses, in channel widths.
    nose : float
        Edge length at noses as a share of ``size``.
    wall : float
        Edge length along walls as a share of ``size``; below 1 where side layers are thin.
    grading : float
        How fast the size may change, 0 (slow) to 1.
    """

    size: float
    nose: float = _NOSE_SIZE
    wall: float = 1.0
    grading: float = _GRADING


def plan_for_depth(size: float, depth_to_width: float) -> MeshPlan:
    """Return a plan with walls drawn as finely as the side layers of a shallow channel need.

    In a shallow channel the speed rises from the side walls over about a third of the depth; the
    shares were found with straight channels, for 0.2 % of the drop at size 0.33.

    Parameters
    ----------
    size : float
        Edge length away from walls, in channel widths.
    depth_to_width : float
        Depth over channel width [-].

    Returns
    -------
    MeshPlan
    """
    wall = min(1.0, max(_THINNEST_WALL, _WALL_PER_DEPTH * depth_to_width))
    return MeshPlan(size, wall=wall, grading=_START_GRADING if size > _START_SIZE else _GRADING)


def channel_mesh(domain: FlowDomain, plan: MeshPlan) -> MeshTri2:
    """Return curved triangles that fill a domain, lengths in channel widths.

    Parameters
    ----------
    domain : FlowDomain
        What to fill.
    plan : MeshPlan
        Edge lengths.

    Returns
    -------
    MeshTri2
        Quadratic triangles; ``boundaries`` holds the facets of both open ends by name.

    Raises
    ------
    SolveError
        If the outline cannot be filled, for example because it crosses itself.
    """
    rings = domain.rings()
    rings[0], kept = _with_divided_ends(domain, rings[0])
    keeps = [kept, *(np.zeros(len(ring), dtype=bool) for ring in rings[1:])]
    chains = [_thinned(ring, _SAG * plan.size, keep) for ring, keep in zip(rings, keeps, strict=True)]
    _check_walls([ring[chain] for ring, chain in zip(rings, chains, strict=True)])
    straight, edges, owner = _triangulated(rings, chains, plan)
    on_ring = _ChordMap(rings, chains)
    mesh, facets = _curved(straight, edges, on_ring, owner)
    boundaries = {}
    for name in OPEN_ENDS:
        boundaries[name] = facets[on_ring.lying_on(getattr(domain, f"{name}_um") / domain.channel_width_um)[owner]]
        if not len(boundaries[name]):
            raise SolveError(f"{name}_um lost its edge in meshing; it must be a straight edge of outer_um")
    return mesh.with_boundaries(boundaries)


def _check_walls(rings: list[np.ndarray]) -> None:
    """Refuse walls that cross or touch: the mesher may not come back from them."""
    from shapely.geometry import Polygon
    from shapely.validation import explain_validity

    area = Polygon(rings[0], rings[1:])
    if not area.is_valid:
        raise SolveError(f"the outline cannot be filled with triangles: {explain_validity(area)} (in channel widths)")


def noses(ring: np.ndarray) -> np.ndarray:
    """Return the points where the wall turns sharply into the liquid.

    Parameters
    ----------
    ring : ndarray, shape (n, 2)
        Ring in channel widths, liquid to the left.

    Returns
    -------
    ndarray, shape (m, 2)
        One point for each sharp corner, or for each stretch of a rounded one.
    """
    edges = np.roll(ring, -1, axis=0) - ring
    lengths = np.hypot(*edges.T)
    before = np.roll(edges, 1, axis=0)
    turn = np.degrees(
        np.arctan2(before[:, 0] * edges[:, 1] - before[:, 1] * edges[:, 0], np.sum(before * edges, axis=1))
    )
    along = np.cumsum(lengths) - lengths
    around = lengths.sum()
    gap = np.abs(along[:, None] - along[None, :])
    near = np.minimum(gap, around - gap) <= _NOSE_WINDOW / 2
    total = near @ np.minimum(turn, 0.0)
    return ring[(total <= -_NOSE_TURN_DEG) & (turn < 0)]


def _with_divided_ends(domain: FlowDomain, ring: np.ndarray) -> tuple[np.ndarray, np.ndarray]:
    """Return the outer ring with points added across the open ends, and which points must be kept.

    Both ends get the same division, so that neither direction has the better drawn inflow.
    """
    points, keep = [], []
    ends = [edges_on_chord(ring, getattr(domain, f"{name}_um") / domain.channel_width_um, 1e-6) for name in OPEN_ENDS]
    on_end = ends[0] | ends[1]
    for i, (start, stop) in enumerate(zip(ring, np.roll(ring, -1, axis=0), strict=True)):
        points.append(start)
        keep.append(on_end[i] or on_end[i - 1])
        if on_end[i]:
            points += [start + share * (stop - start) for share in _END_DIVISION]
            keep += [True] * len(_END_DIVISION)
    return np.array(points), np.array(keep)


def _thinned(ring: np.ndarray, sag: float, keep: np.ndarray) -> np.ndarray:
    """Return indices of ring points such that no point lies further than ``sag`` from a chord."""
    anchors = np.flatnonzero(keep)
    if len(anchors) < 2:
        far = int(np.argmax(np.hypot(*(ring - ring[0]).T)))
        anchors = np.array([0, far])
    chosen: list[int] = []
    for start, stop in zip(anchors, np.roll(anchors, -1), strict=True):
        path = np.arange(start, stop + (len(ring) if stop <= start else 0) + 1) % len(ring)
        chosen.extend(_thinned_path(ring, path, sag)[:-1])
    return np.array(chosen)


def _thinned_path(ring: np.ndarray, path: np.ndarray, sag: float) -> list[int]:
    """Return the points of a path kept by repeated splitting at the furthest point."""
    kept, todo = {0, len(path) - 1}, [(0, len(path) - 1)]
    points = ring[path]
    while todo:
        i, j = todo.pop()
        if j - i < 2:
            continue
        chord = points[j] - points[i]
        offset = points[i + 1 : j] - points[i]
        length = np.hypot(*chord)
        away = np.abs(offset @ np.array([-chord[1], chord[0]])) / length if length > 0 else np.hypot(*offset.T)
        worst = int(np.argmax(away))
        if away[worst] > sag:
            middle = i + 1 + worst
            kept.add(middle)
            todo += [(i, middle), (middle, j)]
    return [int(path[k]) for k in sorted(kept)]


def _triangulated(
    rings: list[np.ndarray], chains: list[np.ndarray], plan: MeshPlan
) -> tuple[MeshTri1, np.ndarray, np.ndarray]:
    """Return straight triangles, their wall edges (n, 2) and the thinned chord each edge lies on."""
    from netgen.geom2d import SplineGeometry
    from netgen.meshing import MeshingParameters
    from skfem import MeshTri1

    geometry, number = SplineGeometry(), 0
    parameters = MeshingParameters(maxh=plan.size, grading=plan.grading)
    for ring, chain in zip(rings, chains, strict=True):
        ids = [geometry.AppendPoint(*ring[k]) for k in chain]
        for a, b in zip(ids, ids[1:] + ids[:1], strict=True):
            number += 1
            geometry.Append(["line", a, b], leftdomain=1, rightdomain=0, bc=number, maxh=plan.size * plan.wall)
        for x, y in noses(ring):
            parameters.RestrictH(float(x), float(y), 0.0, plan.size * plan.nose)
    try:
        made = geometry.GenerateMesh(parameters)
    except Exception as error:  # the mesher has no error class of its own
        raise SolveError(f"the outline could not be filled with triangles ({error})") from error
    cells = made.Elements2D().NumPy()["nodes"][:, :3].astype(np.int64) - 1
    if not len(cells):
        raise SolveError("the outline could not be filled with triangles; check it for crossing walls")
    corners = np.array(made.Coordinates(), dtype=float)[:, :2]
    wall = made.Elements1D().NumPy()
    mesh = MeshTri1(np.ascontiguousarray(corners.T), np.ascontiguousarray(cells.T))
    return mesh, wall["nodes"][:, :2].astype(np.int64) - 1, wall["index"].astype(np.int64) - 1


def _curved(mesh: MeshTri1, edges: np.ndarray, on_ring: _ChordMap, owner: np.ndarray) -> tuple[MeshTri2, np.ndarray]:
    """Return the mesh with wall points moved from the chords on the rings, and the facet of each edge."""
    from skfem import MeshTri1, MeshTri2

    points = mesh.p.T.copy()
    middles = points[edges].mean(axis=1)
    moved = points.copy()
    for column in (0, 1):
        moved[edges[:, column]] = on_ring(points[edges[:, column]], owner)
    facets = _facets_of(mesh, edges)
    quadratic = MeshTri2.from_mesh(MeshTri1(np.ascontiguousarray(moved.T), mesh.t))
    nodes = quadratic.doflocs.copy()
    nodes[:, mesh.nvertices + facets] = on_ring(middles, owner).T
    return replace(quadratic, doflocs=nodes), facets


def _facets_of(mesh: MeshTri1, edges: np.ndarray) -> np.ndarray:
    """Return the facet numbers of vertex pairs."""

    def key(pairs: np.ndarray) -> np.ndarray:
        return pairs.min(axis=0) * mesh.nvertices + pairs.max(axis=0)

    known = key(mesh.facets)
    order = np.argsort(known)
    return order[np.searchsorted(known, key(edges.T), sorter=order)]


class _ChordMap:
    """Moves points of thinned chords on the stretch of ring that each chord stands for."""

    def __init__(self, rings: list[np.ndarray], chains: list[np.ndarray]) -> None:
        self._stretches = []
        for ring, chain in zip(rings, chains, strict=True):
            for start, stop in zip(chain, np.roll(chain, -1), strict=True):
                path = np.arange(start, stop + (len(ring) if stop <= start else 0) + 1) % len(ring)
                self._stretches.append(ring[path])

    def __call__(self, points: np.ndarray, owner: np.ndarray) -> np.ndarray:
        """Return points at the same share of length along the ring; shapes (n, 2), (n,)."""
        moved = points.copy()
        for number in np.unique(owner):
            stretch = self._stretches[number]
            if len(stretch) < 3:
                continue
            mine = owner == number
            chord = stretch[-1] - stretch[0]
            share = (points[mine] - stretch[0]) @ chord / (chord @ chord)
            along = np.concatenate([[0.0], np.cumsum(np.hypot(*np.diff(stretch, axis=0).T))])
            for axis in (0, 1):
                moved[mine, axis] = np.interp(share * along[-1], along, stretch[:, axis])
        return moved

    def lying_on(self, chord: np.ndarray) -> np.ndarray:
        """Return which thinned chords lie on a given one, as booleans."""
        ends = np.array([[s[0], s[-1]] for s in self._stretches])
        return np.array([edges_on_chord(pair, chord, 1e-6)[0] for pair in ends])
