"""Where the rows of a folded channel stand, and how wide the bends between them must be.

Each further row runs antiparallel to the one before. A row is turned by half a turn, or mirrored, so
that loops keep their order: left and right in turn go on through the bend, and loops that are all on
one side of the channel stay on one side of the drawing.
"""

from __future__ import annotations

from dataclasses import replace
from functools import cached_property
from itertools import pairwise
from math import cos, pi, sin
from typing import TYPE_CHECKING

import numpy as np

from core.errors import GeometryError
from core.geometry.contour import Placement
from core.geometry.distances import nearest
from core.geometry.edges import Edges, boxes_apart_um
from core.geometry.rows import Bend, Folding, Row

if TYPE_CHECKING:
    from collections.abc import Sequence

    from core.geometry.contour import Floats, Indices
    from core.geometry.shape import ChannelShape

_TRIALS = 200  # pairs of parts measured
_END_STAGES = 6  # stages at each end of a row that are looked at for its neighbours
_CLOSE_ENOUGH = 0.02  # rows this part of the wall farther apart than needed are left so


def spaced(shapes: Sequence[ChannelShape], *, wall_um: float, pad_radius_um: float) -> Folding:
    """Return rows at their places with the smallest bends that keep a wall between all parts.

    Parameters
    ----------
    shapes : sequence of ChannelShape
        Usable shapes of the rows, in the order of the reverse flow.
    wall_um : float
        Least solid between rows, bends and pads that are not joined [um].
    pad_radius_um : float
        Radius of the pads at the two open ends [um]; 0 for none.

    Returns
    -------
    Folding
        The first row as its shape stands.

    Raises
    ------
    GeometryError
        If no radius keeps the rows apart, or a pad is no wider than its lead.
    """
    layout = _Layout(shapes, wall_um=wall_um, pad_radius_um=pad_radius_um)
    return layout.folding(layout.smallest_radius_um() if len(shapes) > 1 else 0.0)


