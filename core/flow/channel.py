"""The flow solve of one channel: from parameters to pressure drops, diodicity, loop shares and fields."""

from __future__ import annotations

from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING

import numpy as np

from core.errors import SolveError
from core.flow.chains import extend_settled
from core.flow.channel_places import channel_domain
from core.flow.channel_points import PointMaker
from core.flow.channel_result import ChannelFlow
from core.flow.ladder import Ladder
from core.flow.quality import first_levels, quality_named
from core.flow.solve import MEMORY_LIMIT_MB, solve_on
from core.geometry.chain import period
from core.geometry.shape import build_shape
from core.units import M3_S_PER_UL_MIN

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator, Sequence

    from core.flow.result import FlowResult
    from core.fluids import FluidState
    from core.geometry.shape import ChannelShape
    from core.parameters import ChannelParameters

MOST_STAGES = 9  # solved in full at most; longer chains are extended
_FULL_STAGES = 6  # up to here it does not pay to look for a shorter chain
_FIRST_STAGES = 5  # shortest chain that is extended
_STEPS = 1000  # of a whole solve, as told to the caller
_SEARCH_SHARE = 0.3  # of the work, where it is looked for


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
    processes: int = 1,
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
        Most memory to use, all processes together [MB].
    check_steady : bool
        Whether to look for growing disturbances, where there is one flow; costs some seconds.
    processes : int
        With 2, the directions are solved side by side where that is worth it and the memory allows.
        Scripts that ask for it must be importable without side effects.

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
    (found,) = channel_answers(
        parameters,
        fluid=fluid,
        flows_ul_min=flows_ul_min,
        qualities=(quality,),
        report=report,
        should_stop=should_stop,
        most_stages=most_stages,
        solved_stages=solved_stages,
        memory_limit_mb=memory_limit_mb,
        steady_for=(quality,) if check_steady else (),
        processes=processes,
    )
    return found


def channel_answers(
    parameters: ChannelParameters,
    *,
    fluid: FluidState,
    flows_ul_min: Sequence[float],
    qualities: Sequence[str] = ("coarse", "normal"),
    report: Callable[[int, int, str], None] | None = None,
    should_stop: Callable[[], bool] | None = None,
    most_stages: int = MOST_STAGES,
    solved_stages: int | None = None,
    memory_limit_mb: float = MEMORY_LIMIT_MB,
    steady_for: Sequence[str] = (),
    processes: int = 1,
) -> Iterator[ChannelFlow]:
    """Solve a channel at one quality after another, each begun where the last one ended.

    Costs hardly more than the best of them alone. Parameters are those of ``solve_channel``, but for

    Parameters
    ----------
    qualities : sequence of str
        The coarsest first.
    report : callable, optional
        Called as ``report(step, total, text)``; steps are shares of the work for all qualities.
    steady_for : sequence of str
        Qualities at which to look for growing disturbances, where there is one flow.

    Yields
    ------
    ChannelFlow
        One for each quality.
    """
    flows = _checked_flows(flows_ul_min)
    shape = build_shape(parameters)
    channel_domain(shape)  # refuses an unusable shape before any work
    job = _Job(shape, fluid, _Shares(report), should_stop, memory_limit_mb, processes)
    points = PointMaker(shape, fluid)
    try:
        if solved_stages is None:
            solved_stages = job.settled_stages(max(flows), max(most_stages, _FIRST_STAGES))
        job.plan(qualities, solved_stages, len(set(flows)))
        for quality in qualities:
            is_checked = quality in steady_for and len(flows) == 1
            results = job.results(flows, solved_stages, quality, check_steady=is_checked)
            if report is not None and quality == qualities[-1]:
                report(_STEPS, _STEPS, "done")
            yield ChannelFlow(
                parameters=parameters,
                fluid=fluid,
                points=tuple(points.point(q, each, solved_stages) for q, each in zip(flows, results, strict=True)),
                solved_stages=solved_stages,
            )
    finally:
        job.end()


