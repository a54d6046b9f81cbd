"""The largest circle that fits into a ring: how thick an island is that has no neck."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from core.geometry.edges import Edges

if TYPE_CHECKING:
    from core.geometry.contour import Contour, Flags, Floats

# The radius is found to this [um].
NEAR_UM = 5e-5
_FIRST_CELLS = 6  # along each side of the bounds
_MOST_CELLS = 4096  # kept while searching; only stretches of equal thickness could need more


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Incircle:
    """A circle inside a ring, and one of the points where it touches the wall."""

    centre_um: Floats
    radius_um: float
    touch_um: Floats

    @property
    def diameter_um(self) -> Floats:
        """The touching point and the point opposite to it, shape (2, 2) [um]."""
        return np.array([self.touch_um, 2.0 * self.centre_um - self.touch_um])


def incircle(ring: Contour, *, at_most_um: float = np.inf) -> Incircle | None:
    """Return the largest circle inside a ring if its radius is less than a limit.

    Parameters
    ----------
    ring : Contour
        Closed ring, walked either way.
    at_most_um : float
        Circles of this radius or more are of no interest [um].

    Returns
    -------
    Incircle or None
        Radius too small by 0.05 nm at most; None where a circle of the limiting radius fits.
    """
    edges = Edges.of([ring])
    x0, y0, x1, y1 = ring.bounds_um
    size = max(x1 - x0, y1 - y0)
    outline = ring.chords(sagitta_um=1e-4 * size)
    half = 0.5 * size / _FIRST_CELLS
    steps = (np.arange(_FIRST_CELLS) * 2.0 + 1.0) * half
    cells = np.stack(np.meshgrid(x0 + steps, y0 + steps), axis=-1).reshape(-1, 2)
    best, centre = -np.inf, cells[0]
    while len(cells) and len(cells) <= _MOST_CELLS:
        depth = _depth(edges, outline, cells)
        at = int(np.argmax(depth))
        if depth[at] > best:
            best, centre = float(depth[at]), cells[at]
        if best >= at_most_um:
            return None
        # circles about other points of a cell are larger by half a diagonal at most
        kept = cells[depth + np.sqrt(2.0) * half > best + NEAR_UM]
        half *= 0.5
        quarters = half * np.array([[-1.0, -1.0], [1.0, -1.0], [-1.0, 1.0], [1.0, 1.0]])
        cells = (kept[:, None] + quarters[None]).reshape(-1, 2)
    touches = edges.nearest(centre)
    touch = touches[np.argmin(np.hypot(*(touches - centre).T))]
    return Incircle(centre_um=centre, radius_um=best, touch_um=touch)


def has_inside(ring: Contour, points_um: Floats, *, sagitta_um: float) -> Flags:
    """Return which points lie inside a ring.

    Parameters
    ----------
    ring : Contour
        Closed ring.
    points_um : array, shape (n, 2)
        Points [um].
    sagitta_um : float
        Points farther from the wall than this are judged rightly [um].
    """
    return _inside(ring.chords(sagitta_um=sagitta_um), points_um)


def _inside(corners: Floats, points: Floats) -> Flags:
    """Even-odd rule: count the edges that a ray to the right crosses."""
    a, b = corners, np.roll(corners, -1, axis=0)
    y = points[:, 1, None]
    spans = (a[:, 1] > y) != (b[:, 1] > y)
    rise = np.where(b[:, 1] == a[:, 1], 1.0, b[:, 1] - a[:, 1])
    x = a[:, 0] + (y - a[:, 1]) / rise * (b[:, 0] - a[:, 0])
    inside: Flags = np.count_nonzero(spans & (points[:, 0, None] < x), axis=1) % 2 == 1
    return inside


def _depth(edges: Edges, outline: Floats, points: Floats) -> Floats:
    """Return the distance from the wall, negative outside."""
    away = edges.distance(points[:, None]).min(axis=1)
    return np.where(_inside(outline, points), away, -away)
