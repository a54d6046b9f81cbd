"""The instant estimate: pressure drops, diodicity and loop shares of a channel, for an array of flows."""

from __future__ import annotations

from dataclasses import asdict, dataclass
from typing import TYPE_CHECKING

import numpy as np

from core.errors import DesignValueError
from core.hydraulics.chain import ChainFlow, chain_flow
from core.hydraulics.ducts import hydraulic_diameter_m, resistance_pa_s_m3
from core.hydraulics.stage import dean_ratio, stage_of
from core.hydraulics.trust import design_notes, flow_notes, trust_of
from core.units import M3_S_PER_UL_MIN, M_PER_UM

if TYPE_CHECKING:
    from numpy.typing import ArrayLike, NDArray

    from core.fluids import FluidState
    from core.parameters import ChannelParameters

    Floats = NDArray[np.float64]

METHOD = "estimate"


@dataclass(frozen=True, slots=True, kw_only=True)
class Score:
    """The estimate at one flow, as plain numbers.

    Attributes
    ----------
    flow_ul_min : float
        Flow, the same in both directions [uL/min].
    reynolds : float
        rho U D_h / mu of the channel section [-].
    forward_pressure_pa, reverse_pressure_pa : float
        Pressure drop between the open ends [Pa].
    diodicity, rectification : float
        Reverse over forward drop, and that less 1 with all its digits [-].
    loop_share_forward, loop_share_reverse : float
        Part of the flow in the loop, mean over the stages [-].
    method : str
        How the numbers were got.
    error_band_percent, rectification_band_percent : float
        Error to be expected of the pressures and of the rectification [%].
    diodicity_band : float
        Error to be expected of the diodicity, up or down [-].
    valid : bool
        Whether design and flow lie inside the range the estimate was compared in.
    notes : tuple of str
        Cautions, each with a way out.
    """

    flow_ul_min: float
    reynolds: float
    forward_pressure_pa: float
    reverse_pressure_pa: float
    diodicity: float
    rectification: float
    loop_share_forward: float
    loop_share_reverse: float
    method: str
    error_band_percent: float
    rectification_band_percent: float
    diodicity_band: float
    valid: bool
    notes: tuple[str, ...]

    @property
    def highest_pressure_pa(self) -> float:
        """The larger of both drops at the upper end of its error band: what the chip may have to hold [Pa]."""
        return max(self.forward_pressure_pa, self.reverse_pressure_pa) * (1.0 + self.error_band_percent / 100.0)

    def shares_of(self, _stage: int) -> tuple[float, float]:
        """Return the loop shares, forward and reverse, of a stage: to the estimate all are alike."""
        return self.loop_share_forward, self.loop_share_reverse

    def as_dict(self) -> dict[str, object]:
        """Return the score with the keys used in machine-readable output."""
        return {**asdict(self), "notes": list(self.notes)}


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Estimate:
    """The estimate for an array of flows; every array has shape (n,).

    Attributes
    ----------
    flow_ul_min : array
        Flows, the same in both directions [uL/min].
    reynolds : array
        rho U D_h / mu of the channel section [-].
    stokes_pressure_pa : array
        Pressure drop that the same flow would need without inertia, equal in both directions [Pa].
    forward_pressure_pa, reverse_pressure_pa : array
        Pressure drop between the open ends [Pa].
    diodicity, rectification : array
        Reverse over forward drop, and that less 1 with all its digits [-].
    loop_share_forward, loop_share_reverse : array
        Part of the flow in the loop, mean over the stages; 0 without stages [-].
    error_band_percent, rectification_band_percent : array
        Error to be expected of the pressures and of the rectification [%].
    diodicity_band : array
        Error to be expected of the diodicity, up or down [-].
    valid : array of bool
        Whether design and flow lie inside the range the estimate was compared in.
    notes : tuple of str
        Cautions about the design and the fluid; ``score`` adds those that depend on the flow.
    parameters : ChannelParameters
        The design.
    fluid : FluidState
        What flows.
    has_stiff_walls : bool
        Whether walls keep their place under pressure.
    method : str
        How the numbers were got.
    """

    flow_ul_min: Floats
    reynolds: Floats
    stokes_pressure_pa: Floats
    forward_pressure_pa: Floats
    reverse_pressure_pa: Floats
    diodicity: Floats
    rectification: Floats
    loop_share_forward: Floats
    loop_share_reverse: Floats
    error_band_percent: Floats
    rectification_band_percent: Floats
    diodicity_band: Floats
    valid: NDArray[np.bool_]
    notes: tuple[str, ...]
    parameters: ChannelParameters
    fluid: FluidState
    has_stiff_walls: bool = False
    method: str = METHOD

    def score(self, index: int) -> Score:
        """Return the estimate at one of the flows.

        Parameters
        ----------
        index : int
            Place in the arrays.

        Returns
        -------
        Score
            Plain numbers, and all notes that apply there.
        """
        reynolds, rectification = float(self.reynolds[index]), float(self.rectification[index])
        forward, reverse = float(self.forward_pressure_pa[index]), float(self.reverse_pressure_pa[index])
        own = flow_notes(
            self.parameters,
            fluid=self.fluid,
            reynolds=reynolds,
            rectification=rectification,
            pressure_pa=max(forward, reverse),
            has_stiff_walls=self.has_stiff_walls,
        )
        return Score(
            flow_ul_min=float(self.flow_ul_min[index]),
            reynolds=reynolds,
            forward_pressure_pa=forward,
            reverse_pressure_pa=reverse,
            diodicity=float(self.diodicity[index]),
            rectification=rectification,
            loop_share_forward=float(self.loop_share_forward[index]),
            loop_share_reverse=float(self.loop_share_reverse[index]),
            method=self.method,
            error_band_percent=float(self.error_band_percent[index]),
            rectification_band_percent=float(self.rectification_band_percent[index]),
            diodicity_band=float(self.diodicity_band[index]),
            valid=bool(self.valid[index]),
            notes=(*own, *self.notes),
        )


