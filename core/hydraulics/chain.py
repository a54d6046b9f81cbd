"""Stages in series: what close neighbours save one another, and what the whole chain drops.

The mixing behind a junction takes a few widths of channel. Where the next junction comes sooner,
part of the loss does not happen, in both directions alike; and in Stokes flow two junctions that
overlap shorten the path between them. What sets reverse apart from forward flow was found unchanged
by neighbours, so that the diodicity of a chain grows with its stages because the leads weigh less,
and because what is saved is common to both directions.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING

import numpy as np

from core.hydraulics.coefficients import coefficient
from core.hydraulics.share import stage_flow

if TYPE_CHECKING:
    from numpy.typing import NDArray

    from core.hydraulics.stage import Stage

    Floats = NDArray[np.float64]


@dataclass(frozen=True, slots=True, kw_only=True)
class ChainFlow:
    """What all stages and the gaps between them do, for n flows.

    Attributes
    ----------
    stokes : float
        Resistance over that of one channel width, leads not counted.
    forward_excess, difference : array, shape (n,)
        Forward drop beyond Stokes flow, and reverse less forward drop, over rho U^2.
    share_forward, share_reverse : array, shape (n,)
        Loop share [-].
    """

    stokes: float
    forward_excess: Floats
    difference: Floats
    share_forward: Floats
    share_reverse: Floats


def chain_flow(stage: Stage, *, stages: int, gap: float, inertia: Floats, dean: Floats) -> ChainFlow:
    """Return drops and loop shares of a chain of equal stages.

    Parameters
    ----------
    stage : Stage
        Network of one stage.
    stages : int
        Number of stages, at least 1.
    gap : float
        Distance from a mouth to the next fork, over the channel width [-].
    inertia : array, shape (n,)
        rho U^2 over the developed drop of one channel width [-].
    dean : array, shape (n,)
        Dean number of the turn if the loop carried all the flow [-].

    Returns
    -------
    ChainFlow
        Sums over the stages.
    """
    nearness = float(np.exp(-gap / coefficient("gap_reach")))
    neighbours = (stages - 1) / stages
    relief = np.full_like(inertia, coefficient("gap_relief") * nearness * neighbours)
    flow = stage_flow(stage, inertia=inertia, dean=dean, relief=relief)
    between = max(gap - coefficient("gap_overlap") * nearness, 0.0)
    return ChainFlow(
        stokes=stages * stage.stokes + (stages - 1) * between,
        forward_excess=stages * flow.forward_excess,
        difference=stages * flow.difference,
        share_forward=flow.share_forward,
        share_reverse=flow.share_reverse,
    )
