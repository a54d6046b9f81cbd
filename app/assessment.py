"""What follows from a parameter set, its process and an operating point: shape, what is made of it, score, findings.

Everything is asked of ``core``; nothing is worked out here.
"""

from __future__ import annotations

from dataclasses import dataclass
from functools import lru_cache
from typing import TYPE_CHECKING

import numpy as np

from core.errors import CoreError
from core.fabrication.channel_findings import channel_findings
from core.fabrication.making import Making, making_of
from core.findings import Severity
from core.geometry.shape import build_shape
from core.hydraulics.estimate import Estimate, Score, estimate

if TYPE_CHECKING:
    from collections.abc import Callable

    from numpy.typing import NDArray

    from core.fabrication.process import Process
    from core.findings import Finding
    from core.fluids import FluidState
    from core.operating import OperatingPoint
    from core.parameters import ChannelParameters

CURVE_POINTS = 100
_CURVE_ENDS = (1.0, 1.5, 2.0, 3.0, 4.0, 5.0, 6.0, 8.0, 10.0)
BLOCKED = "The shape has findings that block it; they say what to change."
NOT_MADE = "This process cannot make the channel; the findings say what to change."

# Values are frozen, so that a shape or a score once found is good for ever; undo and the
# comparison find theirs here.
_KEPT = 256


@dataclass(frozen=True, slots=True, kw_only=True)
class Assessment:
    """How one channel does at one operating point, as it will be made.

    Attributes
    ----------
    flow_ul_min : float
        Operating flow [uL/min].
    making : Making
        What the process makes of the channel.
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
    making: Making
    fluid: FluidState | None = None
    estimate: Estimate | None = None
    score: Score | None = None
    obstacle: str = ""


@lru_cache(maxsize=_KEPT)
def making_by(channel: ChannelParameters, process: Process) -> Making:
    """Return what a process makes of a parameter set."""
    return making_of(channel, process)


@lru_cache(maxsize=_KEPT)
def fluid_of(operating: OperatingPoint) -> FluidState:
    """Return the fluid at an operating point; raises ``DesignValueError`` when there is none."""
    return operating.fluid_state()


@lru_cache(maxsize=_KEPT)
def assessment_of(
    channel: ChannelParameters, process: Process, operating: OperatingPoint, curve_top_ul_min: float
) -> Assessment:
    """Return how a parameter set does when it is made and run, with a curve up to a flow [uL/min]."""
    flow_ul_min, making = operating.flow_ul_min, making_by(channel, process)
    try:
        fluid = fluid_of(operating)
        if obstacle := _obstacle(channel, making):
            return Assessment(flow_ul_min=flow_ul_min, making=making, fluid=fluid, obstacle=obstacle)
        flows_ul_min = np.union1d(np.linspace(0.001 * curve_top_ul_min, curve_top_ul_min, CURVE_POINTS), flow_ul_min)
        curve = _estimate(making, process, fluid, flows_ul_min)
        score = curve.score(int(np.searchsorted(flows_ul_min, flow_ul_min)))
        return Assessment(flow_ul_min=flow_ul_min, making=making, fluid=fluid, estimate=curve, score=score)
    except CoreError as error:
        return Assessment(flow_ul_min=flow_ul_min, making=making, obstacle=str(error))


@lru_cache(maxsize=_KEPT)
def score_of(channel: ChannelParameters, process: Process, operating: OperatingPoint) -> Score | None:
    """Return the score of a parameter set at an operating point; None when there is none."""
    making = making_by(channel, process)
    try:
        fluid = fluid_of(operating)
        if _obstacle(channel, making):
            return None
        return _estimate(making, process, fluid, np.array([operating.flow_ul_min])).score(0)
    except CoreError:
        return None


def _estimate(making: Making, process: Process, fluid: FluidState, flows_ul_min: NDArray[np.float64]) -> Estimate:
    return estimate(making.flow, fluid=fluid, flows_ul_min=flows_ul_min, has_stiff_walls=process.has_stiff_walls)


def _obstacle(channel: ChannelParameters, making: Making) -> str:
    """Return why there is nothing to score: no shape is wanted, drawn or made; empty when there is."""
    if not build_shape(channel).is_usable:
        return BLOCKED
    is_made = not any(finding.severity is Severity.ERROR for finding in making.findings)
    return "" if is_made and build_shape(making.made).is_usable else NOT_MADE


@dataclass(frozen=True, slots=True, kw_only=True)
class Checked:
    """What the findings of a channel depend on.

    Attributes
    ----------
    channel : ChannelParameters
        The wanted channel.
    process : Process
        How it is made.
    pressure_pa : float or None
        Highest pressure that the chip may have to hold [Pa]; None when it is not known.
    pressure_at : str
        When it is there, in words.
    """

    channel: ChannelParameters
    process: Process
    pressure_pa: float | None = None
    pressure_at: str = ""


@lru_cache(maxsize=_KEPT)
def findings_of(checked: Checked) -> tuple[Finding, ...]:
    """Return all findings of a channel: of its shape, of its making, and of the process; cures are not searched."""
    return _findings(checked, with_cures=False)


def cured_findings_of(checked: Checked, on_try: Callable[[], object]) -> tuple[Finding, ...]:
    """Return the same findings with their cures, each of which is tried; takes up to a second.

    ``on_try`` is called before every try; whatever it raises ends the search.
    """
    return _findings(checked, with_cures=True, on_try=on_try)


def _findings(checked: Checked, *, with_cures: bool, on_try: Callable[[], object] | None = None) -> tuple[Finding, ...]:
    shape = build_shape(checked.channel)
    if not shape.is_usable:
        return shape.findings
    of_process = channel_findings(
        checked.channel,
        checked.process,
        pressure_pa=checked.pressure_pa,
        pressure_at=checked.pressure_at,
        with_cures=with_cures,
        on_try=on_try,
    )
    found = (*shape.findings, *of_process)
    return tuple(sorted(found, key=lambda finding: finding.severity is not Severity.ERROR))


def curve_top_ul_min(flow_ul_min: float) -> float:
    """Return the round flow at which a curve ends so that the operating flow is well inside [uL/min].

    It moves in steps, so that the axes stand still while a flow changes a little.
    """
    wanted = 1.5 * flow_ul_min
    decade = 10.0 ** np.floor(np.log10(wanted))
    return float(decade * next(lead for lead in _CURVE_ENDS if decade * lead >= wanted))
