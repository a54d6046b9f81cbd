"""Finding a free place for a rectangle among channels and other rectangles."""

from __future__ import annotations

from dataclasses import dataclass
from functools import cached_property
from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from collections.abc import Iterator, Sequence

    from core.chip.figures import Box
    from core.geometry.contour import Flags, Floats, Outline

_MOST_LOOKS = 800  # places at which walls are looked at before the search is given up
_RUN = 32  # chords whose common box is looked at first
_SAGITTA_UM = 5.0  # walls are looked at as chords; what chords may miss is added to the clearance


@dataclass(frozen=True, kw_only=True, eq=False)
class Obstacle:
    """A channel at its place.

    Attributes
    ----------
    outline : Outline
        Its area round its own origin.
    shift_um : tuple of float
        Where its origin lies [um].
    """

    outline: Outline
    shift_um: tuple[float, float]

    @cached_property
    def box_um(self) -> Box:
        """Its bounds [um]."""
        x0, y0, x1, y1 = self.outline.bounds_um
        dx, dy = self.shift_um
        return x0 + dx, y0 + dy, x1 + dx, y1 + dy

    @cached_property
    def edges_um(self) -> tuple[Floats, Floats]:
        """Start and end of every chord of its walls, each of shape (n, 2) [um]."""
        rings = [ring.chords(sagitta_um=_SAGITTA_UM) + np.array(self.shift_um) for ring in self.outline.contours]
        return np.concatenate(rings), np.concatenate([np.roll(ring, -1, axis=0) for ring in rings])

    @cached_property
    def _runs(self) -> Floats:
        """Boxes round runs of ``_RUN`` chords that follow one another, shape (m, 4) [um]."""
        start, end = self.edges_um
        first = np.arange(0, len(start), _RUN)
        low = np.minimum.reduceat(np.minimum(start, end), first, axis=0)
        return np.concatenate((low, np.maximum.reduceat(np.maximum(start, end), first, axis=0)), axis=1)

    def _edges_in(self, which: Flags) -> tuple[Floats, Floats]:
        """Return the chords of some runs."""
        start, end = self.edges_um
        chosen = np.repeat(which, _RUN)[: len(start)]
        return start[chosen], end[chosen]

    def is_clear_of(self, box_um: Box, clearance_um: float) -> bool:
        """Return whether a box keeps its distance; where it is a near thing, it does not."""
        margin = clearance_um + _SAGITTA_UM
        low, high = np.array(box_um[:2]) - margin, np.array(box_um[2:]) + margin
        runs = self._runs
        near = np.all((runs[:, :2] <= high) & (runs[:, 2:] >= low), axis=1)
        if near.any():
            start, end = self._edges_in(near)
            step = np.where(end == start, 1e-200, end - start)
            first, last = (
                (low - start) / step,
                (high - start) / step,
            )  # where the line of a chord passes the box's sides
            enter, leave = np.minimum(first, last).max(axis=1), np.maximum(first, last).min(axis=1)
            if np.any(np.maximum(enter, 0.0) <= np.minimum(leave, 1.0)):
                return False
        middle = 0.5 * (low + high)
        beside = (runs[:, 1] <= middle[1]) & (runs[:, 3] >= middle[1]) & (runs[:, 2] >= middle[0])
        return not _is_inside(middle, *self._edges_in(beside))


def _is_inside(point: Floats, start: Floats, end: Floats) -> bool:
    """Return whether a ray to the right crosses an odd number of edges."""
    crosses = (start[:, 1] > point[1]) != (end[:, 1] > point[1])
    a, b = start[crosses], end[crosses]
    at = a[:, 0] + (point[1] - a[:, 1]) / (b[:, 1] - a[:, 1]) * (b[:, 0] - a[:, 0])
    return bool(np.count_nonzero(at > point[0]) % 2)


def _overlapping(boxes: Floats, others: Floats) -> Flags:
    """Return for boxes of shape (n, 4) and others of shape (m, 4) which overlap, shape (n, m)."""
    a, b = boxes[:, None], others[None]
    hit: Flags = (a[..., 0] < b[..., 2]) & (b[..., 0] < a[..., 2]) & (a[..., 1] < b[..., 3]) & (b[..., 1] < a[..., 3])
    return hit


def free_places(
    places_um: Floats,
    box_um: Box,
    *,
    taken: Sequence[Box],
    obstacles: Sequence[Obstacle],
    within: Box,
    clearance_um: float,
) -> Iterator[tuple[float, float]]:
    """Yield the places at which a box is free, in the order given; after many looks at walls the search is given up.

    Parameters
    ----------
    places_um : array, shape (n, 2)
        Where the origin of the box may lie, the best first [um].
    box_um : tuple of float
        The box round its origin [um].
    taken : sequence of boxes
        What it must not overlap [um].
    obstacles : sequence of Obstacle
        Channels from which it keeps the clearance; measured on their walls, not on their bounds.
    within : tuple of float
        In which it must lie [um].
    clearance_um : float
        Distance from obstacles [um].

    Yields
    ------
    (x, y)
        A place of the origin [um].
    """
    boxes = np.asarray(box_um) + places_um[:, [0, 1, 0, 1]]
    slack = 1e-6
    fits = (boxes[:, :2] >= np.array(within[:2]) - slack).all(axis=1)
    fits &= (boxes[:, 2:] <= np.array(within[2:]) + slack).all(axis=1)
    if taken:
        fits &= ~_overlapping(boxes, np.array(taken)).any(axis=1)
    places_um, boxes = places_um[fits], boxes[fits]
    margin = clearance_um * np.array([-1.0, -1.0, 1.0, 1.0])
    near = _overlapping(boxes + margin, np.array([each.box_um for each in obstacles]).reshape(-1, 4))
    looks = 0
    for place, box, hits in zip(places_um.tolist(), boxes.tolist(), near, strict=True):
        is_free = True
        for number in np.flatnonzero(hits).tolist():
            looks += 1
            if not obstacles[number].is_clear_of(tuple(box), clearance_um):
                is_free = False
                break
        if is_free:
            yield place[0], place[1]
        if looks > _MOST_LOOKS:
            return
