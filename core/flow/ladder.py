"""Both directions solved on finer and finer levels, each started from the one before."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from core.flow.newton import Branch, FlowStopped, correct, creeping_branch, follow
from core.flow.quality import (
    Band,
    band_of_step,
    check_memory,
    check_size,
    first_levels,
    good_enough,
    least_band,
    needed_memory_mb,
    next_level,
)

if TYPE_CHECKING:
    from collections.abc import Callable

    from core.flow.domain import FlowDomain
    from core.flow.problem import FlowProblem
    from core.flow.quality import Level, Quality

DIRECTIONS = ("forward", "reverse")


class Progress:
    """Tells the caller how far a solve is, and asks whether to stop.

    Parameters
    ----------
    total : int
        Steps expected.
    report : callable or None
        Called as ``report(step, total, text)``.
    should_stop : callable or None
        Answers True to stop.
    """

    def __init__(
        self, total: int, report: Callable[[int, int, str], None] | None, should_stop: Callable[[], bool] | None
    ) -> None:
        self._step, self._total, self._report, self._should_stop = 0, total, report, should_stop

    def tick(self, text: str, *, advance: bool = True) -> None:
        """Report one step; raises FlowStopped if the caller wants to stop."""
        if self._should_stop is not None and self._should_stop():
            raise FlowStopped("the flow solve was stopped")
        if advance:
            self._step += 1
            self._total = max(self._total, self._step)
        if self._report is not None:
            self._report(self._step, self._total, text)


@dataclass(slots=True, eq=False)
class Answer:
    """Both directions on one level.

    Attributes
    ----------
    level : Level
    problems : dict of FlowProblem
        By direction.
    memory_mb : float
        Estimated need [MB].
    branches : dict of Branch
        Solution of each direction, at the flow asked for or the highest reached.
    reached : dict of bool
        Whether the flow asked for was reached.
    """

    level: Level
    problems: dict[str, FlowProblem]
    memory_mb: float
    branches: dict[str, Branch] = field(default_factory=dict)
    reached: dict[str, bool] = field(default_factory=dict)

    def drop(self, direction: str) -> float:
        """Return a pressure drop in units of the solve."""
        branch = self.branches[direction]
        return float(self.problems[direction].pressure_drop(branch.state, branch.reynolds))

    @property
    def complete(self) -> bool:
        """Whether both directions reached the flow asked for."""
        return all(self.reached.values())

    @property
    def diodicity(self) -> float:
        """Reverse over forward drop."""
        return self.drop("reverse") / self.drop("forward")


@dataclass(slots=True)
class Climb:
    """The answers of a ladder so far, and the errors left by modes and by mesh.

    Attributes
    ----------
    quality : Quality
    last : Answer or None
    by_modes, by_size : Band or None
        None as long as nothing is known.
    memory_mb : float
        Largest need of a level so far.
    """

    quality: Quality
    last: Answer | None = None
    by_modes: Band | None = None
    by_size: Band | None = None
    memory_mb: float = 0.0

    @property
    def answer(self) -> Answer:
        """The last answer; there is one as soon as a level has been solved."""
        if self.last is None:
            raise AssertionError("no level of the ladder has been solved")
        return self.last

    @property
    def band(self) -> Band | None:
        """Error of the last answer, or None if no two answers can be compared."""
        if self.last is None or not self.last.complete or (self.by_modes is None and self.by_size is None):
            return None
        least = least_band(self.quality, self.last.diodicity, self.last.branches["forward"].reynolds)
        return (self.by_modes or Band()) + (self.by_size or Band()) + least

    def add(self, answer: Answer) -> None:
        """Take the next answer and compare it with the one before."""
        before, self.last = self.last, answer
        self.memory_mb = max(self.memory_mb, answer.memory_mb)
        if before is None or not (before.complete and answer.complete):
            return
        drops = [(before.drop(d), answer.drop(d)) for d in DIRECTIONS]
        band = band_of_step(before.level, answer.level, drops, (before.diodicity, answer.diodicity))
        if before.level.size == answer.level.size:
            self.by_modes = band
        else:
            self.by_size = band


def climb(
    domain: FlowDomain, reynolds: float, quality: Quality, progress: Progress, *, memory_limit_mb: float
) -> Climb:
    """Solve levels until the tolerance is met, the ladder ends, or a flow cannot be reached twice.

    Parameters
    ----------
    domain : FlowDomain
    reynolds : float
        On channel width.
    quality : Quality
    progress : Progress
    memory_limit_mb : float
        Most memory to use [MB]; levels beyond the first ones are left out rather than refused.

    Returns
    -------
    Climb

    Raises
    ------
    SolveError
        If the domain cannot be meshed or its first levels do not fit the memory.
    FlowStopped
        If the caller stopped.
    """
    state, misses = Climb(quality), 0
    for level in first_levels(quality, domain.depth_to_width):
        state.add(solve_level(domain, level, state.last, reynolds, quality, progress, memory_limit_mb))
        misses = 0 if state.answer.complete else misses + 1
        if misses == 2:
            return state
    while state.band is not None and not good_enough(quality, state.band, state.answer.diodicity):
        finer = next_level(
            quality, state.answer.level, domain.depth_to_width, state.by_modes or Band(), state.by_size or Band()
        )
        if finer is None or _too_large(state.answer, finer, memory_limit_mb):
            break
        answer = solve_level(domain, finer, state.last, reynolds, quality, progress, memory_limit_mb)
        if not answer.complete:
            break
        state.add(answer)
    return state


def _too_large(last: Answer, level: Level, memory_limit_mb: float) -> bool:
    growth = ((last.level.size / level.size) * (level.modes / last.level.modes)) ** 2
    return last.memory_mb * growth > memory_limit_mb


def solve_level(
    domain: FlowDomain,
    level: Level,
    before: Answer | None,
    reynolds: float,
    quality: Quality,
    progress: Progress,
    memory_limit_mb: float,
) -> Answer:
    """Return the answer of one level, started from a coarser one where there is one."""
    answer = prepared(domain, level, progress, memory_limit_mb)
    for direction in DIRECTIONS:
        progress.tick(f"{direction} flow, triangles of {level.size:.2g} widths, {level.modes} depth modes")
        _solve_direction(answer, before, direction, reynolds, quality.newton_tolerance, progress)
    return answer


def prepared(domain: FlowDomain, level: Level, progress: Progress, memory_limit_mb: float) -> Answer:
    """Return a level with its mesh and equations, not yet solved."""
    from core.flow.assembly import Assembler
    from core.flow.mesh import channel_mesh, plan_for_depth
    from core.flow.modes import depth_tensors
    from core.flow.problem import both_directions

    check_size(domain, level, memory_limit_mb)
    progress.tick(f"meshing, triangles of {level.size:.2g} widths")
    mesh = channel_mesh(domain, plan_for_depth(level.size, domain.depth_to_width))
    assembler = Assembler(mesh, depth_tensors(level.modes, domain.depth_to_width))
    problems = both_directions(assembler)
    memory = needed_memory_mb(max(p.fill for p in problems.values()), assembler.layout.size)
    check_memory(memory, domain.stages, memory_limit_mb)
    return Answer(level, problems, memory)


def _solve_direction(
    answer: Answer, before: Answer | None, direction: str, reynolds: float, tolerance: float, progress: Progress
) -> None:
    problem = answer.problems[direction]

    def pause(now: float) -> None:
        progress.tick(f"{direction} flow, at {100 * now / reynolds:.0f} % of the speed", advance=False)

    branch = None
    if before is not None:
        branch = carried_over(before, answer, direction)
        if not correct(problem, branch, branch.state, branch.reynolds, tolerance=tolerance, pause=pause):
            branch = None
        before.branches[direction].factor = None
    if branch is None:
        branch = creeping_branch(problem)
    answer.reached[direction] = follow(problem, branch, reynolds, tolerance=tolerance, pause=pause)
    branch.factor = None  # large, and of no use to the next level
    answer.branches[direction] = branch


def carried_over(before: Answer, answer: Answer, direction: str) -> Branch:
    """Return a branch that starts from the field of another level at the same Reynolds number."""
    from core.flow.sampling import Sampler

    old, new = before.problems[direction], answer.problems[direction]
    old_state = before.branches[direction].state
    sampler = Sampler(old.assembler.mesh)
    source, target = old.assembler.layout, new.assembler.layout
    state, points = new.assembler.blank(), new.assembler.positions
    plane, vertical = target.velocity(state)
    old_plane, old_vertical = source.velocity(old_state)
    shared = min(source.in_plane, target.in_plane)
    for c in (0, 1):
        plane[c, :shared] = sampler.quadratic(old_plane[c], points)[:shared]
    shared = min(source.vertical, target.vertical)
    vertical[:shared] = sampler.quadratic(old_vertical, points)[:shared]
    shared = min(source.pressure, target.pressure)
    target.pressures(state)[:shared] = sampler.linear(source.pressures(old_state), points[: target.corners])[:shared]
    return Branch(new.with_prescribed(state), before.branches[direction].reynolds)
