"""Lengths and angles of one stage, in closed form."""

from __future__ import annotations

from dataclasses import dataclass
from math import cos, radians, sin
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from core.parameters import ChannelParameters


@dataclass(frozen=True, slots=True, kw_only=True)
class StageMeasures:
    """Lengths and angles of one stage, along the centre lines.

    Attributes
    ----------
    leg_length_um, turn_length_um, return_length_um, loop_length_um : float
        The loop and its three parts [um]; the leg is negative when the loop cannot close.
    bypass_length_um : float
        From fork to mouth [um].
    fork_angle_deg, run_bend_deg, leg_turn_deg, mouth_angle_deg : float
        Leg against the bypass; incoming run against the bypass; leg against the incoming run;
        arriving loop against the bypass [deg].
    is_possible : bool
        True if every part has a length and the loop arrives from its own side.
    """

    leg_length_um: float
    turn_length_um: float
    return_length_um: float
    bypass_length_um: float
    fork_angle_deg: float
    run_bend_deg: float
    leg_turn_deg: float
    mouth_angle_deg: float

    @property
    def loop_length_um(self) -> float:
        """Leg, turn and return together [um]."""
        return self.leg_length_um + self.turn_length_um + self.return_length_um

    @property
    def is_possible(self) -> bool:
        """Whether the loop closes on the bypass."""
        return (
            self.leg_length_um >= 0.0
            and self.bypass_length_um > 0.0
            and self.leg_turn_deg >= 0.0
            and 0.0 < self.mouth_angle_deg < 180.0
        )


def stage_measures(parameters: ChannelParameters) -> StageMeasures:
    """Return the lengths and angles of one stage.

    Parameters
    ----------
    parameters : ChannelParameters
        Any parameter set; impossible ones give ``is_possible`` False.

    Returns
    -------
    StageMeasures
        For t = 180 deg and no return: leg 2R/tan a, mouth 2R/sin a from the fork.
    """
    a, t = radians(parameters.loop_angle_deg), radians(parameters.loop_turn_deg)
    radius, straight = parameters.loop_radius_um, parameters.return_length_um
    leg = (radius * (cos(a) - cos(a - t)) - straight * sin(a - t)) / sin(a)
    if abs(leg) < 1e-9 * radius:
        leg = 0.0
    mouth = leg * cos(a) + radius * (sin(a) - sin(a - t)) + straight * cos(a - t)
    return StageMeasures(
        leg_length_um=leg,
        turn_length_um=radius * t,
        return_length_um=straight,
        bypass_length_um=mouth,
        fork_angle_deg=parameters.loop_angle_deg,
        run_bend_deg=parameters.run_bend_deg,
        leg_turn_deg=parameters.loop_angle_deg - parameters.run_bend_deg,
        mouth_angle_deg=parameters.loop_turn_deg - parameters.loop_angle_deg,
    )
