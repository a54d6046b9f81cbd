"""The flow solve of one channel: from parameters to pressure drops, diodicity, loop shares and fields."""

from __future__ import annotations

from dataclasses import dataclass, replace
from typing import TYPE_CHECKING

from core.errors import SolveError
from core.findings import Severity
from core.flow.chain import (
    SETTLED_SHARE,
    Ladder,
    Lengthened,
    Meter,
    lengthened,
    unsettled_share,
    work_of_flows,
)
from core.flow.channel_result import ChannelFlow, FlowPoint
from core.flow.domain import FlowDomain
from core.flow.quality import quality_named
from core.flow.solve import MEMORY_LIMIT_MB
from core.fluids import ATMOSPHERE_PA
from core.geometry.shape import build_shape, period
from core.units import M3_S_PER_UL_MIN

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator, Sequence

    from core.flow.result import DirectionResult, FlowField, FlowResult
    from core.fluids import FluidState
    from core.geometry.shape import ChannelShape
    from core.parameters import ChannelParameters

MOST_STAGES = 9  # solved in full at most; longer chains are lengthened
_FULL_STAGES = 6  # up to here it does not pay to look for a shorter chain
_FIRST_STAGES = 5  # shortest chain that is lengthened
_SAGITTA_SHARE = 5e-4  # of the channel width; far below what any mesh of the solve resolves
_GAS_SHARE = 0.05  # pressure drop against the atmosphere beyond which a gas is not incompressible


def channel_domain(shape: ChannelShape, *, sagitta_um: float | None = None) -> FlowDomain:
    """Return the region of liquid of a channel, ready to be solved.

    Parameters
    ----------
    shape : ChannelShape
        With an outline.
    sagitta_um : float or None
        Largest distance between an arc and its chords [um]; None for one that no mesh resolves.

    Returns
    -------
    FlowDomain
        The very outline that is drawn and written to masks, with its open ends and one pair of
        measuring sections per stage.

    Raises
    ------
    SolveError
        If the shape has no outline; names the finding.
    """
    if shape.outline is None:
        errors = [finding.message for finding in shape.findings if finding.severity is Severity.ERROR]
        raise SolveError(f"there is no outline to solve: {errors[0] if errors else 'see the findings of the shape'}")
    p, line = shape.parameters, shape.centreline
    sagitta = _SAGITTA_SHARE * p.channel_width_um if sagitta_um is None else sagitta_um
    return FlowDomain(
        outer_um=shape.outline.outer.chords(sagitta_um=sagitta),
        islands_um=tuple(island.chords(sagitta_um=sagitta) for island in shape.outline.islands),
        depth_um=p.depth_um,
        channel_width_um=p.channel_width_um,
        forward_inlet_um=line.forward_inlet.section_um,
        forward_outlet_um=line.forward_outlet.section_um,
        sections=tuple((place.bypass_section_um, place.loop_section_um) for place in line.stages),
    )


