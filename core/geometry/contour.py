"""Closed outlines of straight lines and true arcs.

A contour is a ring of vertices with one *bulge* per edge: b = tan(sweep/4), positive for an arc
that turns counter-clockwise, 0 for a straight edge. This is also how drawing files store arcs,
so that nothing is lost on the way out.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Iterable

    from numpy.typing import NDArray

    Floats = NDArray[np.float64]
    Flags = NDArray[np.bool_]
    Indices = NDArray[np.int_]

# Arcs are split so that none sweeps more than a quarter turn: several drawing readers draw
# arcs of more than half a turn wrongly.
LARGEST_SWEEP = np.pi / 2


@dataclass(frozen=True, slots=True, kw_only=True)
class Placement:
    """A rigid move: mirror about the x axis (if any), then turn, then shift.

    Attributes
    ----------
    angle : float
        Turn, counter-clockwise [rad].
    dx_um, dy_um : float
        Shift [um].
    is_mirrored : bool
        Mirror about the x axis first.
    """

    angle: float = 0.0
    dx_um: float = 0.0
    dy_um: float = 0.0
    is_mirrored: bool = False

    def points(self, xy: Floats) -> Floats:
        """Return moved copies of points, shape (n, 2) or (2,) [um]."""
        xy = np.asarray(xy, dtype=float)
        x, y = xy[..., 0], -xy[..., 1] if self.is_mirrored else xy[..., 1]
        c, s = np.cos(self.angle), np.sin(self.angle)
        return np.stack((c * x - s * y + self.dx_um, s * x + c * y + self.dy_um), axis=-1)

    def heading(self, angle: float) -> float:
        """Return a direction [rad] after the move."""
        return self.angle + (-angle if self.is_mirrored else angle)

    def after(self, first: Placement) -> Placement:
        """Return the one move that does ``first`` and then this one."""
        dx, dy = self.points(np.array([first.dx_um, first.dy_um]))
        return Placement(
            angle=self.heading(first.angle),
            dx_um=float(dx),
            dy_um=float(dy),
            is_mirrored=self.is_mirrored != first.is_mirrored,
        )


@dataclass(frozen=True)
class Contour:
    """One closed ring of lines and arcs; counter-clockwise when its area is positive.

    Attributes
    ----------
    vertices_um : array, shape (n, 2)
        Corners in order, the first not repeated [um].
    bulges : array, shape (n,)
        tan(sweep/4) of the edge that starts at each vertex.
    """

    vertices_um: Floats
    bulges: Floats

    @classmethod
    def joined(cls, parts: Iterable[tuple[Floats, Floats]]) -> Contour:
        """Return one ring from runs of (vertices, bulges) that follow one another."""
        vertices, bulges = zip(*parts, strict=True)
        return cls(np.concatenate(vertices), np.concatenate(bulges))

    @cached_property
    def area_um2(self) -> float:
        """Exact signed area [um^2]: shoelace sum plus the circular segments."""
        a = self.vertices_um - self.vertices_um[0]  # near the origin, to keep digits
        b = np.roll(a, -1, axis=0)
        straight = 0.5 * float(np.sum(a[:, 0] * b[:, 1] - a[:, 1] * b[:, 0]))
        sweep = 4.0 * np.arctan(self.bulges)
        chord2 = np.sum((b - a) ** 2, axis=1)
        curved = self.bulges != 0.0
        s, c2 = sweep[curved], chord2[curved]
        radius2 = c2 / (4.0 * np.sin(s / 2.0) ** 2)
        return straight + 0.5 * float(np.sum(radius2 * (s - np.sin(s))))

    @cached_property
    def bounds_um(self) -> tuple[float, float, float, float]:
        """(x_min, y_min, x_max, y_max) including the bellies of arcs [um]."""
        points = np.concatenate([self.vertices_um, *self._extreme_points()])
        low, high = points.min(axis=0), points.max(axis=0)
        return float(low[0]), float(low[1]), float(high[0]), float(high[1])

    def _extreme_points(self) -> list[Floats]:
        centre, radius, start, sweep = arc_data(self)
        found = [np.empty((0, 2))]
        for quarter in range(4):
            angle = quarter * np.pi / 2
            turn = np.where(sweep >= 0, (angle - start) % (2 * np.pi), -((start - angle) % (2 * np.pi)))
            hit = np.isfinite(radius) & (np.abs(turn) < np.abs(sweep))
            direction = np.array([np.cos(angle), np.sin(angle)])
            found.append(centre[hit] + radius[hit, None] * direction)
        return found

    def scaled(self, factor: float) -> Contour:
        """Return the ring enlarged about the origin; arcs stay true."""
        return Contour(factor * self.vertices_um, self.bulges)

    def placed(self, placement: Placement) -> Contour:
        """Return a moved copy; a mirrored one is turned round so that it keeps its sense."""
        moved = Contour(placement.points(self.vertices_um), self.bulges)
        if not placement.is_mirrored:
            return moved
        return Contour(moved.vertices_um, -self.bulges).reversed()

    def reversed(self) -> Contour:
        """Return the same ring walked the other way."""
        return Contour(self.vertices_um[::-1].copy(), -np.roll(self.bulges[::-1], -1))

    def chords(self, *, sagitta_um: float) -> Floats:
        """Return the ring as straight edges.

        Parameters
        ----------
        sagitta_um : float
            Largest distance between an arc and its chords [um].

        Returns
        -------
        array, shape (m, 2)
            Vertices in order, the first not repeated; arc ends are kept exactly.
        """
        centre, radius, start, sweep = arc_data(self)
        ratio = np.clip(1.0 - sagitta_um / np.where(np.isfinite(radius), radius, 1.0), 0.5, 1.0)
        with np.errstate(divide="ignore", invalid="ignore"):
            pieces = np.ceil(np.abs(sweep) / np.maximum(2.0 * np.arccos(ratio), 1e-4))
        pieces = np.where(np.isfinite(radius), np.maximum(pieces, 1), 1).astype(int)
        owner = np.repeat(np.arange(len(pieces)), pieces)
        step = np.arange(len(owner)) - np.repeat(np.cumsum(pieces) - pieces, pieces)
        angle = start[owner] + sweep[owner] * step / pieces[owner]
        finite = np.where(np.isfinite(radius), radius, 0.0)
        on_arc = centre[owner] + finite[owner, None] * np.stack((np.cos(angle), np.sin(angle)), axis=1)
        return np.where((step == 0)[:, None], self.vertices_um[owner], on_arc)


def arc_data(contour: Contour) -> tuple[Floats, Floats, Floats, Floats]:
    """Return centre (n, 2), radius, start angle and signed sweep (n,) of every edge.

    Lengths are micrometres, angles radians. Straight edges have radius infinity, centre and angles zero.
    """
    return arcs_between(contour.vertices_um, np.roll(contour.vertices_um, -1, axis=0), contour.bulges)


def arcs_between(start_um: Floats, end_um: Floats, bulges: Floats) -> tuple[Floats, Floats, Floats, Floats]:
    """Return what ``arc_data`` does for edges given by their ends, shape (n, 2), and bulges, shape (n,)."""
    a, d, b = start_um, end_um - start_um, bulges
    curved = b != 0.0
    safe = np.where(curved, b, 1.0)
    # centre = middle of the chord + normal * chord * (1 - b^2) / (4 b), left of the chord for b > 0
    offset = ((1.0 - safe**2) / (4.0 * safe))[:, None] * np.stack((-d[:, 1], d[:, 0]), axis=1)
    centre = np.where(curved[:, None], a + 0.5 * d + offset, 0.0)
    spoke = a - centre
    radius = np.where(curved, np.hypot(spoke[:, 0], spoke[:, 1]), np.inf)
    start = np.where(curved, np.arctan2(spoke[:, 1], spoke[:, 0]), 0.0)
    return centre, radius, start, 4.0 * np.arctan(b)


def arc_run(centre: Floats, radius: float, start: float, sweep: float) -> tuple[Floats, Floats]:
    """Return (vertices, bulges) of an arc without its last point, in steps of a quarter turn at most [um, rad]."""
    count = max(1, int(np.ceil(abs(sweep) / LARGEST_SWEEP - 1e-9)))
    angles = start + sweep / count * np.arange(count)
    points = centre + radius * np.stack((np.cos(angles), np.sin(angles)), axis=1)
    return points, np.full(count, np.tan(sweep / count / 4.0))


@dataclass(frozen=True)
class Outline:
    """The area of one channel: an outer ring and one hole per island.

    Attributes
    ----------
    outer : Contour
        Counter-clockwise ring.
    islands : tuple of Contour
        Clockwise rings, in the order of the reverse flow.
    """

    outer: Contour
    islands: tuple[Contour, ...] = ()

    @property
    def area_um2(self) -> float:
        """Exact area [um^2]."""
        return self.outer.area_um2 + sum(island.area_um2 for island in self.islands)

    @property
    def bounds_um(self) -> tuple[float, float, float, float]:
        """(x_min, y_min, x_max, y_max) [um]."""
        return self.outer.bounds_um

    @property
    def contours(self) -> tuple[Contour, ...]:
        """All rings, the outer one first."""
        return (self.outer, *self.islands)

    def placed(self, placement: Placement) -> Outline:
        """Return the area at another place."""
        outer, *islands = (ring.placed(placement) for ring in self.contours)
        return Outline(outer, tuple(islands))

    def scaled(self, factor: float) -> Outline:
        """Return the area enlarged about the origin."""
        outer, *islands = (ring.scaled(factor) for ring in self.contours)
        return Outline(outer, tuple(islands))
