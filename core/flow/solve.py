"""Steady flow through a domain in both directions, at one volume flow or several."""

from __future__ import annotations

import time
from typing import TYPE_CHECKING

from core.errors import SolveError
from core.flow.ladder import Ladder, Progress
from core.flow.quality import quality_named
from core.flow.reporting import as_result
from core.flow.scales import scales
from core.flow.threads import one_thread

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from core.flow.domain import FlowDomain
    from core.flow.result import FlowResult

MEMORY_LIMIT_MB = 4000.0


def solve(
    domain: FlowDomain,
    *,
    flow_m3_s: float,
    density_kg_m3: float,
    viscosity_pa_s: float,
    quality: str = "normal",
    report: Callable[[int, int, str], None] | None = None,
    should_stop: Callable[[], bool] | None = None,
    memory_limit_mb: float = MEMORY_LIMIT_MB,
    check_steady: bool = False,
    processes: int = 1,
) -> FlowResult:
    """Solve steady laminar flow forward and reverse at one volume flow.

    Parameters
    ----------
    domain : FlowDomain
        Outline, depth, open ends, sections.
    flow_m3_s : float
        Volume flow [m^3/s].
    density_kg_m3 : float
        Density [kg/m^3].
    viscosity_pa_s : float
        Dynamic viscosity [Pa s].
    quality : str
        'coarse', 'normal' or 'fine'.
    report : callable, optional
        Called as ``report(step, total, text)``.
    should_stop : callable, optional
        Asked between steps; the solve ends with FlowStopped when it answers True.
    memory_limit_mb : float
        Most memory to use [MB], all processes together.
    check_steady : bool
        Whether to look for growing disturbances of both flows; costs a few seconds.
    processes : int
        With 2, the directions are solved side by side as far as the memory allows. Scripts that ask for
        it must be importable without side effects.

    Returns
    -------
    FlowResult
        Not valid, with None for a pressure, where no steady flow was found.

    Raises
    ------
    SolveError
        If the outline cannot be meshed or the solve would not fit the memory.
    FlowStopped
        If ``should_stop`` answered True.

    Notes
    -----
    Validity: rigid walls, one incompressible Newtonian liquid, steady flow, leads long enough for
    developed flow at the ends. Source of the depth expansion: derived here; compare Ding, Wang and
    Roper, arXiv 2511.03956.
    """
    with Ladder(domain, memory_limit_mb=memory_limit_mb, processes=processes) as ladder:
        (result,) = solve_on(
            ladder,
            flows_m3_s=[flow_m3_s],
            density_kg_m3=density_kg_m3,
            viscosity_pa_s=viscosity_pa_s,
            quality=quality,
            report=report,
            should_stop=should_stop,
            check_steady=check_steady,
        )
    return result


def solve_curve(
    domain: FlowDomain,
    *,
    flows_m3_s: Sequence[float],
    density_kg_m3: float,
    viscosity_pa_s: float,
    quality: str = "normal",
    report: Callable[[int, int, str], None] | None = None,
    should_stop: Callable[[], bool] | None = None,
    memory_limit_mb: float = MEMORY_LIMIT_MB,
    processes: int = 1,
) -> list[FlowResult]:
    """Solve both directions at several flows, each started from the flow before.

    Parameters
    ----------
    domain : FlowDomain
        Outline, depth, open ends, sections.
    flows_m3_s : sequence of float
        Volume flows [m^3/s], in any order.
    density_kg_m3, viscosity_pa_s : float
        Of the liquid [kg/m^3], [Pa s].
    quality, report, should_stop, memory_limit_mb, processes
        As for ``solve``.

    Returns
    -------
    list of FlowResult
        In the order of ``flows_m3_s``. Beyond the highest flow with a steady answer the results are
        not valid and say how far the branch went.

    Raises
    ------
    SolveError
        As for ``solve``, or if no flow is given.
    FlowStopped
        If ``should_stop`` answered True.
    """
    with Ladder(domain, memory_limit_mb=memory_limit_mb, processes=processes) as ladder:
        return solve_on(
            ladder,
            flows_m3_s=flows_m3_s,
            density_kg_m3=density_kg_m3,
            viscosity_pa_s=viscosity_pa_s,
            quality=quality,
            report=report,
            should_stop=should_stop,
        )


def solve_on(
    ladder: Ladder,
    *,
    flows_m3_s: Sequence[float],
    density_kg_m3: float,
    viscosity_pa_s: float,
    quality: str,
    report: Callable[[int, int, str], None] | None = None,
    should_stop: Callable[[], bool] | None = None,
    check_steady: bool = False,
) -> list[FlowResult]:
    """Solve several flows on a ladder; what it knows from a coarser quality is used.

    Parameters and results are those of ``solve_curve``.
    """
    if not len(flows_m3_s):
        raise SolveError("flows_m3_s is empty; give at least one flow")
    began, wanted, ascending = time.perf_counter(), quality_named(quality), sorted(set(flows_m3_s))
    liquid = {"density_kg_m3": density_kg_m3, "viscosity_pa_s": viscosity_pa_s}
    units = [scales(ladder.domain, flow_m3_s=flow, **liquid) for flow in ascending]
    progress = Progress(len(wanted.steps) * (1 + 2 * len(ascending)) + 1, report, should_stop)
    solved = {}
    with one_thread():
        climbs = ladder.climb([unit.width_reynolds for unit in units], wanted, progress)
        for flow, unit, climb in zip(ascending, units, climbs, strict=True):
            share = (time.perf_counter() - began) / len(ascending)
            solved[flow] = as_result(
                ladder, climb, unit, flow_m3_s=flow, seconds=share, progress=progress, check_steady=check_steady
            )
    progress.tick("done")
    return [solved[flow] for flow in flows_m3_s]