def solve_channel(
    parameters: ChannelParameters,
    *,
    fluid: FluidState,
    flows_ul_min: Sequence[float],
    quality: str = "normal",
    report: Callable[[int, int, str], None] | None = None,
    should_stop: Callable[[], bool] | None = None,
    on_point: Callable[[FlowPoint], None] | None = None,
    most_stages: int = MOST_STAGES,
    solved_stages: int | None = None,
    memory_limit_mb: float = MEMORY_LIMIT_MB,
) -> ChannelFlow:
    """Solve the steady flow through a channel, forward and reverse, at one flow or several.

    Parameters
    ----------
    parameters : ChannelParameters
        Any set whose shape has an outline.
    fluid : FluidState
        Density and viscosity.
    flows_ul_min : sequence of float
        Flows, each the same in both directions [uL/min].
    quality : str
        'coarse', 'normal' or 'fine'.
    report : callable, optional
        Called as ``report(step, total, text)``; the steps are equal shares of the work.
    should_stop : callable, optional
        Asked often; the solve ends with FlowStopped when it answers True.
    on_point : callable, optional
        Called with each point as soon as it is known; the fastest flow comes first.
    most_stages : int
        Longest chain that is solved in full, at least 5; a longer one is lengthened from a shorter.
    solved_stages : int or None
        Stages to solve in full if already known, from an earlier solve of the same channel.
    memory_limit_mb : float
        Most memory to use [MB].

    Returns
    -------
    ChannelFlow

    Raises
    ------
    SolveError
        If there is no outline, a flow is not positive, or the solve would not fit the memory.
    FlowStopped
        If ``should_stop`` answered True.

    Notes
    -----
    Validity: rigid walls, one incompressible Newtonian fluid, steady laminar flow that enters
    developed. The cost does not grow with the number of stages beyond ``most_stages``.
    """
    flows = _checked_flows(flows_ul_min)
    shape = build_shape(parameters)
    channel_domain(shape)  # refuses an unusable shape before any work
    job = _Job(
        shape=shape,
        fluid=fluid,
        quality=quality,
        report=report,
        should_stop=should_stop,
        memory_limit_mb=memory_limit_mb,
    )
    if solved_stages is None:
        solved_stages = job.settled_stages(max(flows), max(most_stages, _FIRST_STAGES))
    found: dict[float, FlowPoint] = {}
    for point in job.points(sorted(set(flows), reverse=True), solved_stages):
        found[point.flow_ul_min] = point
        if on_point is not None:
            on_point(point)
    if report is not None:
        report(1, 1, "done")
    return ChannelFlow(
        parameters=parameters, fluid=fluid, points=tuple(found[flow] for flow in flows), solved_stages=solved_stages
    )


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Job:
    """One call of ``solve_channel``."""

    shape: ChannelShape
    fluid: FluidState
    quality: str
    report: Callable[[int, int, str], None] | None
    should_stop: Callable[[], bool] | None
    memory_limit_mb: float

    def settled_stages(self, flow_ul_min: float, most_stages: int) -> int:
        """Return how many stages must be solved so that the rest follows, found with coarse solves."""
        p = self.shape.parameters
        if p.stages <= min(_FULL_STAGES, most_stages):
            return p.stages
        stages = _FIRST_STAGES + (p.stages - _FIRST_STAGES) % period(p)  # so that its ends look like the whole's
        while stages + 2 <= min(most_stages, p.stages):
            ladder = self._ladder(stages, "coarse", 1, f"looking for settled drops, {stages} stages: ")
            result = ladder.result(flow_ul_min * M3_S_PER_UL_MIN)
            if result.diodicity is None:  # it will fail with more stages as well
                return stages
            if max(unsettled_share(result.forward), unsettled_share(result.reverse)) <= SETTLED_SHARE:
                return stages
            stages += 2
        return stages

    def points(self, falling_flows_ul_min: Sequence[float], solved_stages: int) -> Iterator[FlowPoint]:
        """Yield the flows from the fastest down, each started from the one before."""
        ladder = self._ladder(solved_stages, self.quality, len(falling_flows_ul_min), "")
        for flow in falling_flows_ul_min:
            result = ladder.result(flow * M3_S_PER_UL_MIN)
            yield self._point(flow, result, solved_stages)

    def _ladder(self, stages: int, quality: str, flows: int, prefix: str) -> Ladder:
        domain = channel_domain(build_shape(replace(self.shape.parameters, stages=stages)))
        wanted = quality_named(quality)
        work = work_of_flows(wanted, domain.depth_to_width, stages=stages, flows=flows)
        meter = Meter(work, self.report, self.should_stop)
        meter.prefix = prefix
        return Ladder(
            domain,
            density_kg_m3=self.fluid.density_kg_m3,
            viscosity_pa_s=self.fluid.viscosity_pa_s,
            quality=wanted,
            meter=meter,
            memory_limit_mb=self.memory_limit_mb,
        )

    def _point(self, flow_ul_min: float, result: FlowResult, solved_stages: int) -> FlowPoint:
        p = self.shape.parameters
        whole = {
            name: lengthened(direction, stages=p.stages, is_forward=name == "forward")
            if direction.pressure_pa is not None and p.stages > solved_stages
            else None
            for name, direction in (("forward", result.forward), ("reverse", result.reverse))
        }
        forward, reverse = whole["forward"], whole["reverse"]
        drops = (_pressure(result.forward, forward), _pressure(result.reverse, reverse))
        notes, is_good = self._trust(result, drops, solved_stages)
        error_percent, diodicity_band = self._bands(result, forward, reverse)
        shift = None
        if p.stages > solved_stages:
            short = build_shape(replace(p, stages=solved_stages)).centreline
            shift = self.shape.centreline.forward_inlet.point_um - short.forward_inlet.point_um
        return FlowPoint(
            flow_ul_min=flow_ul_min,
            reynolds=result.reynolds,
            forward_pressure_pa=drops[0],
            reverse_pressure_pa=drops[1],
            loop_shares_forward=forward.loop_shares if forward else result.forward.loop_shares,
            loop_shares_reverse=reverse.loop_shares if reverse else result.reverse.loop_shares,
            stage_drops_forward_pa=result.forward.bypass_drops_pa,
            stage_drops_reverse_pa=result.reverse.bypass_drops_pa,
            reached_reynolds_forward=float(result.forward.reached_reynolds),
            reached_reynolds_reverse=float(result.reverse.reached_reynolds),
            error_band_percent=error_percent,
            diodicity_band=diodicity_band,
            valid=result.valid and is_good,
            notes=notes,
            quality=self.quality,
            modes=int(result.modes),
            unknowns=int(result.unknowns),
            solved_stages=solved_stages,
            seconds=result.seconds,
            forward_field=_placed(result.forward, forward, shift),
            reverse_field=_placed(result.reverse, reverse, None),
        )

    def _bands(
        self, result: FlowResult, forward: Lengthened | None, reverse: Lengthened | None
    ) -> tuple[float | None, float | None]:
        """Return the error of the drops [%] and of the diodicity, with what lengthening and fluid add."""
        if result.error_band_percent is None or result.diodicity_band is None or result.diodicity is None:
            return None, None
        percent, diodicity_band = result.error_band_percent, result.diodicity_band
        if forward is not None and reverse is not None:
            shares = [part.error_pa / part.pressure_pa for part in (forward, reverse)]
            diodicity = reverse.pressure_pa / forward.pressure_pa
            growth = abs(diodicity - 1.0) / max(abs(result.diodicity - 1.0), 1e-9)
            percent += 100.0 * max(shares)
            diodicity_band = diodicity_band * max(growth, 1.0) + diodicity * sum(shares)
        return percent + self.fluid.error_percent, diodicity_band

    def _trust(
        self, result: FlowResult, drops: tuple[float | None, float | None], solved_stages: int
    ) -> tuple[tuple[str, ...], bool]:
        """Return the notes, and whether nothing beside the solve itself speaks against the answer."""
        notes, is_good = [*result.notes], True
        if self.shape.parameters.stages > solved_stages:
            more = self.shape.parameters.stages - solved_stages
            notes.append(
                f"{solved_stages} stages were solved; each of the other {more} is counted with the drop per stage "
                "that had settled, with its error in the band"
            )
        highest = max((drop for drop in drops if drop is not None), default=0.0)
        if self.fluid.is_gas and highest > _GAS_SHARE * ATMOSPHERE_PA:
            is_good = False
            notes.append(
                f"a gas is solved as incompressible, which holds up to {_GAS_SHARE * ATMOSPHERE_PA / 1000:.0f} kPa; "
                f"the drop is {highest / 1000:.3g} kPa; lower flow_ul_min"
            )
        return (*notes, *self.fluid.notes), is_good


def _checked_flows(flows_ul_min: Sequence[float]) -> list[float]:
    flows = [float(flow) for flow in flows_ul_min]
    if not flows:
        raise SolveError("no flow is given; give at least one in flow_ul_min")
    for flow in flows:
        if not 0.0 < flow < float("inf"):
            raise SolveError(f"flow_ul_min is {flow:g}; it must be positive and finite")
    return flows


def _pressure(direction: DirectionResult, whole: Lengthened | None) -> float | None:
    return whole.pressure_pa if whole is not None else direction.pressure_pa


def _placed(direction: DirectionResult, whole: Lengthened | None, shift_um: object) -> FlowField | None:
    """Return the field where its stages lie in the whole channel, with the pressure there."""
    field = direction.field
    if field is None or direction.pressure_pa is None or whole is None:
        return field if direction.pressure_pa is not None else None
    pressure = field.pressure_modes_pa.copy()
    pressure[0] += whole.added_pa
    points = field.points_um if shift_um is None else field.points_um + shift_um
    return replace(field, points_um=points, pressure_modes_pa=pressure)
