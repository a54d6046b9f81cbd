"""Random channels that are really drawn, each cheap to solve, with a random flow."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

import numpy as np

from core.geometry.shape import build_shape
from core.operating import OperatingPoint
from core.units import M3_S_PER_UL_MIN
from tests.core.geometry.designs import sensible

if TYPE_CHECKING:
    from core.parameters import ChannelParameters

WATER = OperatingPoint().fluid_state()
LEADS = 3.0  # channel widths


@dataclass(frozen=True, slots=True, kw_only=True)
class Trial:
    """One channel and one flow.

    Attributes
    ----------
    channel : ChannelParameters
        With an outline.
    reynolds : float
        On the hydraulic diameter of the channel section.
    flow_ul_min : float
        Of water [uL/min].
    """

    channel: ChannelParameters
    reynolds: float
    flow_ul_min: float


def trial(rng: np.random.Generator, *, most_stages: int = 3) -> Trial:
    """Return a channel of one to three stages, leads of three widths, at Re 0.5 to 200."""
    while True:
        drawn = sensible(rng, most_stages=most_stages)
        lead = LEADS * drawn.channel_width_um
        channel = replace(drawn, lead_in_um=lead, lead_out_um=lead)
        if build_shape(channel).is_usable:
            break
    reynolds = float(10 ** rng.uniform(np.log10(0.5), np.log10(200.0)))
    return Trial(channel=channel, reynolds=reynolds, flow_ul_min=flow_ul_min(channel, reynolds))


def flow_ul_min(channel: ChannelParameters, reynolds: float) -> float:
    """Return the flow of water [uL/min] at a Reynolds number on the hydraulic diameter, 2 w d / (w + d)."""
    half_perimeter_m = (channel.channel_width_um + channel.depth_um) * 1e-6
    return reynolds * WATER.kinematic_viscosity_m2_s * half_perimeter_m / 2.0 / M3_S_PER_UL_MIN
