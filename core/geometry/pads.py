"""Round pads at open ends: the walls of the lead meet the circle at the corners of the end.

The middle of the pad lies beyond the end, so that the lead keeps its length. Where lead and pad meet,
two inner corners arise; they get the same radius as every other inner corner of the channel.
"""

from __future__ import annotations

from dataclasses import dataclass
from math import asin, cos, hypot, pi, sin, sqrt
from typing import TYPE_CHECKING

import numpy as np

from core.errors import GeometryError
from core.geometry.contour import Contour, arc_run

if TYPE_CHECKING:
    from core.geometry.contour import Floats

# Corners of an end as the rings have them may be this far from where the centre line says [um].
_CORNER_UM = 0.01


@dataclass(frozen=True, slots=True, kw_only=True)
class Pad:
    """The round widening at an open end of a channel; a port stands in its middle.

    Attributes
    ----------
    centre_um : array, shape (2,)
        Middle [um].
    radius_um : float
        Radius [um].
    """

    centre_um: Floats
    radius_um: float


@dataclass(frozen=True, slots=True, kw_only=True)
class LeadEnd:
    """How a lead ends: cut square somewhere along its line, or widened to a pad.

    Attributes
    ----------
    drawn_um : array, shape (2, 2)
        Corners of the end as the shape has it, right then left seen looking outwards [um].
    outward_rad : float
        Direction out of the lead [rad].
    longer_um : float
        By how much the lead is longer than the shape has it; negative when shorter [um].
    pad_radius_um : float
        Radius of the pad [um]; 0 for a square end.
    fillet_um : float
        Radius of the two inner corners between lead and pad [um].
    """

    drawn_um: Floats
    outward_rad: float
    longer_um: float = 0.0
    pad_radius_um: float = 0.0
    fillet_um: float = 0.0

    @property
    def outward(self) -> Floats:
        """Unit vector out of the lead."""
        return np.array([cos(self.outward_rad), sin(self.outward_rad)])

    @property
    def width_um(self) -> float:
        """Width of the lead [um]."""
        return hypot(*(self.drawn_um[1] - self.drawn_um[0]))

    @property
    def corners_um(self) -> Floats:
        """Corners where the lead ends, right then left seen looking outwards, shape (2, 2) [um]."""
        return self.drawn_um + self.longer_um * self.outward

    @property
    def middle_um(self) -> Floats:
        """Middle of the end [um]."""
        middle: Floats = self.corners_um.mean(axis=0)
        return middle

    @property
    def pad(self) -> Pad | None:
        """The pad, if there is one."""
        if self.pad_radius_um == 0.0:
            return None
        reach = pad_reach_um(self.pad_radius_um, width_um=self.width_um)
        return Pad(centre_um=self.middle_um + reach * self.outward, radius_um=self.pad_radius_um)

    def run(self) -> tuple[Floats, Floats]:
        """Return the wall round the end as (vertices, bulges), from the right wall to the left one."""
        pad = self.pad
        if pad is None:
            return self.corners_um, np.zeros(2)
        half, f = 0.5 * self.width_um, self.fillet_um
        lean = asin((half + f) / (pad.radius_um + f))
        points, bulges = arc_run(pad.centre_um, pad.radius_um, self.outward_rad - pi + lean, 2.0 * (pi - lean))
        last = pad.centre_um + pad.radius_um * _unit(self.outward_rad + pi - lean)
        if f == 0.0:
            # the corners of the lead themselves, so that nothing is lost to rounding
            ends = self.corners_um
            return np.concatenate((ends[:1], points[1:], ends[1:])), np.append(bulges, 0.0)
        back = sqrt((pad.radius_um + f) ** 2 - (half + f) ** 2)
        foot = pad.centre_um - back * self.outward
        across = half * _unit(self.outward_rad + pi / 2)
        curl = -np.tan((pi / 2 - lean) / 4.0)
        vertices = np.concatenate(([foot - across], points, [last], [foot + across]))
        return vertices, np.concatenate(([curl], bulges, [curl], [0.0]))


def pad_reach_um(radius_um: float, *, width_um: float) -> float:
    """Return how far beyond the end of a lead the middle of its pad lies [um].

    Raises
    ------
    GeometryError
        If the pad is no wider than the lead.
    """
    if radius_um <= 0.5 * width_um:
        raise GeometryError(
            f"pad radius is {radius_um:g} um, and the lead is {width_um:g} um wide; a pad must be wider than its lead: "
            "make the port or pad_margin_um larger, or lower channel_width_um"
        )
    return sqrt(radius_um**2 - 0.25 * width_um**2)


def finished(contour: Contour, end: LeadEnd) -> Contour:
    """Return a ring with the square end of a lead replaced by what stands there.

    Parameters
    ----------
    contour : Contour
        Counter-clockwise ring that has the end as the shape drew it.
    end : LeadEnd
        Which end, and how it is finished.

    Raises
    ------
    GeometryError
        If the lead has no straight walls where the end would start.
    """
    first = end_index(contour, end.drawn_um)
    vertices = np.roll(contour.vertices_um, -first - 2, axis=0)
    bulges = np.roll(contour.bulges, -first - 2)
    run, run_bulges = end.run()
    room = min(float(np.dot(run[k] - vertices[at], end.outward)) for k, at in ((0, -3), (-1, 0)))
    if room <= 0.0:
        raise GeometryError(
            f"a lead is {max(-room, 0.1):.4g} um too short for the rounded corners at its end; "
            "raise lead_in_um and lead_out_um, or lower corner_radius_um"
        )
    return Contour(np.concatenate((vertices[:-2], run)), np.concatenate((bulges[:-2], run_bulges)))


def end_index(contour: Contour, corners_um: Floats) -> int:
    """Return the index of the vertex at which the edge across an open end starts."""
    away = np.hypot(*(contour.vertices_um - corners_um[0]).T)
    first = int(np.argmin(away))
    second = contour.vertices_um[(first + 1) % len(away)]
    if away[first] > _CORNER_UM or hypot(*(second - corners_um[1])) > _CORNER_UM:
        raise GeometryError("an open end is not where the centre line ends; raise lead_in_um and lead_out_um")
    return first


def _unit(angle: float) -> Floats:
    return np.array([cos(angle), sin(angle)])