def estimate(
    parameters: ChannelParameters, *, fluid: FluidState, flows_ul_min: ArrayLike, has_stiff_walls: bool = False
) -> Estimate:
    """Estimate pressure drops, diodicity and loop shares of a channel in both directions.

    Straight channels by the exact duct series; fork, mouth and turn by published formulas that are
    switched on with inertia and fitted to flow solves; the loop share by solving for equal drops in
    bypass and loop; stages with the effect of their neighbours. Diodicity is reckoned from terms
    that each vanish as the flow slows down, so that Di - 1 is right however small it is.

    Parameters
    ----------
    parameters : ChannelParameters
        Any parameter set; with no stages the drop is that of a straight channel, equal in both directions.
    fluid : FluidState
        Density and viscosity.
    flows_ul_min : float or array, shape (n,)
        Flows, each the same in both directions [uL/min].
    has_stiff_walls : bool
        True where the chip is too stiff to bulge; else ``score`` warns of it at higher pressures.

    Returns
    -------
    Estimate
        Arrays of shape (n,), error bands, validity and notes.

    Raises
    ------
    DesignValueError
        If a flow is not positive and finite.

    Notes
    -----
    Range and errors: see ``core.hydraulics.trust``.
    """
    flows = _checked_flows(flows_ul_min)
    width, depth = parameters.channel_width_um * M_PER_UM, parameters.depth_um * M_PER_UM
    flow_m3_s = flows * M3_S_PER_UL_MIN
    head_pa = fluid.density_kg_m3 * (flow_m3_s / (width * depth)) ** 2
    per_width_pa = flow_m3_s * resistance_pa_s_m3(
        length_m=width, width_m=width, depth_m=depth, viscosity_pa_s=fluid.viscosity_pa_s
    )
    diameter = float(hydraulic_diameter_m(width, depth))
    reynolds = flow_m3_s / (width * depth) * diameter / fluid.kinematic_viscosity_m2_s
    chain = _chain(parameters, inertia=head_pa / per_width_pa, reynolds=reynolds)
    leads = (parameters.lead_in_um + parameters.lead_out_um) / parameters.channel_width_um
    stokes = (leads + chain.stokes) * per_width_pa
    forward = stokes + head_pa * chain.forward_excess
    reverse = forward + head_pa * chain.difference
    rectification = head_pa * chain.difference / forward
    trust = trust_of(parameters, fluid=fluid, reynolds=reynolds, rectification=rectification)
    return Estimate(
        flow_ul_min=flows,
        reynolds=reynolds,
        stokes_pressure_pa=stokes,
        forward_pressure_pa=forward,
        reverse_pressure_pa=reverse,
        diodicity=1.0 + rectification,
        rectification=rectification,
        loop_share_forward=chain.share_forward,
        loop_share_reverse=chain.share_reverse,
        error_band_percent=trust.pressure_percent,
        rectification_band_percent=trust.rectification_percent,
        diodicity_band=trust.rectification,
        valid=trust.valid,
        notes=design_notes(parameters, fluid=fluid),
        parameters=parameters,
        fluid=fluid,
        has_stiff_walls=has_stiff_walls,
    )


def _chain(parameters: ChannelParameters, *, inertia: Floats, reynolds: Floats) -> ChainFlow:
    if parameters.stages == 0:
        zero = np.zeros_like(inertia)
        return ChainFlow(stokes=0.0, forward_excess=zero, difference=zero, share_forward=zero, share_reverse=zero)
    return chain_flow(
        stage_of(parameters),
        stages=parameters.stages,
        gap=parameters.stage_gap_um / parameters.channel_width_um,
        inertia=inertia,
        dean=reynolds * dean_ratio(parameters),
    )


def _checked_flows(flows_ul_min: ArrayLike) -> Floats:
    flows = np.atleast_1d(np.asarray(flows_ul_min, dtype=float))
    bad = ~(np.isfinite(flows) & (flows > 0.0))
    if np.any(bad):
        raise DesignValueError(
            field="flow_ul_min",
            value=float(flows[bad][0]),
            limit="above 0 uL/min",
            way_out="give a positive flow; both directions are always estimated",
        )
    return flows
