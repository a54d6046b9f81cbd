"""Lines and arcs of walls as arrays, for measuring many at once."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from core.geometry.contour import arcs_between

if TYPE_CHECKING:
    from collections.abc import Iterable, Sequence

    from core.geometry.contour import Contour, Flags, Floats, Indices

    # lower left and upper right corners, each of shape (n, 2)
    Boxes = tuple[Floats, Floats]

# Points this little beyond the end of a line or arc still count as on it [um].
ON_EDGE_UM = 1e-7
_ON_EDGE_RAD = 1e-8  # and for the directions of small arcs


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Edges:
    """Straight lines and arcs of at most a quarter turn, walked with the fluid on the left; n of them.

    Attributes
    ----------
    start_um, end_um : array, shape (n, 2)
        Ends [um].
    centre_um : array, shape (n, 2)
        Centres of arcs; zero for lines [um].
    radius_um : array, shape (n,)
        Radii of arcs; 0 for lines [um].
    angle_rad, sweep_rad : array, shape (n,)
        Start angle and signed sweep of arcs; zero for lines.
    """

    start_um: Floats
    end_um: Floats
    centre_um: Floats
    radius_um: Floats
    angle_rad: Floats
    sweep_rad: Floats

    @classmethod
    def of(cls, contours: Iterable[Contour], *, is_closed: bool = True) -> Edges:
        """Return the edges of rings, or of open runs whose last vertex is an end."""
        rings = list(contours)
        counts = [len(ring.bulges) for ring in rings]
        start, bulges = np.concatenate([r.vertices_um for r in rings]), np.concatenate([r.bulges for r in rings])
        end = np.empty_like(start)
        end[edges_before(counts)] = start
        if not is_closed:
            kept = np.delete(np.arange(len(start)), np.cumsum(counts) - 1)
            start, end, bulges = start[kept], end[kept], bulges[kept]
        centre, radius, angle, sweep = arcs_between(start, end, bulges)
        radius = np.where(np.isfinite(radius), radius, 0.0)
        return cls(start_um=start, end_um=end, centre_um=centre, radius_um=radius, angle_rad=angle, sweep_rad=sweep)

    @classmethod
    def joined(cls, first: Edges, second: Edges) -> Edges:
        """Return the edges of two sets."""
        return cls(**{name: np.concatenate((getattr(first, name), getattr(second, name))) for name in cls.__slots__})

    def __len__(self) -> int:
        return len(self.start_um)

    def take(self, which: Indices | Flags | slice) -> Edges:
        """Return some of the edges."""
        return Edges(
            start_um=self.start_um[which], end_um=self.end_um[which], centre_um=self.centre_um[which],
            radius_um=self.radius_um[which], angle_rad=self.angle_rad[which], sweep_rad=self.sweep_rad[which],
        )  # fmt: skip

    def shifted(self, by_um: Floats) -> Edges:
        """Return all edges moved."""
        return Edges(
            start_um=self.start_um + by_um, end_um=self.end_um + by_um, centre_um=self.centre_um + by_um,
            radius_um=self.radius_um, angle_rad=self.angle_rad, sweep_rad=self.sweep_rad,
        )  # fmt: skip

    @property
    def is_arc(self) -> Flags:
        """Which edges are arcs."""
        arc: Flags = self.radius_um > 0.0
        return arc

    def boxes_um(self) -> Boxes:
        """Return the lower left and upper right corners of boxes that hold the edges, each shape (n, 2) [um]."""
        sagitta = self.radius_um * (1.0 - np.cos(0.5 * self.sweep_rad))
        low = np.minimum(self.start_um, self.end_um) - sagitta[:, None]
        return low, np.maximum(self.start_um, self.end_um) + sagitta[:, None]

    def bounds_um(self) -> Boxes:
        """Return the lower left and upper right corner of a box that holds all edges, each shape (2,) [um]."""
        low, high = self.boxes_um()
        return low.min(axis=0), high.max(axis=0)

    def on_arc(self, angle_rad: Floats) -> Flags:
        """Return whether directions from the centres, shape (n,) [rad], lie within the arcs."""
        turn = (angle_rad - self.angle_rad) * np.sign(self.sweep_rad)
        slack = np.minimum(ON_EDGE_UM / np.maximum(self.radius_um, ON_EDGE_UM), _ON_EDGE_RAD)
        hit: Flags = np.mod(turn + slack, 2.0 * np.pi) <= np.abs(self.sweep_rad) + 2.0 * slack
        return hit & self.is_arc

    def nearest(self, points_um: Floats) -> Floats:
        """Return the points of the edges that are nearest to points.

        Parameters
        ----------
        points_um : array, shape (n, 2), (2,) or (k, 1, 2)
            One point for each edge, one for all, or k for all of them [um].

        Returns
        -------
        array, shape (n, 2) or (k, n, 2)
            On each edge [um].
        """
        d = self.end_um - self.start_um
        along = dot(points_um - self.start_um, d) / np.maximum(dot(d, d), 1e-30)
        found: Floats = self.start_um + np.clip(along, 0.0, 1.0)[..., None] * d
        arc = np.flatnonzero(self.is_arc)
        if len(arc):
            points = np.broadcast_to(points_um, found.shape)[..., arc, :]
            found[..., arc, :] = self.take(arc)._nearest_on_arcs(points)
        return found

    def _nearest_on_arcs(self, points: Floats) -> Floats:
        spoke = points - self.centre_um
        away = np.hypot(spoke[..., 0], spoke[..., 1])
        inner = self.on_arc(np.arctan2(spoke[..., 1], spoke[..., 0])) & (away > 0.0)  # at the centre any point will do
        foot = self.centre_um + (self.radius_um / np.where(inner, away, 1.0))[..., None] * spoke
        to_start, to_end = points - self.start_um, points - self.end_um
        is_start = dot(to_start, to_start) <= dot(to_end, to_end)
        tip = np.where(is_start[..., None], self.start_um, self.end_um)
        nearest: Floats = np.where(inner[..., None], foot, tip)
        return nearest

    def distance(self, points_um: Floats) -> Floats:
        """Return the distances of points, as for ``nearest``, from the edges, shape (n,) or (k, n) [um]."""
        spoke = self.nearest(points_um) - points_um
        away: Floats = np.hypot(spoke[..., 0], spoke[..., 1])
        return away

    def ahead(self, point_um: Floats, direction: Floats) -> float:
        """Return how far from a point the first edge lies in a direction (a unit vector) [um]; infinite for none."""
        rel, d = self.start_um - point_um, self.end_um - self.start_um
        skew = _cross(direction, d)
        crosses = ~self.is_arc & (np.abs(skew) > 1e-12 * np.hypot(d[:, 0], d[:, 1]))
        skew = np.where(crosses, skew, 1.0)
        share = _cross(rel, direction) / skew
        away = [np.where(crosses & (share >= 0.0) & (share <= 1.0), _cross(rel, d) / skew, np.inf)]
        rel = self.centre_um - point_um
        along, inside = dot(rel, direction), self.radius_um**2 - _cross(rel, direction) ** 2
        for half in (-np.sqrt(np.maximum(inside, 0.0)), np.sqrt(np.maximum(inside, 0.0))):
            spoke = (along + half)[:, None] * direction - rel
            hit = self.on_arc(np.arctan2(spoke[:, 1], spoke[:, 0])) & (inside >= 0.0)
            away.append(np.where(hit, along + half, np.inf))
        every = np.concatenate(away)
        return float(every[every > 0.0].min(initial=np.inf))


def _cross(a: Floats, b: Floats) -> Floats:
    product: Floats = a[..., 0] * b[..., 1] - a[..., 1] * b[..., 0]
    return product


def dot(a: Floats, b: Floats) -> Floats:
    """Return the scalar products of vectors, shape (..., 2)."""
    product: Floats = a[..., 0] * b[..., 0] + a[..., 1] * b[..., 1]
    return product


def boxes_apart_um(boxes: Boxes, others: Boxes, i: Indices, j: Indices) -> Floats:
    """Return how far boxes (numbers i) are from others (numbers j) [um]."""
    gap = np.maximum(np.maximum(boxes[0][i] - others[1][j], others[0][j] - boxes[1][i]), 0.0)
    away: Floats = np.hypot(gap[..., 0], gap[..., 1])
    return away


def edges_before(counts: Sequence[int]) -> Indices:
    """Return for every edge of rings of so many edges the number of the edge before it."""
    before = np.arange(sum(counts)) - 1
    last = np.cumsum(counts) - 1
    before[last - np.asarray(counts) + 1] = last
    return before
