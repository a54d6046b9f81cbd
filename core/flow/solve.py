"""Steady flow through a domain in both directions at one volume flow."""

from __future__ import annotations

import time
from typing import TYPE_CHECKING

from core.flow.ladder import DIRECTIONS, Climb, Progress, climb
from core.flow.quality import good_enough, quality_named
from core.flow.readings import direction_result
from core.flow.result import FlowResult
from core.flow.scales import scales

if TYPE_CHECKING:
    from collections.abc import Callable

    from core.flow.domain import FlowDomain
    from core.flow.quality import Quality
    from core.flow.scales import Scales

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
        Most memory to use [MB].
    check_steady : bool
        Whether to look for growing disturbances of both flows; costs a few seconds.

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
    began = time.perf_counter()
    unit = scales(domain, flow_m3_s=flow_m3_s, density_kg_m3=density_kg_m3, viscosity_pa_s=viscosity_pa_s)
    wanted = quality_named(quality)
    progress = Progress(3 * len(wanted.steps) + 1, report, should_stop)
    ladder = climb(domain, unit.width_reynolds, wanted, progress, memory_limit_mb=memory_limit_mb)
    result = as_result(
        domain,
        unit,
        ladder,
        flow_m3_s=flow_m3_s,
        quality=wanted,
        began=began,
        check_steady=check_steady,
        progress=progress,
    )
    progress.tick("done")
    return result


def as_result(
    domain: FlowDomain,
    unit: Scales,
    ladder: Climb,
    *,
    flow_m3_s: float,
    quality: Quality,
    began: float,
    progress: Progress,
    check_steady: bool = False,
) -> FlowResult:
    """Return the last answer of a ladder in units, with bands and notes."""
    last, band = ladder.answer, ladder.band
    notes, steady = _notes(ladder, unit, quality), True
    if check_steady:
        steady, remark = _steadiness(ladder, progress)
        notes.append(remark)
    results = {
        d: direction_result(domain, unit, last.problems[d], last.branches[d], last.reached[d]) for d in DIRECTIONS
    }
    assembler = last.problems["forward"].assembler
    return FlowResult(
        flow_m3_s=flow_m3_s,
        reynolds=unit.reynolds,
        forward=results["forward"],
        reverse=results["reverse"],
        error_band_percent=band.pressure_percent if band else None,
        diodicity_band=band.diodicity if band else None,
        modes=last.level.modes,
        unknowns=int(assembler.layout.size),
        triangles=int(assembler.mesh.t.shape[1]),
        seconds=time.perf_counter() - began,
        memory_mb=ladder.memory_mb,
        quality=quality.name,
        valid=last.complete and steady and band is not None,
        notes=tuple(notes),
    )


def _notes(ladder: Climb, unit: Scales, quality: Quality) -> list[str]:
    last, band = ladder.answer, ladder.band
    notes = [f"flow solve, {last.level.modes} depth modes, triangles of {last.level.size:.2g} channel widths"]
    for direction in DIRECTIONS:
        if not last.reached[direction]:
            top = unit.on_hydraulic_diameter(last.branches[direction].reynolds)
            notes.append(
                f"no steady {direction} flow was found at Reynolds number {unit.reynolds:.4g}; "
                f"the highest reached is {top:.4g}"
            )
    if last.complete and band is None:
        notes.append("no error band: the coarser answer that it is taken from was not found")
    if band and not good_enough(quality, band, last.diodicity):
        notes.append("the tolerance of this quality is not met; see the error band, or choose a finer quality")
    return notes


def _steadiness(ladder: Climb, progress: Progress) -> tuple[bool, str]:
    """Return whether no disturbance of either flow grows, and a sentence that says so."""
    from core.flow.steadiness import growth_rate

    last = ladder.answer
    if not last.complete:
        return False, "growth of disturbances was not looked for because no steady flow was found"
    rates = {}
    for direction in DIRECTIONS:
        progress.tick(f"{direction} flow, growth of disturbances", advance=False)
        rates[direction] = growth_rate(last.problems[direction], last.branches[direction])
    worst = max(rates, key=rates.__getitem__)
    measure = "per channel width travelled at mean speed (leading eigenvalue of the linearised flow)"
    if rates[worst] > 0:
        return (
            False,
            f"the {worst} flow would not stay steady: a small disturbance grows by {rates[worst]:.3g} {measure}",
        )
    return True, f"steady: the most persistent disturbance decays by {-rates[worst]:.3g} {measure}"
