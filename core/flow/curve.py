"""Several flows through one domain, each started from the flow before."""

from __future__ import annotations

import time
from dataclasses import dataclass, field, replace
from typing import TYPE_CHECKING

from core.errors import SolveError
from core.flow.ladder import DIRECTIONS, Answer, Climb, Progress, carried_over, prepared
from core.flow.newton import Branch, correct, creeping_branch, follow
from core.flow.quality import Band, first_levels, good_enough, next_level, quality_named
from core.flow.scales import scales
from core.flow.solve import MEMORY_LIMIT_MB, as_result

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    from core.flow.domain import FlowDomain
    from core.flow.problem import FlowProblem
    from core.flow.quality import Level, Quality
    from core.flow.result import FlowResult


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
    """Solve both directions at several flows.

    Parameters
    ----------
    domain : FlowDomain
        Outline, depth, open ends, sections.
    flows_m3_s : sequence of float
        Volume flows [m^3/s], in any order.
    density_kg_m3, viscosity_pa_s : float
        Of the liquid [kg/m^3], [Pa s].
    quality, report, should_stop, memory_limit_mb
        As for ``solve``; the memory limit holds for all processes together.
    processes : int
        Child processes side by side; with 1 all is done in this process. Scripts that ask for more
        must be importable without side effects.

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
    if not len(flows_m3_s):
        raise SolveError("flows_m3_s is empty; give at least one flow")
    liquid = {"density_kg_m3": density_kg_m3, "viscosity_pa_s": viscosity_pa_s, "quality": quality}
    if processes > 1 and len(flows_m3_s) > 1:
        from core.flow.side_by_side import solve_in_processes

        return solve_in_processes(
            solve_curve,
            domain,
            flows_m3_s,
            liquid,
            processes,
            memory_limit_mb=memory_limit_mb,
            report=report,
            should_stop=should_stop,
        )
    began = time.perf_counter()
    wanted = quality_named(quality)
    ascending = sorted(set(flows_m3_s))
    units = [scales(domain, flow_m3_s=q, density_kg_m3=density_kg_m3, viscosity_pa_s=viscosity_pa_s) for q in ascending]
    progress = Progress(len(wanted.steps) * (1 + 2 * len(ascending)), report, should_stop)
    climbs = _climb_all(domain, [unit.width_reynolds for unit in units], wanted, progress, memory_limit_mb)
    share = (time.perf_counter() - began) / len(ascending)
    solved = {}
    for q, unit, ladder in zip(ascending, units, climbs, strict=True):
        result = as_result(domain, unit, ladder, flow_m3_s=q, quality=wanted, began=began, progress=progress)
        solved[q] = replace(result, seconds=share)
    return [solved[q] for q in flows_m3_s]


def _climb_all(
    domain: FlowDomain, reynolds: list[float], quality: Quality, progress: Progress, memory_limit_mb: float
) -> list[Climb]:
    """Return a ladder for every flow; further levels only for the flows that need them."""
    climbs = [Climb(quality) for _ in reynolds]
    for level in first_levels(quality, domain.depth_to_width):
        _add_level(domain, level, climbs, reynolds, quality, progress, memory_limit_mb)
    while True:
        poor = [
            i
            for i, c in enumerate(climbs)
            if c.band is not None and not good_enough(quality, c.band, c.answer.diodicity)
        ]
        if not poor:
            return climbs
        worst = climbs[max(poor, key=lambda i: (climbs[i].band or Band()).diodicity)]
        finest = min((climbs[i].answer.level for i in poor), key=lambda level: (level.size, -level.modes))
        finer = next_level(quality, finest, domain.depth_to_width, worst.by_modes or Band(), worst.by_size or Band())
        if finer is None:
            return climbs
        try:
            _add_level(
                domain,
                finer,
                [climbs[i] for i in poor],
                [reynolds[i] for i in poor],
                quality,
                progress,
                memory_limit_mb,
            )
        except SolveError as error:
            if type(error) is not SolveError:
                raise
            return climbs  # the finer level would not fit; the answers so far stand, with their bands


@dataclass(slots=True)
class _Runner:
    """Follows one direction of one level through ascending flows."""

    problem: FlowProblem
    quality: Quality
    progress: Progress
    branch: Branch | None = None
    lost: bool = False
    text: str = field(default="")

    def to(self, reynolds: float, guess: Callable[[], Branch | None]) -> tuple[Branch, bool]:
        """Return a copy of the solution at a flow, or of the highest reached, and whether it was reached."""

        def pause(now: float) -> None:
            self.progress.tick(f"{self.text}, Reynolds number {now:.3g} on channel width", advance=False)

        if self.branch is None:
            start = guess()
            if start is not None and correct(
                self.problem, start, start.state, start.reynolds, tolerance=self.quality.newton_tolerance, pause=pause
            ):
                self.branch = start
            else:
                self.branch = creeping_branch(self.problem)
        if not self.lost:
            self.lost = not follow(
                self.problem, self.branch, reynolds, tolerance=self.quality.newton_tolerance, pause=pause
            )
        kept = Branch(self.branch.state, self.branch.reynolds, factorisations=self.branch.factorisations)
        return kept, self.branch.reynolds == reynolds


def _add_level(
    domain: FlowDomain,
    level: Level,
    climbs: list[Climb],
    reynolds: list[float],
    quality: Quality,
    progress: Progress,
    memory_limit_mb: float,
) -> None:
    """Solve one level at ascending flows and add each answer to its ladder."""
    base = prepared(domain, level, progress, memory_limit_mb)
    answers = [Answer(level, base.problems, base.memory_mb) for _ in reynolds]
    for direction in DIRECTIONS:
        runner = _Runner(base.problems[direction], quality, progress, text=f"{direction} flow")
        for ladder, answer, target in zip(climbs, answers, reynolds, strict=True):
            progress.tick(f"{direction} flow, triangles of {level.size:.2g} widths, {level.modes} depth modes")
            before = ladder.last

            def guess(before: Answer | None = before, answer: Answer = answer) -> Branch | None:
                return carried_over(before, answer, direction) if before is not None else None  # noqa: B023

            answer.branches[direction], answer.reached[direction] = runner.to(target, guess)
    for ladder, answer in zip(climbs, answers, strict=True):
        if answer.complete or ladder.last is None or not ladder.last.complete:
            ladder.add(answer)