@dataclass(slots=True, eq=False)
class _Shares:
    """Progress of all solves of one call in shares of the work.

    Attributes
    ----------
    report : callable or None
        Told ``(step, total, text)``.
    begin, end : float
        Part of the whole that the next solve takes.
    """

    report: Callable[[int, int, str], None] | None
    begin: float = 0.0
    end: float = _SEARCH_SHARE
    prefix: str = "looking for settled drops: "
    told: int = 0

    def of(self, quality: str, depth_to_width: float, flows: int) -> Callable[[int, int, str], None] | None:
        """Return what a solve is to report to: a level has one step for its mesh and two for each flow."""
        if self.report is None:
            return None
        report, per_level, works = self.report, 1 + 2 * flows, _works(quality, depth_to_width)

        def tell(step: int, _total: int, text: str) -> None:
            if text == "done":  # with this part, not with the whole
                return
            level, ticks = divmod(max(step - 1, 0), per_level)
            known = [*works, *[works[-1]] * max(level + 1 - len(works), 0)]  # levels that the tolerance asked for
            share = (sum(known[:level]) + known[level] * ticks / per_level) / sum(known)
            self.told = max(self.told, round(_STEPS * (self.begin + (self.end - self.begin) * share)))
            report(self.told, _STEPS, self.prefix + text)

        return tell


@dataclass(slots=True, eq=False)
class _Job:
    """What all solves of one call share."""

    shape: ChannelShape
    fluid: FluidState
    shares: _Shares
    should_stop: Callable[[], bool] | None
    memory_limit_mb: float
    processes: int
    ladder: Ladder | None = None
    stages: int = -1
    ends: dict[str, float] = field(default_factory=dict)

    def settled_stages(self, flow_ul_min: float, most_stages: int) -> int:
        """Return how many stages must be solved so that the rest follows, found with coarse solves."""
        p = self.shape.parameters
        if p.stages <= min(_FULL_STAGES, most_stages):
            return p.stages
        stages = _FIRST_STAGES + (p.stages - _FIRST_STAGES) % period(p)  # so that its ends look like the whole's
        while stages + 2 <= min(most_stages, p.stages):
            (result,) = self.results([flow_ul_min], stages, "coarse")
            ends = [
                extend_settled(pressure_pa=each.pressure_pa, bypass_drops_pa=each.bypass_drops_pa, stages=p.stages)
                for each in (result.forward, result.reverse)
                if each.pressure_pa is not None
            ]
            if len(ends) < 2 or all(end.settled for end in ends):  # what fails here fails with more stages as well
                return stages
            stages += 2
        return stages

    def plan(self, qualities: Sequence[str], stages: int, flows: int) -> None:
        """Share out what is left of the work among the qualities."""
        depth = self.shape.parameters.depth_um / self.shape.parameters.channel_width_um
        works = np.cumsum([sum(_works(quality, depth)) for quality in qualities])
        first = 0.0 if self.ladder is None else _SEARCH_SHARE
        self.ends = {q: first + (1 - first) * float(w / works[-1]) for q, w in zip(qualities, works, strict=True)}
        self.shares.end = first

    def results(
        self, flows_ul_min: list[float], stages: int, quality: str, *, check_steady: bool = False
    ) -> list[FlowResult]:
        """Return the results of a chain of so many stages."""
        if self.ladder is None or stages != self.stages:
            self.end()
            domain = channel_domain(build_shape(replace(self.shape.parameters, stages=stages)))
            self.ladder = Ladder(domain, memory_limit_mb=self.memory_limit_mb, processes=self.processes)
            self.stages = stages
        if self.ends:
            self.shares.begin, self.shares.end, self.shares.prefix = self.shares.end, self.ends[quality], ""
        return solve_on(
            self.ladder,
            flows_m3_s=[flow * M3_S_PER_UL_MIN for flow in flows_ul_min],
            density_kg_m3=self.fluid.density_kg_m3,
            viscosity_pa_s=self.fluid.viscosity_pa_s,
            quality=quality,
            report=self.shares.of(quality, self.ladder.domain.depth_to_width, len(set(flows_ul_min))),
            should_stop=self.should_stop,
            check_steady=check_steady,
        )

    def end(self) -> None:
        """Leave no process behind."""
        if self.ladder is not None:
            self.ladder.end()


def _checked_flows(flows_ul_min: Sequence[float]) -> list[float]:
    flows = [float(flow) for flow in flows_ul_min]
    if not flows:
        raise SolveError("no flow is given; give at least one in flow_ul_min")
    for flow in flows:
        if not 0.0 < flow < float("inf"):
            raise SolveError(f"flow_ul_min is {flow:g}; it must be positive and finite")
    return flows


def _works(quality: str, depth_to_width: float) -> list[float]:
    """Return how much work each level of a quality is, against one another."""
    return [level.modes**1.5 / level.size**2 for level in first_levels(quality_named(quality), depth_to_width)]
