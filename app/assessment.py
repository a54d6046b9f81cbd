"""What follows from a parameter set and an operating point: the shape, and how it scores.

Everything is asked of ``core``; nothing is worked out here.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING

import numpy as np

from core.errors import CoreError
from core.geometry.shape import ChannelShape, build_shape
from core.hydraulics.estimate import Estimate, Score, estimate

if TYPE_CHECKING:
    from core.fluids import FluidState
    from core.operating import OperatingPoint
    from core.parameters import ChannelParameters

CURVE_POINTS = 100
_CURVE_ENDS = (1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 8.0, 10.0)
BLOCKED = "The shape has findings that block it; see below what to change."

# Values are frozen, so that a shape or a score once found is good for ever; undo and the
# comparison find theirs here.
_KEPT = 256


@dataclass(frozen=True, slots=True, kw_only=True)
class Assessment:
    """How one channel does at one operating point.

    Attributes
    ----------
    flow_ul_min : float
        Operating flow [uL/min].
    fluid : FluidState or None
        The fluid; None when it does not exist at this temperature.
    estimate : Estimate or None
        Curve over flows; None when there is no fluid or no usable shape.
    score : Score or None
        At the operating flow.
    obstacle : str
        Why there is no score; empty when there is one.
    """

    flow_ul_min: float
    fluid: FluidState | None = None
    estimate: Estimate | None = None
    score: Score | None = None
    obstacle: str = ""


@lru_cache(maxsize=_KEPT)
def shape_of(channel: ChannelParameters) -> ChannelShape:
    """Return the shape of a parameter set."""
    return build_shape(channel)


@lru_cache(maxsize=_KEPT)
def fluid_of(operating: OperatingPoint) -> FluidState:
    """Return the fluid at an operating point; raises ``DesignValueError`` when there is none."""
    return operating.fluid_state()


@lru_cache(maxsize=_KEPT)
def assessment_of(channel: ChannelParameters, operating: OperatingPoint, curve_top_ul_min: float) -> Assessment:
    """Return how a parameter set does at an operating point, with a curve up to a flow [uL/min]."""
    flow_ul_min = operating.flow_ul_min
    try:
        fluid = fluid_of(operating)
        if not shape_of(channel).is_usable:
            return Assessment(flow_ul_min=flow_ul_min, fluid=fluid, obstacle=BLOCKED)
        flows_ul_min = np.union1d(np.linspace(0.001 * curve_top_ul_min, curve_top_ul_min, CURVE_POINTS), flow_ul_min)
        curve = estimate(channel, fluid=fluid, flows_ul_min=flows_ul_min)
        score = curve.score(int(np.searchsorted(flows_ul_min, flow_ul_min)))
        return Assessment(flow_ul_min=flow_ul_min, fluid=fluid, estimate=curve, score=score)
    except CoreError as error:
        return Assessment(flow_ul_min=flow_ul_min, obstacle=str(error))


@lru_cache(maxsize=_KEPT)
def score_of(channel: ChannelParameters, operating: OperatingPoint) -> Score | None:
    """Return the score of a parameter set at an operating point; None when there is none."""
    try:
        fluid = fluid_of(operating)
        if not shape_of(channel).is_usable:
            return None
        return estimate(channel, fluid=fluid, flows_ul_min=np.array([operating.flow_ul_min])).score(0)
    except CoreError:
        return None


def curve_top_ul_min(flow_ul_min: float) -> float:
    """Return the round flow at which a curve ends so that the operating flow is well inside [uL/min].

    It moves in steps, so that the axes stand still while a flow changes a little.
    """
    wanted = 1.5 * flow_ul_min
    decade = 10.0 ** np.floor(np.log10(wanted))
    return float(decade * next(lead for lead in _CURVE_ENDS if decade * lead >= wanted))
