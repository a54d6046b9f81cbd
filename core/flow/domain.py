"""The region of liquid to be solved: outline, depth, open ends and measuring sections."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from core.errors import SolveError

_ON_LINE = 1e-6  # distance from an open end, in channel widths, that counts as lying on it


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class FlowDomain:
    """Plane outline and depth of a channel, with where liquid enters and leaves.

    Attributes
    ----------
    outer_um : ndarray, shape (n, 2)
        Outer ring [um], anticlockwise, arcs as chords, first point not repeated.
    islands_um : tuple of ndarray, each of shape (m, 2)
        Rings of solid inside [um], either sense.
    depth_um : float
        Depth [um].
    channel_width_um : float
        Width of leads and bypass [um]: the measure for mesh sizes and the Reynolds number.
    forward_inlet_um, forward_outlet_um : ndarray, shape (2, 2)
        End points of the open end where forward flow enters, and where it leaves [um]. Reverse
        flow enters at ``forward_outlet_um``. Both ends are straight and as wide as the channel.
    sections : tuple of (ndarray, ndarray)
        One entry per stage in the order of reverse flow: chords of shape (2, 2) straight across the
        bypass and across the loop [um], for flow shares.

    Raises
    ------
    SolveError
        If an array has a wrong shape, a length is not positive, or an open end is not on the outline.
    """

    outer_um: np.ndarray
    islands_um: tuple[np.ndarray, ...]
    depth_um: float
    channel_width_um: float
    forward_inlet_um: np.ndarray
    forward_outlet_um: np.ndarray
    sections: tuple[tuple[np.ndarray, np.ndarray], ...] = ()

    def __post_init__(self) -> None:
        """Check shapes and signs once, so that the solve need not."""
        put = object.__setattr__
        put(self, "outer_um", _ring("outer_um", self.outer_um, anticlockwise=True))
        islands = tuple(_ring("islands_um", ring, anticlockwise=False) for ring in self.islands_um)
        put(self, "islands_um", islands)
        put(self, "forward_inlet_um", _chord("forward_inlet_um", self.forward_inlet_um))
        put(self, "forward_outlet_um", _chord("forward_outlet_um", self.forward_outlet_um))
        pairs = tuple((_chord("sections", a), _chord("sections", b)) for a, b in self.sections)
        put(self, "sections", pairs)
        for name in ("depth_um", "channel_width_um"):
            if not 0 < getattr(self, name) < np.inf:
                raise SolveError(f"{name} is {getattr(self, name)}; it must be positive and finite")
        for name in ("forward_inlet_um", "forward_outlet_um"):
            if not self._edges_on(getattr(self, name)).any():
                raise SolveError(f"{name} is not an edge of outer_um; an open end must be cut square")

    @property
    def depth_to_width(self) -> float:
        """Depth over channel width [-]."""
        return self.depth_um / self.channel_width_um

    @property
    def stages(self) -> int:
        """Number of stages that have measuring sections."""
        return len(self.sections)

    def rings(self) -> list[np.ndarray]:
        """Return all rings in channel widths with liquid to the left, outer ring first."""
        return [ring / self.channel_width_um for ring in (self.outer_um, *self.islands_um)]

    def _edges_on(self, chord: np.ndarray) -> np.ndarray:
        """Return which edges of the outer ring lie on a chord; shape (n,)."""
        return edges_on_chord(self.outer_um, chord, _ON_LINE * self.channel_width_um)


def edges_on_chord(ring: np.ndarray, chord: np.ndarray, within: float) -> np.ndarray:
    """Return which edges of a ring lie on a straight chord.

    Parameters
    ----------
    ring : ndarray, shape (n, 2)
        Closed ring; edge i runs from point i to point i + 1.
    chord : ndarray, shape (2, 2)
        End points.
    within : float
        Largest distance that counts as on the chord, same unit as the points.

    Returns
    -------
    ndarray of bool, shape (n,)
    """
    along = chord[1] - chord[0]
    length = np.hypot(*along)
    along = along / length
    offset = ring - chord[0]
    across = np.abs(offset[:, 0] * along[1] - offset[:, 1] * along[0])
    position = offset @ along
    near = (across <= within) & (position >= -within) & (position <= length + within)
    return near & np.roll(near, -1)


def _ring(name: str, points: np.ndarray, *, anticlockwise: bool) -> np.ndarray:
    """Return a read-only ring with the sense asked for."""
    ring = np.array(points, dtype=float)
    if ring.ndim != 2 or ring.shape[1] != 2 or len(ring) < 3 or not np.isfinite(ring).all():
        raise SolveError(f"{name} has shape {ring.shape}; a ring needs at least three finite (x, y) points")
    if np.array_equal(ring[0], ring[-1]):
        ring = ring[:-1]
    following = np.roll(ring, -1, axis=0)
    twice_area = np.sum(ring[:, 0] * following[:, 1] - ring[:, 1] * following[:, 0])
    if (twice_area > 0) != anticlockwise:
        ring = ring[::-1].copy()
    ring.flags.writeable = False
    return ring


def _chord(name: str, points: np.ndarray) -> np.ndarray:
    """Return a read-only pair of distinct points."""
    chord = np.array(points, dtype=float)
    if chord.shape != (2, 2) or not np.isfinite(chord).all() or np.array_equal(chord[0], chord[1]):
        raise SolveError(f"{name} is {chord.tolist()}; it needs two different (x, y) points")
    chord.flags.writeable = False
    return chord
