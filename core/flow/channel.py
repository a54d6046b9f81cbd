"""The flow solve of one channel: from parameters to pressure drops, diodicity, loop shares and fields."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING, Any

import numpy as np

from core.errors import SolveError
from core.flow.chains import ExtendedDrop, extend_settled
from core.flow.channel_places import channel_domain
from core.flow.channel_result import ChannelFlow, FlowPoint
from core.flow.curve import solve_curve
from core.flow.quality import first_levels, quality_named
from core.flow.solve import MEMORY_LIMIT_MB, solve
from core.fluids import ATMOSPHERE_PA
from core.geometry.chain import period
from core.geometry.shape import build_shape
from core.units import M3_S_PER_UL_MIN

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from core.flow.result import DirectionResult, FlowField, FlowResult
    from core.fluids import FluidState
    from core.geometry.shape import ChannelShape
    from core.parameters import ChannelParameters

MOST_STAGES = 9  # solved in full at most; longer chains are extended
_FULL_STAGES = 6  # up to here it does not pay to look for a shorter chain
_FIRST_STAGES = 5  # shortest chain that is extended
_STEPS = 1000  # of a whole solve, as told to the caller
_GAS_SHARE = 0.05  # pressure drop against the atmosphere beyond which a gas is not incompressible


def solve_channel(
    parameters: ChannelParameters,
    *,
    fluid: FluidState,
    flows_ul_min: Sequence[float],
    quality: str = "normal",
    report: Callable[[int, int, str], None] | None = None,
    should_stop: Callable[[], bool] | None = None,
    most_stages: int = MOST_STAGES,
    solved_stages: int | None = None,
    memory_limit_mb: float = MEMORY_LIMIT_MB,
    check_steady: bool = False,
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
        Called as ``report(step, total, text)``; steps are shares of the work.
    should_stop : callable, optional
        Asked often; the solve ends with FlowStopped when it answers True.
    most_stages : int
        Longest chain that is solved in full, at least 5; a longer one is extended from a shorter.
    solved_stages : int or None
        Stages to solve in full if already known, from an earlier solve of the same channel.
    memory_limit_mb : float
        Most memory to use [MB].
    check_steady : bool
        Whether to look for growing disturbances, where there is one flow; costs some seconds.

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
        report=report,
        should_stop=should_stop,
        memory_limit_mb=memory_limit_mb,
        check_steady=check_steady,
    )
    if solved_stages is None:
        solved_stages = job.settled_stages(max(flows), max(most_stages, _FIRST_STAGES))
    points = job.points(flows, solved_stages, quality)
    if report is not None:
        report(_STEPS, _STEPS, "done")
    return ChannelFlow(parameters=parameters, fluid=fluid, points=points, solved_stages=solved_stages)


@dataclass(frozen=True, slots=True)
class _Part:
    """A part of a whole call, from one share of the work to another."""

    begin: float
    end: float
    prefix: str = ""


_SEARCH, _AFTER_SEARCH, _WHOLE = _Part(0.0, 0.3, "looking for settled drops: "), _Part(0.3, 1.0), _Part(0.0, 1.0)


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class _Job:
    """What all solves of one call share."""

    shape: ChannelShape
    fluid: FluidState
    report: Callable[[int, int, str], None] | None
    should_stop: Callable[[], bool] | None
    memory_limit_mb: float
    check_steady: bool
    found: dict[tuple[int, str, float], FlowResult] = field(default_factory=dict)

    def settled_stages(self, flow_ul_min: float, most_stages: int) -> int:
        """Return how many stages must be solved so that the rest follows, found with coarse solves."""
        p = self.shape.parameters
        if p.stages <= min(_FULL_STAGES, most_stages):
            return p.stages
        stages = _FIRST_STAGES + (p.stages - _FIRST_STAGES) % period(p)  # so that its ends look like the whole's
        while stages + 2 <= min(most_stages, p.stages):
            (result,) = self._results([flow_ul_min], stages, "coarse", _SEARCH)
            self.found[stages, "coarse", flow_ul_min] = result
            ends = [
                extend_settled(pressure_pa=each.pressure_pa, bypass_drops_pa=each.bypass_drops_pa, stages=p.stages)
                for each in (result.forward, result.reverse)
                if each.pressure_pa is not None
            ]
            if len(ends) < 2 or all(end.settled for end in ends):  # what fails here fails with more stages as well
                return stages
            stages += 2
        return stages

    def points(self, flows_ul_min: list[float], stages: int, quality: str) -> tuple[FlowPoint, ...]:
        """Return what is found at each flow with so many stages solved in full."""
        part = _WHOLE if stages == self.shape.parameters.stages else _AFTER_SEARCH
        results = self._results(flows_ul_min, stages, quality, part)
        return tuple(self._point(flow, each, stages) for flow, each in zip(flows_ul_min, results, strict=True))

    def _results(self, flows_ul_min: list[float], stages: int, quality: str, part: _Part) -> list[FlowResult]:
        if len(flows_ul_min) == 1 and (known := self.found.get((stages, quality, flows_ul_min[0]))) is not None:
            return [known]  # the search for settled drops has asked the same
        domain = channel_domain(build_shape(replace(self.shape.parameters, stages=stages)))
        works = [
            level.modes**1.5 / level.size**2 for level in first_levels(quality_named(quality), domain.depth_to_width)
        ]
        liquid: dict[str, Any] = {
            "density_kg_m3": self.fluid.density_kg_m3,
            "viscosity_pa_s": self.fluid.viscosity_pa_s,
        }
        control: dict[str, Any] = {
            "quality": quality,
            "report": None if self.report is None else _weighted(self.report, works, len(set(flows_ul_min)), part),
            "should_stop": self.should_stop,
            "memory_limit_mb": self.memory_limit_mb,
        }
        flows = [flow * M3_S_PER_UL_MIN for flow in flows_ul_min]
        if len(flows) == 1:
            is_checked = self.check_steady and part is not _SEARCH
            return [solve(domain, flow_m3_s=flows[0], check_steady=is_checked, **liquid, **control)]
        return solve_curve(domain, flows_m3_s=flows, **liquid, **control)

    def _point(self, flow_ul_min: float, result: FlowResult, solved_stages: int) -> FlowPoint:
        p = self.shape.parameters
        is_extended = p.stages > solved_stages
        forward, reverse = (
            _extended(each, p.stages) if is_extended and each.pressure_pa is not None else None
            for each in (result.forward, result.reverse)
        )
        drops = (_pressure(result.forward, forward), _pressure(result.reverse, reverse))
        notes, is_good = self._trust(result, drops, solved_stages)
        error_percent, diodicity_band = self._bands(result, forward, reverse)
        return FlowPoint(
            flow_ul_min=flow_ul_min,
            reynolds=float(result.reynolds),
            forward_pressure_pa=drops[0],
            reverse_pressure_pa=drops[1],
            loop_shares_forward=_all_shares(result.forward.loop_shares, p.stages, settled_at=1),
            loop_shares_reverse=_all_shares(result.reverse.loop_shares, p.stages, settled_at=solved_stages - 2),
            stage_drops_forward_pa=result.forward.bypass_drops_pa,
            stage_drops_reverse_pa=result.reverse.bypass_drops_pa,
            reached_reynolds_forward=float(result.forward.reached_reynolds),
            reached_reynolds_reverse=float(result.reverse.reached_reynolds),
            error_band_percent=error_percent,
            diodicity_band=diodicity_band,
            valid=bool(result.valid and is_good),
            notes=notes,
            quality=result.quality,
            modes=int(result.modes),
            unknowns=int(result.unknowns),
            solved_stages=solved_stages,
            seconds=result.seconds,
            forward_field=_placed(result.forward, forward, self._forward_shift_um(solved_stages)),
            reverse_field=_placed(result.reverse, reverse, np.zeros(2)),
        )

    def _forward_shift_um(self, solved_stages: int) -> np.ndarray:
        """Return from the inlet of the chain that was solved to that of the whole [um]."""
        short = build_shape(replace(self.shape.parameters, stages=solved_stages)).centreline
        return self.shape.centreline.forward_inlet.point_um - short.forward_inlet.point_um

    def _bands(
        self, result: FlowResult, forward: ExtendedDrop | None, reverse: ExtendedDrop | None
    ) -> tuple[float | None, float | None]:
        """Return the error of the drops [%] and of the diodicity, with what extension and fluid add."""
        if result.error_band_percent is None or result.diodicity_band is None or result.diodicity is None:
            return None, None
        percent, diodicity_band = result.error_band_percent, result.diodicity_band
        if self.shape.parameters.stages == 0:  # a straight channel has no easy direction: what is found of one is error
            diodicity_band = max(diodicity_band, abs(result.diodicity - 1.0))
        if forward is not None and reverse is not None:
            shares = [part.error_pa / part.pressure_pa for part in (forward, reverse)]
            diodicity = reverse.pressure_pa / forward.pressure_pa
            growth = abs(diodicity - 1.0) / max(abs(result.diodicity - 1.0), 1e-9)
            percent += 100.0 * max(shares)
            diodicity_band = diodicity_band * max(growth, 1.0) + diodicity * sum(shares)
        return float(percent + self.fluid.error_percent), float(diodicity_band)

    def _trust(
        self, result: FlowResult, drops: tuple[float | None, float | None], solved_stages: int
    ) -> tuple[tuple[str, ...], bool]:
        """Return the notes, and whether nothing beside the solve itself speaks against the answer."""
        notes, is_good = [*result.notes], True
        if (more := self.shape.parameters.stages - solved_stages) > 0:
            notes.append(
                f"{solved_stages} stages were solved; each of the other {more} is counted with the drop per stage "
                "that had settled, and the error of doing so is in the band"
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


def _weighted(
    report: Callable[[int, int, str], None], works: list[float], flows: int, part: _Part
) -> Callable[[int, int, str], None]:
    """Return a report in shares of the work: a level has one step for its mesh and two for each flow."""
    per_level = 1 + 2 * flows

    def tell(step: int, _total: int, text: str) -> None:
        if text == "done":  # with this part, not with the whole
            return
        level, ticks = divmod(max(step - 1, 0), per_level)
        further = [works[-1]] * max(level + 1 - len(works), 0)  # levels that the tolerance asked for
        known = [*works, *further]
        share = (sum(known[:level]) + known[level] * ticks / per_level) / sum(known)
        report(round(_STEPS * (part.begin + (part.end - part.begin) * share)), _STEPS, part.prefix + text)

    return tell


def _extended(direction: DirectionResult, stages: int) -> ExtendedDrop:
    assert direction.pressure_pa is not None
    return extend_settled(pressure_pa=direction.pressure_pa, bypass_drops_pa=direction.bypass_drops_pa, stages=stages)


def _all_shares(shares: tuple[float, ...], stages: int, *, settled_at: int) -> tuple[float, ...]:
    """Return the loop shares of all stages, those not solved like the one that had settled."""
    more = stages - len(shares)
    return (*shares[:settled_at], *shares[settled_at : settled_at + 1] * more, *shares[settled_at:]) if more else shares


def _pressure(direction: DirectionResult, whole: ExtendedDrop | None) -> float | None:
    return whole.pressure_pa if whole is not None else direction.pressure_pa


def _placed(direction: DirectionResult, whole: ExtendedDrop | None, shift_um: np.ndarray) -> FlowField | None:
    """Return the field where its stages lie in the whole channel, with the pressure there."""
    if direction.field is None or direction.pressure_pa is None:
        return None
    if whole is None:
        return direction.field
    pressure = direction.field.pressure_modes_pa.copy()
    pressure[0] += whole.pressure_pa - direction.pressure_pa
    return replace(direction.field, points_um=direction.field.points_um + shift_um, pressure_modes_pa=pressure)
