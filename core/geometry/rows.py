"""Rows and bends: the parts of a channel's body, each at its place."""

from __future__ import annotations

from dataclasses import dataclass, replace
from itertools import pairwise
from math import atan2, ceil, cos, pi, sin, tan
from typing import TYPE_CHECKING

import numpy as np

from core.geometry.contour import LARGEST_SWEEP, Contour, Placement
from core.geometry.pads import LeadEnd, end_index, finished

if TYPE_CHECKING:
    from core.geometry.centreline import OpenEnd
    from core.geometry.contour import Floats
    from core.geometry.shape import ChannelShape


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Row:
    """One straight run of stages at its place.

    Attributes
    ----------
    shape : ChannelShape
        A usable shape, in its own frame.
    placement : Placement
        Where it stands.
    longer_um : tuple of float
        By how much the lead at its start (in the reverse flow) and the one at its far end are longer
        than in the shape [um].
    pad_radius_um : tuple of float
        Radius of the pads at its start and its far end [um]; 0 for none.
    """

    shape: ChannelShape
    placement: Placement
    longer_um: tuple[float, float] = (0.0, 0.0)
    pad_radius_um: tuple[float, float] = (0.0, 0.0)

    @property
    def start(self) -> LeadEnd:
        """The end where reverse flow enters."""
        return self._end(self.shape.centreline.forward_outlet, 0)

    @property
    def far(self) -> LeadEnd:
        """The end where reverse flow leaves."""
        return self._end(self.shape.centreline.forward_inlet, 1)

    def _end(self, end: OpenEnd, which: int) -> LeadEnd:
        corners = self.placement.points(end.section_um)
        return LeadEnd(
            drawn_um=corners[::-1] if self.placement.is_mirrored else corners,
            outward_rad=self.placement.heading(end.outward_heading_rad),
            longer_um=self.longer_um[which],
            pad_radius_um=self.pad_radius_um[which],
            fillet_um=self.shape.parameters.corner_radius_um,
        )

    def moved(self, move: Placement) -> Row:
        """Return the row after a turn and a shift."""
        return replace(self, placement=move.after(self.placement))

    def outer(self) -> Contour:
        """Return the ring round the row, with its ends finished."""
        outline = self.shape.outline
        assert outline is not None  # rows are made of usable shapes alone
        return finished(finished(outline.outer.placed(self.placement), self.start), self.far)

    def islands(self) -> tuple[Contour, ...]:
        """Return the rings round its islands, in the order of the reverse flow."""
        outline = self.shape.outline
        assert outline is not None
        return tuple(island.placed(self.placement) for island in outline.islands)

    def walls(self, *, is_start_open: bool, is_far_open: bool) -> tuple[Contour, ...]:
        """Return its outer walls as open runs: left out are ends at which a bend goes on.

        Parameters
        ----------
        is_start_open, is_far_open : bool
            Whether a bend goes on at the start and at the far end.

        Returns
        -------
        tuple of Contour
            Two runs (right wall with the reverse flow, left wall against it) where both ends go on, one run
            where one does, the whole ring where none does. The last vertex of a run is its end.
        """
        ring = self.outer()
        cuts = [
            end_index(ring, end.corners_um)
            for end, is_open in ((self.start, is_start_open), (self.far, is_far_open))
            if is_open
        ]
        if not cuts:
            return (ring,)
        return tuple(_run(ring, cut + 1, following) for cut, following in zip(cuts, cuts[::-1], strict=True))


def _run(ring: Contour, first: int, last: int) -> Contour:
    """Return the vertices from one index to another, both included, round the ring."""
    count = len(ring.bulges)
    at = (first + np.arange((last - first) % count + 1)) % count
    return Contour(ring.vertices_um[at], np.append(ring.bulges[at[:-1]], 0.0))


@dataclass(frozen=True, slots=True, kw_only=True)
class Bend:
    """A plain bend from the far end of a row to the start of the next.

    Attributes
    ----------
    radius_um : float
        Radius on its centre line [um].
    sweep_rad : float
        Signed sweep, followed with the reverse flow [rad].
    """

    radius_um: float
    sweep_rad: float

    @property
    def length_um(self) -> float:
        """Length on its centre line [um]."""
        return self.radius_um * abs(self.sweep_rad)

    def step(self, heading: float) -> Floats:
        """Return how far it leads from its start when it starts in a direction [rad -> um]."""
        side = 1.0 if self.sweep_rad > 0.0 else -1.0
        before, after = heading - side * pi / 2, heading + self.sweep_rad - side * pi / 2
        return self.radius_um * np.array([cos(after) - cos(before), sin(after) - sin(before)])

    def walls(self, start: LeadEnd, end: LeadEnd) -> tuple[Contour, Contour]:
        """Return its right wall (with the reverse flow) and left wall (against it) as open runs.

        Parameters
        ----------
        start : LeadEnd
            Far end of the row before.
        end : LeadEnd
            Start of the row after.
        """
        side = 1.0 if self.sweep_rad > 0.0 else -1.0
        centre = start.middle_um + side * self.radius_um * np.array([-start.outward[1], start.outward[0]])
        (right, left), (end_left, end_right) = start.corners_um, end.corners_um
        return _arc(centre, right, end_right, self.sweep_rad), _arc(centre, end_left, left, -self.sweep_rad)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Folding:
    """Rows at their places, in the order of the reverse flow, and the bends between them."""

    rows: tuple[Row, ...]
    bends: tuple[Bend, ...] = ()

    def moved(self, move: Placement) -> Folding:
        """Return everything after a turn and a shift."""
        return replace(self, rows=tuple(row.moved(move) for row in self.rows))

    @property
    def ends(self) -> tuple[LeadEnd, LeadEnd]:
        """The two open ends: where reverse flow enters, and where it leaves."""
        return self.rows[0].start, self.rows[-1].far

    @property
    def inner_leads_um(self) -> float:
        """Length of all leads at which bends go on [um]."""
        return sum(
            row.shape.parameters.lead_in_um
            + row.longer_um[1]
            + following.shape.parameters.lead_out_um
            + following.longer_um[0]
            for row, following in pairwise(self.rows)
        )

    def outer(self) -> Contour:
        """Return the ring round everything: out along the right walls, back along the left ones."""
        last = len(self.rows) - 1
        if last == 0:
            return self.rows[0].outer()
        walls = [row.walls(is_start_open=n > 0, is_far_open=n < last) for n, row in enumerate(self.rows)]
        bends = [
            bend.walls(row.far, following.start)
            for bend, (row, following) in zip(self.bends, pairwise(self.rows), strict=True)
        ]
        runs = [walls[0][0]]
        for number in range(1, last + 1):
            runs += [bends[number - 1][0], walls[number][0]]
        for number in range(last - 1, -1, -1):
            runs += [bends[number][1], *walls[number][1:]]
        return Contour.joined((run.vertices_um[:-1], run.bulges[:-1]) for run in runs)


def _arc(centre: Floats, start: Floats, end: Floats, sweep: float) -> Contour:
    count = max(1, ceil(abs(sweep) / LARGEST_SWEEP - 1e-9))
    spoke = start - centre
    angle = atan2(spoke[1], spoke[0]) + sweep * np.arange(1, count) / count
    between = centre + np.hypot(*spoke) * np.stack((np.cos(angle), np.sin(angle)), axis=1)
    return Contour(np.concatenate(([start], between, [end])), np.append(np.full(count, tan(sweep / count / 4.0)), 0.0))
