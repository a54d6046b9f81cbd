"""Centre lines of a channel: straight lines and arcs, in the order of the reverse flow.

At a fork the bypass's new heading counts as 0. The incoming heading was ``run_bend_deg`` to the
loop's side, the leg leaves at ``loop_angle_deg`` to the same side. The leg is straight; the turn
bends back towards the bypass; the return is straight and meets the bypass at the mouth. The
length of the leg follows from closing on the bypass.
"""

from __future__ import annotations

from dataclasses import dataclass
from enum import StrEnum
from math import cos, hypot, pi, radians, sin, tan
from typing import TYPE_CHECKING

import numpy as np

from core.geometry.contour import Placement
from core.geometry.measures import stage_measures

if TYPE_CHECKING:
    from core.geometry.contour import Floats
    from core.parameters import ChannelParameters


# Straights below one nanometre are no straights: no mask can hold them.
SHORTEST_UM = 1e-3


class Part(StrEnum):
    """Which part of the chain a centre line belongs to."""

    LEAD_OUT = "lead_out"
    BYPASS = "bypass"
    GAP = "gap"
    LEG = "leg"
    TURN = "turn"
    RETURN = "return"
    LEAD_IN = "lead_in"


@dataclass(frozen=True, slots=True, kw_only=True)
class Stroke:
    """One straight line or arc of the centre line, walked with the reverse flow.

    Attributes
    ----------
    stage : int
        Stage number from 0 in the order of the reverse flow; -1 for the lead before the first.
    part : Part
        What it is.
    width_um : float
        Width of the channel drawn along it [um].
    start_um, end_um : array, shape (2,)
        Ends [um].
    bulge : float
        tan(sweep/4) for arcs up to one full turn, 0 for lines.
    """

    stage: int
    part: Part
    width_um: float
    start_um: Floats
    end_um: Floats
    bulge: float = 0.0

    @property
    def length_um(self) -> float:
        """Length along the line or arc [um]."""
        chord = hypot(*(self.end_um - self.start_um))
        if self.bulge == 0.0:
            return chord
        sweep = 4.0 * np.arctan(abs(self.bulge))
        return float(chord / (2.0 * sin(sweep / 2.0)) * sweep)

    def points(self, sagitta_um: float) -> Floats:
        """Return points along the stroke, both ends included, shape (n, 2) [um]."""
        if self.bulge == 0.0:
            return np.array([self.start_um, self.end_um])
        centre, radius, start, sweep = self.arc()
        step = 2.0 * np.arccos(max(0.5, 1.0 - sagitta_um / radius))
        angles = start + np.linspace(0.0, sweep, max(2, int(np.ceil(abs(sweep) / step)) + 1))
        return centre + radius * np.stack((np.cos(angles), np.sin(angles)), axis=1)

    def arc(self) -> tuple[Floats, float, float, float]:
        """Return centre, radius, start angle and signed sweep of an arc [um, rad]."""
        d = self.end_um - self.start_um
        centre = 0.5 * (self.start_um + self.end_um)
        centre = centre + (1.0 - self.bulge**2) / (4.0 * self.bulge) * np.array([-d[1], d[0]])
        spoke = self.start_um - centre
        return centre, hypot(*spoke), float(np.arctan2(spoke[1], spoke[0])), 4.0 * float(np.arctan(self.bulge))


@dataclass(frozen=True, slots=True, kw_only=True)
class OpenEnd:
    """An open end of a lead: where flow enters or leaves.

    Attributes
    ----------
    point_um : array, shape (2,)
        Middle of the end [um].
    outward_heading_rad : float
        Direction out of the channel [rad].
    width_um : float
        Width [um].
    """

    point_um: Floats
    outward_heading_rad: float
    width_um: float

    @property
    def section_um(self) -> Floats:
        """The two corners, right then left seen looking outwards, shape (2, 2) [um]."""
        return _section(self.point_um, self.outward_heading_rad, self.width_um)


@dataclass(frozen=True, slots=True, kw_only=True)
class StagePlace:
    """Where one stage lies.

    Attributes
    ----------
    placement : Placement
        From the stage's own frame (fork at the origin, bypass towards +x, loop on the left).
    fork_um, mouth_um : array, shape (2,)
        Where the loop leaves and meets the bypass [um].
    side : int
        +1 for a loop on the left of the reverse flow, -1 on the right.
    bypass_heading_rad : float
        Heading of the bypass in the reverse flow [rad].
    bypass_section_um, loop_section_um : array, shape (2, 2)
        Chords straight across the bypass and the turn at their middles [um].
    """

    placement: Placement
    fork_um: Floats
    mouth_um: Floats
    side: int
    bypass_heading_rad: float
    bypass_section_um: Floats
    loop_section_um: Floats


@dataclass(frozen=True, slots=True, kw_only=True)
class Centreline:
    """All centre lines of one channel.

    Attributes
    ----------
    strokes : tuple of Stroke
        In the order of the reverse flow; each loop follows its bypass.
    stages : tuple of StagePlace
        One for each stage.
    forward_inlet, forward_outlet : OpenEnd
        The far end of the lead in, and of the lead out.
    """

    strokes: tuple[Stroke, ...]
    stages: tuple[StagePlace, ...]
    forward_inlet: OpenEnd
    forward_outlet: OpenEnd


def _unit(heading: float) -> Floats:
    return np.array([cos(heading), sin(heading)])


