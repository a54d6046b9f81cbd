"""Values of a solved flow at any place, as a raster of the view, and as streamlines."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from core.flow.result import FlowField

    Array = np.ndarray

_EDGE = 1e-9  # a place on the side of a triangle belongs to it
_STEP_CELLS = 0.7  # length of a step along a streamline, in cells of its raster
_MOST_STEPS = 6000
_STILL_SHARE = 1e-3  # of the largest speed, below which a streamline ends


@dataclass(frozen=True)
class FieldMap:
    """Triangles of a field made ready for looking things up.

    Attributes
    ----------
    field : FlowField
        One direction of a solved flow.
    """

    field: FlowField

    @cached_property
    def _corners(self) -> tuple[Array, Array]:
        corners = self.field.points_um[self.field.triangles]
        first, second, third = corners[:, 0], corners[:, 1], corners[:, 2]
        turned = _cross(second - first, third - first) < 0.0
        order = self.field.triangles.copy()
        order[turned, 1], order[turned, 2] = self.field.triangles[turned, 2], self.field.triangles[turned, 1]
        return self.field.points_um[order], order

    @cached_property
    def bounds_um(self) -> tuple[float, float, float, float]:
        """x_min, y_min, x_max, y_max [um]."""
        low, high = self.field.points_um.min(axis=0), self.field.points_um.max(axis=0)
        return float(low[0]), float(low[1]), float(high[0]), float(high[1])

    def values(self, quantity: str, height_share: float) -> Array:
        """Return speed [m/s] or pressure [Pa] at the nodes, at one height; shape (n,).

        Parameters
        ----------
        quantity : str
            'speed' or 'pressure'.
        height_share : float
            0 at the floor, 0.5 at mid-depth, 1 at the roof.
        """
        if quantity == "pressure":
            return self.field.pressure_pa(height_share)
        return np.hypot(*self.field.velocity_m_s(height_share).T)

    def at(self, values: Array, x_um: float, y_um: float) -> float | None:
        """Return a nodal value at a place; None outside the liquid.

        Parameters
        ----------
        values : ndarray, shape (n,)
            At the nodes of the field.
        x_um, y_um : float
            Place [um].
        """
        corners, order = self._corners
        place = np.array([x_um, y_um])
        a, b, c = corners[:, 0], corners[:, 1], corners[:, 2]
        whole = _cross(b - a, c - a)
        shares = np.stack((_cross(c - b, place - b), _cross(a - c, place - c), _cross(b - a, place - a))) / whole
        best = int(np.argmax(shares.min(axis=0)))
        if shares[:, best].min() < -_EDGE:
            return None
        return float(shares[:, best] @ values[order[best]])

    def raster(
        self, values: Array, *, left_um: float, top_um: float, um_per_px: float, width_px: int, height_px: int
    ) -> Array:
        """Return nodal values on the pixels of a view.

        Parameters
        ----------
        values : ndarray, shape (m, n)
            At the nodes of the field.
        left_um, top_um : float
            Upper left corner of the view; y points upwards [um].
        um_per_px : float
            Length of a pixel [um].
        width_px, height_px : int
            Size of the view.

        Returns
        -------
        ndarray, shape (m, height_px, width_px)
            Value in the middle of each pixel; NaN outside the liquid.
        """
        corners, order = self._corners
        px = np.stack(((corners[..., 0] - left_um), (top_um - corners[..., 1])), axis=-1) / um_per_px - 0.5
        low = np.ceil(px.min(axis=1) - 1e-6).astype(int)
        high = np.floor(px.max(axis=1) + 1e-6).astype(int)
        low, high = np.maximum(low, 0), np.minimum(high, [width_px - 1, height_px - 1])
        seen = np.flatnonzero((high >= low).all(axis=1))
        picture = np.full((len(values), height_px * width_px), np.nan, dtype=np.float32)
        for part in np.array_split(seen, max(1, len(seen) // 20000)):
            _paint(picture, width_px, px[part], low[part], high[part], values[:, order[part]])
        return picture.reshape(len(values), height_px, width_px)

    def streamlines(self, velocity: Array, seeds_um: Array, *, cell_um: float) -> list[Array]:
        """Return lines along the in-plane velocity through given places.

        Parameters
        ----------
        velocity : ndarray, shape (n, 2)
            At the nodes of the field.
        seeds_um : ndarray, shape (s, 2)
            Places the lines go through [um].
        cell_um : float
            Cell of the raster on which the lines are followed [um]; a twentieth of a channel width is fine.

        Returns
        -------
        list of ndarray, each of shape (k, 2)
            In the sense of the flow [um]; lines that meet no liquid are left out.
        """
        x_min, y_min, x_max, y_max = self.bounds_um
        size = (int((x_max - x_min) / cell_um) + 3, int((y_max - y_min) / cell_um) + 3)
        left, top = x_min - cell_um, y_max + cell_um
        grid = self.raster(velocity.T, left_um=left, top_um=top, um_per_px=cell_um, width_px=size[0], height_px=size[1])
        walk = _Walk(np.nan_to_num(grid), left, top, cell_um)
        back, ahead = walk.from_seeds(seeds_um, -1.0), walk.from_seeds(seeds_um, 1.0)
        lines = [np.concatenate((first[::-1], second[1:])) for first, second in zip(back, ahead, strict=True)]
        return [line for line in lines if len(line) > 2]


class _Walk:
    """Follows lines on a raster of velocities, all at once."""

    def __init__(self, grid: Array, left_um: float, top_um: float, cell_um: float) -> None:
        self._grid, self._left, self._top, self._cell = grid, left_um, top_um, cell_um
        self._still = _STILL_SHARE * float(np.hypot(*grid).max())

    def from_seeds(self, seeds_um: Array, sign: float) -> list[Array]:
        places = np.asarray(seeds_um, dtype=float).copy()
        runs, alive, step = [places.copy()], np.ones(len(places), dtype=bool), sign * _STEP_CELLS * self._cell
        lengths = np.ones(len(places), dtype=int)
        for _ in range(_MOST_STEPS):
            half = places + 0.5 * step * self._heading(places)[0]
            heading, speed = self._heading(half)
            alive &= speed > self._still
            if not alive.any():
                break
            places = np.where(alive[:, None], places + step * heading, places)
            lengths += alive
            runs.append(places.copy())
        track = np.stack(runs, axis=1)
        return [line[:length] for line, length in zip(track, lengths, strict=True)]

    def _heading(self, places: Array) -> tuple[Array, Array]:
        """Return unit vectors (s, 2) and speeds (s,) at places, interpolated between cells."""
        column = (places[:, 0] - self._left) / self._cell - 0.5
        row = (self._top - places[:, 1]) / self._cell - 0.5
        height, width = self._grid.shape[1:]
        column, row = np.clip(column, 0, width - 1.001), np.clip(row, 0, height - 1.001)
        i, j = row.astype(int), column.astype(int)
        v, u = row - i, column - j
        g = self._grid
        upper = g[:, i, j] * (1 - u) + g[:, i, j + 1] * u
        lower = g[:, i + 1, j] * (1 - u) + g[:, i + 1, j + 1] * u
        vector = (upper * (1 - v) + lower * v).T
        speed = np.hypot(*vector.T)
        return vector / np.maximum(speed, 1e-300)[:, None], speed


def round_levels(low: float, high: float, *, most: int = 12) -> Array:
    """Return round values that divide a range, its ends included, shape (k,) with k at most ``most`` + 2.

    Examples
    --------
    >>> round_levels(0.0, 0.93).tolist()
    [0.0, 0.1, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.0]
    """
    span = max(high - low, 1e-12 * max(abs(low), abs(high)), 1e-300)
    decade = 10.0 ** np.floor(np.log10(span / most))
    step = next(s * decade for s in (1.0, 2.0, 5.0, 10.0) if s * decade * most >= span * (1.0 - 1e-9))
    return np.arange(np.floor(low / step + 1e-9), np.ceil(high / step - 1e-9) + 1) * step


def _cross(first: Array, second: Array) -> Array:
    return first[..., 0] * second[..., 1] - first[..., 1] * second[..., 0]


def _paint(picture: Array, width_px: int, px: Array, low: Array, high: Array, values: Array) -> None:
    """Write triangles into a flat picture: every pixel of every box is tried against its triangle."""
    spans = high - low + 1
    counts = spans[:, 0] * spans[:, 1]
    owner = np.repeat(np.arange(len(px)), counts)
    number = np.arange(len(owner)) - np.repeat(np.cumsum(counts) - counts, counts)
    x = low[owner, 0] + number % spans[owner, 0]
    y = low[owner, 1] + number // spans[owner, 0]
    place = np.stack((x, y), axis=-1)
    a, b, c = px[owner, 0], px[owner, 1], px[owner, 2]
    whole = _cross(b - a, c - a)
    first, second = _cross(c - b, place - b) / whole, _cross(a - c, place - c) / whole
    third = 1.0 - first - second
    inside = (first >= -1e-6) & (second >= -1e-6) & (third >= -1e-6)
    owner, target = owner[inside], y[inside] * width_px + x[inside]
    shares = np.stack((first[inside], second[inside], third[inside]))
    picture[:, target] = np.einsum("kp,mpk->mp", shares, values[:, owner, :])
