"""What a ladder found, in units, with error bands, and notes that say how far it can be trusted."""

from __future__ import annotations

from typing import TYPE_CHECKING

from core.flow.ladder import DIRECTIONS
from core.flow.quality import good_enough
from core.flow.readings import direction_result
from core.flow.result import FlowResult

if TYPE_CHECKING:
    from core.flow.ladder import Answer, Climb, Ladder, Progress
    from core.flow.problem import FlowProblem
    from core.flow.scales import Scales


def as_result(
    ladder: Ladder,
    climb: Climb,
    unit: Scales,
    *,
    flow_m3_s: float,
    seconds: float,
    progress: Progress,
    check_steady: bool = False,
) -> FlowResult:
    """Return the last answer of a climb in units, with bands and notes.

    Parameters
    ----------
    ladder, climb : Ladder, Climb
        What was solved, and the answers at this flow.
    unit : Scales
        Of the solve.
    flow_m3_s, seconds : float
        Volume flow [m^3/s], wall time [s].
    progress : Progress
        Told when disturbances are looked for.
    check_steady : bool
        Whether to look for growing disturbances.
    """
    last, band = climb.answer, climb.band
    problems = ladder.levels.at(last.level).problems
    notes, steady = _notes(climb, unit), True
    if check_steady:
        steady, remark = _steadiness(problems, last, progress)
        notes.append(remark)
    results = {
        d: direction_result(ladder.domain, unit, problems[d], last.found[d].branch, last.found[d].reached)
        for d in DIRECTIONS
    }
    assembler = problems["forward"].assembler
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
        seconds=seconds,
        memory_mb=max(each.memory_mb for each in climb.answers),
        quality=climb.quality.name,
        valid=last.complete and steady and band is not None,
        notes=tuple(notes),
    )


def _notes(climb: Climb, unit: Scales) -> list[str]:
    last, band = climb.answer, climb.band
    notes = [f"flow solve, {last.level.modes} depth modes, triangles of {last.level.size:.2g} channel widths"]
    for direction in DIRECTIONS:
        if not last.found[direction].reached:
            top = unit.on_hydraulic_diameter(last.found[direction].branch.reynolds)
            notes.append(
                f"no steady {direction} flow was found at Reynolds number {unit.reynolds:.4g}; "
                f"the highest reached is {top:.4g}"
            )
    if last.complete and band is None:
        notes.append("no error band: the coarser answer that it is taken from was not found")
    if band and not good_enough(climb.quality, band, last.diodicity):
        notes.append("the tolerance of this quality is not met; see the error band, or choose a finer quality")
    return notes


def _steadiness(problems: dict[str, FlowProblem], last: Answer, progress: Progress) -> tuple[bool, str]:
    """Return whether no disturbance of either flow grows, and a sentence that says so."""
    from core.flow.steadiness import growth_rate

    if not last.complete:
        return False, "growth of disturbances was not looked for because no steady flow was found"
    rates = {}
    for direction in DIRECTIONS:
        progress.tick(f"{direction} flow, growth of disturbances", advance=False)
        rates[direction] = growth_rate(problems[direction], last.found[direction].branch)
    worst = max(rates, key=rates.__getitem__)
    measure = "per channel width travelled at mean speed (leading eigenvalue of the linearised flow)"
    if rates[worst] > 0:
        return (
            False,
            f"the {worst} flow would not stay steady: a small disturbance grows by {rates[worst]:.3g} {measure}",
        )
    return True, f"steady: the most persistent disturbance decays by {-rates[worst]:.3g} {measure}"