def _section(point: Floats, heading: float, width: float) -> Floats:
    normal = _unit(heading + pi / 2)
    return np.array([point - 0.5 * width * normal, point + 0.5 * width * normal])


def first_heading(parameters: ChannelParameters) -> float:
    """Return the heading of the lead out that makes the chain run along +x [rad]."""
    bend = radians(parameters.run_bend_deg)
    if parameters.stages == 0:
        return 0.0
    if parameters.sides == "alternate" or parameters.stages == 1:
        return bend / 2.0
    half_gap = 0.5 * parameters.stage_gap_um
    along = stage_measures(parameters).bypass_length_um + half_gap
    return -float(np.arctan2(-along * sin(bend), along * cos(bend) + half_gap))


def build_centreline(parameters: ChannelParameters) -> Centreline:
    """Return the centre lines of a channel whose stage is possible.

    Parameters
    ----------
    parameters : ChannelParameters
        A set for which ``stage_measures(...).is_possible`` holds, or with no stages.

    Returns
    -------
    Centreline
        Reverse flow runs towards +x from (0, 0).
    """
    walker = _Walker(parameters)
    if parameters.stages == 0:
        walker.straight(-1, Part.LEAD_OUT, parameters.lead_out_um + parameters.lead_in_um)
    else:
        walker.straight(-1, Part.LEAD_OUT, parameters.lead_out_um)
        for stage in range(parameters.stages):
            walker.stage(stage)
    width = parameters.channel_width_um
    return Centreline(
        strokes=tuple(walker.strokes),
        stages=tuple(walker.places),
        forward_inlet=OpenEnd(point_um=walker.position, outward_heading_rad=walker.heading, width_um=width),
        forward_outlet=OpenEnd(
            point_um=np.zeros(2), outward_heading_rad=first_heading(parameters) + pi, width_um=width
        ),
    )


class _Walker:
    """Walks the chain with the reverse flow and collects strokes."""

    def __init__(self, parameters: ChannelParameters) -> None:
        self.parameters = parameters
        self.measures = stage_measures(parameters)
        self.position = np.zeros(2)
        self.heading = first_heading(parameters)
        self.strokes: list[Stroke] = []
        self.places: list[StagePlace] = []

    def straight(self, stage: int, part: Part, length: float) -> None:
        if length < SHORTEST_UM:
            return
        end = self.position + length * _unit(self.heading)
        self.strokes.append(
            Stroke(
                stage=stage, part=part, width_um=self.parameters.channel_width_um, start_um=self.position, end_um=end
            )
        )
        self.position = end

    def stage(self, stage: int) -> None:
        p, m = self.parameters, self.measures
        side = 1 if p.sides == "same" or stage % 2 == 0 else -1
        bend = side * radians(p.run_bend_deg)
        self.heading -= bend
        placement = Placement(
            angle=self.heading, dx_um=float(self.position[0]), dy_um=float(self.position[1]), is_mirrored=side < 0
        )
        fork = self.position
        self.straight(stage, Part.BYPASS, m.bypass_length_um)
        self._loop(stage, placement, fork)
        if stage == p.stages - 1:
            self.straight(stage, Part.LEAD_IN, p.lead_in_um)
        elif p.sides == "same":
            self.straight(stage, Part.GAP, 0.5 * p.stage_gap_um)
            self.heading += bend
            self.straight(stage, Part.GAP, 0.5 * p.stage_gap_um)
        else:
            self.straight(stage, Part.GAP, p.stage_gap_um)

    def _loop(self, stage: int, placement: Placement, fork: Floats) -> None:
        p, m = self.parameters, self.measures
        a, t = radians(p.loop_angle_deg), radians(p.loop_turn_deg)
        leg_end = m.leg_length_um * _unit(a)
        centre = leg_end + p.loop_radius_um * _unit(a - pi / 2)
        turn_end = centre + p.loop_radius_um * _unit(a + pi / 2 - t)
        mouth = np.array([m.bypass_length_um, 0.0])
        sign = -1.0 if placement.is_mirrored else 1.0
        runs = (
            (Part.LEG, np.zeros(2), leg_end, 0.0),
            (Part.TURN, leg_end, turn_end, -sign * tan(t / 4.0)),
            (Part.RETURN, turn_end, mouth, 0.0),
        )
        for part, start, end, bulge in runs:
            if part is Part.TURN or hypot(*(end - start)) >= SHORTEST_UM:
                self.strokes.append(
                    Stroke(
                        stage=stage,
                        part=part,
                        width_um=p.loop_width_um,
                        start_um=placement.points(start),
                        end_um=placement.points(end),
                        bulge=bulge,
                    )
                )
        middle = a + pi / 2 - t / 2.0
        across = p.loop_width_um / 2.0 * np.array([-1.0, 1.0])[:, None] * _unit(middle)
        bypass_middle = np.array([m.bypass_length_um / 2.0, 0.0])
        self.places.append(
            StagePlace(
                placement=placement,
                fork_um=fork,
                mouth_um=placement.points(mouth),
                side=-1 if placement.is_mirrored else 1,
                bypass_heading_rad=self.heading,
                bypass_section_um=placement.points(_section(bypass_middle, 0.0, p.channel_width_um)),
                loop_section_um=placement.points(centre + p.loop_radius_um * _unit(middle) + across),
            )
        )