class _Layout:
    """Everything about the rows but the radius of the bends."""

    def __init__(self, shapes: Sequence[ChannelShape], *, wall_um: float, pad_radius_um: float) -> None:
        self.shapes = shapes
        self.wall_um = wall_um
        self.width_um = shapes[0].parameters.channel_width_um
        self.least_radius_um = 0.5 * (self.width_um + wall_um)
        mirrored = [False]
        for shape in shapes[:-1]:
            is_turned_over = shape.parameters.sides == "same" or shape.parameters.stages % 2 == 1
            mirrored.append(mirrored[-1] != (is_turned_over and shape.parameters.stages > 0))
        last = len(shapes) - 1
        self.rows = [
            Row(
                shape=shape,
                placement=Placement(angle=pi if number % 2 else 0.0, is_mirrored=mirrored[number]),
                pad_radius_um=(pad_radius_um if number == 0 else 0.0, pad_radius_um if number == last else 0.0),
            )
            for number, shape in enumerate(shapes)
        ]
        self.rows = [
            replace(row, longer_um=(self._longer(row, 0) if n else 0.0, self._longer(row, 1) if n < last else 0.0))
            for n, row in enumerate(self.rows)
        ]
        self.sweeps = self._sweeps()

    def _longer(self, row: Row, which: int) -> float:
        """Return by how much a lead must be longer so that a bend at its end is clear of the row's own loops."""
        outline = row.shape.outline
        if outline is None or row.shape.parameters.stages == 0:
            return 0.0
        line = row.shape.centreline
        end = (line.forward_outlet, line.forward_inlet)[which]
        outward = np.array([cos(end.outward_heading_rad), sin(end.outward_heading_rad)])
        edges = Edges.of([outline.outer])
        at = np.hypot(*(edges.start_um - end.section_um[0]).T).argmin()
        rest = np.delete(edges.start_um, [at, (at + 1) % len(edges)], axis=0)
        heading = np.full(len(edges), end.outward_heading_rad)
        bellies = (edges.centre_um @ outward + edges.radius_um)[edges.on_arc(heading)]
        reach = max(float((rest @ outward).max()), float(bellies.max(initial=-np.inf)))
        return reach + self.wall_um - float(end.point_um @ outward)

    def _sweeps(self) -> list[float]:
        """Return the sweep of each bend; the first goes the shorter way, the others in turn."""
        found: list[float] = []
        for row, following in pairwise(self.rows):
            turn = (following.start.outward_rad + pi - row.far.outward_rad) % (2.0 * pi)
            if not found:
                found.append(turn if turn < pi - 1e-9 else turn - 2.0 * pi)
            else:
                found.append(turn if found[-1] < 0.0 else turn - 2.0 * pi)
        return found

    def folding(self, radius_um: float) -> Folding:
        """Return all rows at their places."""
        placed = [self.rows[0]]
        bends = [Bend(radius_um=radius_um, sweep_rad=sweep) for sweep in self.sweeps]
        for row, bend in zip(self.rows[1:], bends, strict=True):
            far = placed[-1].far
            start = far.middle_um + bend.step(far.outward_rad)
            dx, dy = start - row.start.middle_um
            placed.append(row.moved(Placement(dx_um=float(dx), dy_um=float(dy))))
        return Folding(rows=tuple(placed), bends=tuple(bends))

    def smallest_radius_um(self) -> float:
        """Return a radius that keeps all parts apart, and is hardly larger than needed.

        A unit of radius moves a part by two units at most for every bend in between, and distances change
        by no more than parts move. So each measured pair tells a radius down to which it stays clear; the
        pair with the largest is measured again from there.
        """
        i, j, rate = self._pairs
        top = self.first_radius_um()
        safe = self._safe_by_boxes(top)
        for _ in range(_TRIALS):
            pair = int(np.argmax(safe))
            radius = min(top, float(safe[pair]))
            if radius <= self.least_radius_um:
                return self.least_radius_um
            away = nearest(self._part(i[pair], radius), self._part(j[pair], radius)).um
            safe[pair] = radius - (away - self.wall_um) / rate[pair]
            if safe[pair] > radius:
                top = max(float(safe[pair]), 1.2 * top)
                safe = self._safe_by_boxes(top)
            elif radius - safe[pair] < _CLOSE_ENOUGH * max(self.wall_um, self.width_um) and radius >= safe.max():
                return radius
        raise GeometryError("no bend keeps the rows apart; use fewer rows or longer leads")

    def _safe_by_boxes(self, radius_um: float) -> Floats:
        """Return the radius down to which each pair stays clear, by the boxes at a radius; infinite if not told."""
        i, j, rate = self._pairs
        boxes = [self._part(part, radius_um).bounds_um() for part in range(2 * len(self.rows) - 1)]
        low, high = np.array(boxes).transpose(1, 0, 2)
        safe = radius_um - (boxes_apart_um((low, high), (low, high), i, j) - self.wall_um) / rate
        return np.where(safe <= radius_um, safe, np.inf)

    def first_radius_um(self) -> float:
        """Return a radius at which the boxes of neighbouring rows are the wall apart."""
        radius = self.least_radius_um
        boxes = [self._part(2 * number, 0.0).bounds_um() for number in range(len(self.rows))]
        for (low, high), (other_low, other_high), rise in zip(boxes, boxes[1:], self._steps[:, 1], strict=False):
            gap = other_low[1] - high[1] if rise > 0.0 else low[1] - other_high[1]
            if abs(rise) > 1e-3:
                radius = max(radius, float((self.wall_um - gap) / abs(rise)))
        return radius

    @cached_property
    def _row_edges(self) -> list[Edges]:
        """The outer walls of the rows near their ends, without the shift that places them.

        Stages repeat, so that rows meet in the middle as they do near the ends.
        """
        found, last = [], len(self.rows) - 1
        for number, row in enumerate(self.rows):
            edges = Edges.of(row.walls(is_start_open=number > 0, is_far_open=number < last), is_closed=False)
            stages = row.shape.centreline.stages
            if len(stages) > 2 * _END_STAGES + 2:
                inner = [row.placement.points(stages[k].fork_um)[0] for k in (_END_STAGES, -_END_STAGES)]
                is_near_end = (edges.start_um[:, 0] < min(inner)) | (edges.start_um[:, 0] > max(inner))
                edges = edges.take(is_near_end)
            found.append(edges.shifted(-_place(row)))
        return found

    @cached_property
    def _steps(self) -> Floats:
        """How far each bend of radius 1 leads, shape (bends, 2)."""
        bends = [Bend(radius_um=1.0, sweep_rad=sweep) for sweep in self.sweeps]
        return np.array([bend.step(row.far.outward_rad) for bend, row in zip(bends, self.rows, strict=False)])

    @cached_property
    def _unbent(self) -> tuple[tuple[Row, ...], Floats]:
        """The rows where bends of no radius put them, and how far each moves for a unit of radius, shape (rows, 2)."""
        travel = np.concatenate((np.zeros((1, 2)), np.cumsum(self._steps, axis=0)))
        return self.folding(0.0).rows, travel

    def _part(self, number: int, radius_um: float) -> Edges:
        """Return the outer walls of a part; rows have even numbers, the bends after them odd ones."""
        rows, travel = self._unbent
        before = number // 2
        if number % 2 == 0:
            return self._row_edges[before].shifted(_place(rows[before]) + radius_um * travel[before])
        far, start = (
            replace(end, drawn_um=end.drawn_um + radius_um * travel[row])
            for end, row in ((rows[before].far, before), (rows[before + 1].start, before + 1))
        )
        bend = Bend(radius_um=radius_um, sweep_rad=self.sweeps[before])
        return Edges.of(bend.walls(far, start), is_closed=False)

    @cached_property
    def _pairs(self) -> tuple[Indices, Indices, Floats]:
        """Pairs of parts that are not joined, or are neighbouring rows, and how fast they move apart at most.

        Of pairs that lie to one another alike, the first.
        """
        found: dict[object, tuple[int, int, float]] = {}
        last = len(self.rows) - 1
        for i in range(2 * last + 1):
            for j in range(i + 2, 2 * last + 1):
                first, final = i // 2, (j + 1) // 2
                between = tuple(id(row.shape) for row in self.rows[first : final + 1])
                key = (i % 2, j - i, between, i == 0, j == 2 * last)
                found.setdefault(key, (i, j, 2.0 * (final - first)))
        i_all, j_all, rate = zip(*found.values(), strict=True)
        return np.array(i_all), np.array(j_all), np.array(rate)


def _place(row: Row) -> Floats:
    return np.array([row.placement.dx_um, row.placement.dy_um])
