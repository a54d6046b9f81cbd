"""One direction on one level, followed through rising flows."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

from core.flow.newton import Branch, correct, creeping_branch, follow

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

    import numpy as np

    from core.flow.levels import Levels
    from core.flow.problem import FlowProblem
    from core.flow.quality import Level
    from core.flow.transfer import Transfer


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Found:
    """What was found of one direction at one flow.

    Attributes
    ----------
    level : Level
        Where.
    branch : Branch
        Solution at the flow asked for, or at the highest reached.
    reached : bool
        Whether the flow asked for was reached.
    drop : float
        Pressure drop in units of the solve.
    """

    level: Level
    branch: Branch
    reached: bool
    drop: float


def follow_direction(
    levels: Levels,
    direction: str,
    level: Level,
    *,
    reynolds: Sequence[float],
    starts: Sequence[Found | None],
    tolerance: float,
    tell: Callable[[str, bool], None],
) -> list[Found]:
    """Return one direction on one level at rising flows.

    Parameters
    ----------
    levels : Levels
        Gives the equations.
    direction : str
        'forward' or 'reverse'.
    level : Level
    reynolds : sequence of float
        Flows, rising, as Reynolds numbers on channel width.
    starts : sequence of Found or None
        For each flow what was found on another level.
    tolerance : float
        Size of the last correction against the size of the solution.
    tell : callable
        Called with a text, and whether a flow begins; may raise to stop.
    """
    problem = levels.at(level).problems[direction]
    carrier = _Carrier(levels, direction, problem)
    runner, found = _Runner(problem, direction, tolerance, tell), []
    for aim, start in zip(reynolds, starts, strict=True):
        tell(f"{direction} flow, triangles of {level.size:.2g} widths, {level.modes} depth modes", True)
        branch = runner.to(aim, None if start is None else carrier(start))
        drop = float(problem.pressure_drop(branch.state, branch.reynolds))
        found.append(Found(level=level, branch=branch, reached=branch.reynolds == aim, drop=drop))
    return found


class _Carrier:
    """Takes what was found on other levels to the unknowns of this one."""

    def __init__(self, levels: Levels, direction: str, target: FlowProblem) -> None:
        self._levels, self._direction, self._target = levels, direction, target
        self._transfers: dict[Level, Transfer] = {}

    def __call__(self, start: Found) -> Branch:
        """Return the solution where it stands."""
        from core.flow.transfer import Transfer

        if start.level not in self._transfers:
            source = self._levels.at(start.level).problems[self._direction]
            self._transfers[start.level] = Transfer(source.assembler, self._target.assembler)
        state = self._transfers[start.level](start.branch.state)
        return Branch(self._target.with_prescribed(state), start.branch.reynolds)


@dataclass(slots=True)
class _Runner:
    """Follows one direction on one level through rising flows.

    The difference to the solution of the level before goes smoothly with the flow: continued from the
    last two flows it makes a better guess.
    """

    problem: FlowProblem
    direction: str
    tolerance: float
    tell: Callable[[str, bool], None]
    branch: Branch | None = None
    lost: bool = False
    gains: list[tuple[float, np.ndarray]] = field(default_factory=list)  # what this level adds, by flow

    def to(self, reynolds: float, start: Branch | None) -> Branch:
        """Return the solution at a flow, or at the highest reached, without its factor."""

        def pause(now: float) -> None:
            self.tell(f"{self.direction} flow, at {100 * now / reynolds:.0f} % of the speed", False)

        if start is not None and not self.lost:
            self._jump(start, pause)
        if self.branch is None:
            self.branch = creeping_branch(self.problem)
        if not self.lost:
            self.lost = not follow(self.problem, self.branch, reynolds, tolerance=self.tolerance, pause=pause)
            if start is not None and start.reynolds == self.branch.reynolds:
                self.gains = [*self.gains, (start.reynolds, self.branch.state - start.state)][-2:]
        return Branch(self.branch.state, self.branch.reynolds, factorisations=self.branch.factorisations)

    def _jump(self, start: Branch, pause: Callable[[float], None]) -> None:
        """Try to come to a higher flow from the solution of another level; nothing happens on failure."""
        if self.branch is not None and start.reynolds <= self.branch.reynolds:
            return
        guess = start.state + self._gain(start.reynolds)
        jumper = Branch(guess, start.reynolds)
        if self.branch is not None:
            jumper.factor, self.branch.factor = self.branch.factor, None
            jumper.factorisations = self.branch.factorisations
        if correct(self.problem, jumper, guess, start.reynolds, tolerance=self.tolerance, pause=pause):
            self.branch = jumper

    def _gain(self, reynolds: float) -> np.ndarray | float:
        """Return what this level is expected to add at a flow."""
        if len(self.gains) < 2:
            return self.gains[-1][1] if self.gains else 0.0
        (before, first), (last, second) = self.gains
        return second + (second - first) * (reynolds - last) / (last - before)
