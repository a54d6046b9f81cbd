"""One stage as a network: two channels between fork and mouth, and what the junctions do to them.

All lengths are over the channel width w, resistances over that of one channel width, speeds over
the mean speed U, heads over rho U^2. The loop share x is the part of the flow in the loop.

Inertia acts in two ways. It *drives* head from one branch to the other, so that reverse flow is
pushed into the loop and forward flow kept out of it; and it *loses* head where streams turn and
mix. To first order in Re the drive has the same sense in both directions and costs nothing,
which is why the pressure departs from Stokes flow as Re^2, and its two directions from one
another as Re^3 only.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from core.geometry.measures import stage_measures
from core.hydraulics.coefficients import coefficient
from core.hydraulics.ducts import hydraulic_diameter_m, resistance_pa_s_m3
from core.hydraulics.losses import combining_losses, corner_reach, dividing_loss

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from core.geometry.measures import StageMeasures
    from core.parameters import ChannelParameters

    Floats = NDArray[np.float64]

SHORTEST = 1.0  # a branch never counts for less than this many widths, whatever its corners save ...
LEAST = 0.1  # ... nor a whole stage for less than these; shapes that can be drawn stay above both
WIDEST_STEP = 2.0  # ratio of widths beyond which junction formulas are not stretched any further

# Heads are cubic in the loop share: four samples give their coefficients exactly.
_SAMPLES = np.array([0.0, 1.0 / 3.0, 2.0 / 3.0, 1.0])
_TO_CUBIC = np.linalg.inv(np.vander(_SAMPLES, increasing=True))


@dataclass(frozen=True, slots=True, kw_only=True)
class Stage:
    """One stage in numbers free of dimension.

    Attributes
    ----------
    bypass, loop, turn : float
        Resistances of the branches, and of the turn within the loop.
    common : float
        Resistance that fork and mouth add to the channel outside (may be negative).
    depth_ratio : float
        Depth over channel width.
    reverse_loss, forward_loss : array, shape (4,)
        Heads lost at fork and mouth once inertia rules, as coefficients of 1, x, x^2, x^3.
    mean_drive, difference_drive : array, shape (4,)
        Head that drives flow into the loop (reverse) and out of it (forward), likewise: the part
        common to both directions, and half of reverse minus forward.
    """

    bypass: float
    loop: float
    turn: float
    common: float
    depth_ratio: float
    reverse_loss: Floats
    forward_loss: Floats
    mean_drive: Floats
    difference_drive: Floats

    @property
    def stokes_share(self) -> float:
        """Loop share in Stokes flow [-]."""
        return self.bypass / (self.bypass + self.loop)

    @property
    def stokes(self) -> float:
        """Resistance of the whole stage in Stokes flow."""
        return max(self.loop * self.stokes_share + self.common, LEAST)


def stage_of(parameters: ChannelParameters) -> Stage:
    """Return the network of one stage of a channel.

    Parameters
    ----------
    parameters : ChannelParameters
        Any parameter set; where the loop cannot close its leg counts as short.

    Returns
    -------
    Stage
        Resistances and head polynomials.
    """
    measures = stage_measures(parameters)
    w = parameters.channel_width_um
    narrowing = parameters.loop_width_um / w
    speeding = min(max(narrowing, 1.0 / WIDEST_STEP), WIDEST_STEP)
    saved_bypass, saved_loop, common = _corner_lengths(measures, narrowing)
    width, loop_width, depth = (1e-6 * v for v in (w, parameters.loop_width_um, parameters.depth_um))
    per_length = resistance_pa_s_m3(
        length_m=1.0, width_m=np.array([width, loop_width]), depth_m=depth, viscosity_pa_s=1.0
    )
    loop_unit = float(per_length[1] / per_length[0])
    loop_length = max(measures.loop_length_um / w, measures.turn_length_um / w)
    bypass = max(measures.bypass_length_um / w - saved_bypass, SHORTEST)
    loop = loop_unit * max(loop_length - saved_loop, SHORTEST)
    return Stage(
        bypass=bypass,
        loop=loop,
        depth_ratio=parameters.depth_um / w,
        turn=loop_unit * measures.turn_length_um / w,
        common=common,
        **_losses(measures, speeding),
        **_drives(measures, speeding),
    )


def _corner_lengths(measures: StageMeasures, width_ratio: float) -> tuple[float, float, float]:
    """Return widths of path saved in bypass and loop, and added to the channel outside, in Stokes flow."""
    short_cut, merging = coefficient("corner_short_cut"), coefficient("merging")

    def reach(angle_deg: float) -> float:
        return corner_reach(angle_deg=angle_deg, width_ratio=width_ratio)

    mouth = measures.mouth_angle_deg
    # angles at each junction between: bypass and loop, loop and channel outside, bypass and channel outside
    junctions = (
        (measures.fork_angle_deg, 180.0 - measures.leg_turn_deg, 180.0 - measures.run_bend_deg),
        (mouth, 180.0 - mouth, 180.0),
    )
    saved_bypass = saved_loop = common = 0.0
    for inner, outer, run in junctions:
        between, loop_side, bypass_side = reach(inner), reach(outer), corner_reach(angle_deg=run, width_ratio=1.0)
        saved_bypass += short_cut * (between + bypass_side) - merging * loop_side
        saved_loop += short_cut * (between + loop_side) - merging * bypass_side
        common += merging * between - short_cut * (loop_side + bypass_side)
    return saved_bypass, saved_loop, common


def _losses(measures: StageMeasures, width_ratio: float) -> dict[str, Floats]:
    """Return the heads lost at fork and mouth, averaged by flow, as cubics of the loop share."""
    speeds, sections = (1.0 - _SAMPLES, _SAMPLES / width_ratio), (1.0, width_ratio)
    fork, mouth = (measures.run_bend_deg, measures.leg_turn_deg), (0.0, measures.mouth_angle_deg)
    by_flow, turned = np.array([1.0 - _SAMPLES, _SAMPLES]), coefficient("junction_turn")

    def lost(divides: tuple[float, float], combines: tuple[float, float]) -> Floats:
        apart = [dividing_loss(u, turn_deg=turn, turned=turned) for u, turn in zip(speeds, divides, strict=True)]
        together = combining_losses(speeds, turns_deg=combines, area_ratios=sections)
        return _TO_CUBIC @ (0.5 * by_flow * (np.array(apart) + together)).sum(axis=0)

    return {"reverse_loss": lost(fork, mouth), "forward_loss": lost(mouth, fork)}


def _drives(measures: StageMeasures, width_ratio: float) -> dict[str, Floats]:
    """Return the heads that move flow from branch to branch, as cubics of the loop share.

    Form of a momentum balance at both junctions; the weight of each term is fitted.
    """
    bypass, loop = 1.0 - _SAMPLES, _SAMPLES / width_ratio
    bend, leg, mouth = np.cos(
        np.radians(
            coefficient("junction_turn")
            * np.array([measures.run_bend_deg, measures.leg_turn_deg, measures.mouth_angle_deg])
        )
    )
    mean = coefficient("turning_drive") * bypass * (1.0 - bend) + coefficient("loop_drive") * loop * (leg - mouth)
    difference = (
        2.0 * coefficient("meeting_drive") * (bypass**2 - loop**2)
        - coefficient("straight_drive") * bypass * (1.0 + bend)
        + coefficient("aligned_drive") * loop * (leg + mouth)
    )
    return {"mean_drive": _TO_CUBIC @ (0.5 * mean), "difference_drive": _TO_CUBIC @ (0.5 * difference)}


def dean_ratio(parameters: ChannelParameters) -> float:
    """Return the Dean number of the turn, if the loop carried all the flow, over the channel's Reynolds number.

    Parameters
    ----------
    parameters : ChannelParameters
        Any parameter set.

    Returns
    -------
    float
        Ratio [-]; De = Re_loop sqrt(D_h / (2 R)) with the loop's own hydraulic diameter.
    """
    channel, loop, depth = parameters.channel_width_um, parameters.loop_width_um, parameters.depth_um
    diameter = float(hydraulic_diameter_m(loop, depth))
    faster = channel / loop * diameter / float(hydraulic_diameter_m(channel, depth))
    return faster * float(np.sqrt(diameter / (2.0 * parameters.loop_radius_um)))
