"""Newton iteration with reuse of the factor, and continuation in the Reynolds number."""

from __future__ import annotations

from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import numpy as np

from core.errors import SolveError

if TYPE_CHECKING:
    from collections.abc import Callable

    from core.flow.problem import FlowProblem

_TOLERANCE = 1e-9  # size of the last correction against the size of the state
_ROUGH = 3e-3  # the same on the way to a Reynolds number
_CORRECTIONS_PER_FACTOR = 10  # that take as long as a new factor
_MIXED = 4  # corrections remembered
_MOST_CORRECTIONS = 60
_MOST_FACTORS = 6  # for one Reynolds number
_MOST_IN_ALL = 50  # for one flow
_FIRST_STEP = 25.0
_SMALLEST_STEP = 0.5


class FlowStopped(SolveError):
    """The caller asked the solve to stop; not a failure."""


@dataclass(slots=True)
class Branch:
    """One steady solution followed up in the Reynolds number.

    Attributes
    ----------
    state : ndarray
        Unknowns at ``reynolds``.
    reynolds : float
        On channel width.
    factor : object
        Factor of a nearby Jacobian on the free unknowns, or None.
    factorisations : int
        Counted for the record.
    """

    state: np.ndarray
    reynolds: float = 0.0
    factor: Any = None
    factorisations: int = 0


def creeping_branch(problem: FlowProblem) -> Branch:
    """Return the start of a branch: creeping flow.

    Parameters
    ----------
    problem : FlowProblem
        Equations with the inflow of one direction.

    Returns
    -------
    Branch
    """
    state = problem.start()
    factor = problem.factorised(state, 0.0)
    state -= factor.solve(problem.residual(state, 0.0))
    state -= factor.solve(problem.residual(state, 0.0))
    return Branch(state, 0.0, factor, 1)


def follow(
    problem: FlowProblem,
    branch: Branch,
    target: float,
    *,
    tolerance: float = _TOLERANCE,
    pause: Callable[[float], None] = lambda reynolds: None,
) -> bool:
    """Follow a branch to a Reynolds number in adaptive steps.

    Parameters
    ----------
    problem : FlowProblem
        Equations with the inflow of one direction.
    branch : Branch
        Moved to the highest Reynolds number reached.
    target : float
        Reynolds number on channel width.
    tolerance : float
        Size of the last correction against the size of the solution.
    pause : callable
        Called with the Reynolds number before each correction; may raise to stop.

    Returns
    -------
    bool
        Whether ``target`` was reached.
    """
    step, spent = _FIRST_STEP, branch.factorisations
    while branch.reynolds != target:
        if branch.factorisations - spent > _MOST_IN_ALL:
            return False
        away = target - branch.reynolds
        if abs(away) > 1.3 * step:
            away = np.copysign(step, away)
        aim = branch.reynolds + away
        guess = _predicted(problem, branch, aim)
        before = branch.factorisations
        near = tolerance if aim == target else max(tolerance, _ROUGH)
        if correct(problem, branch, guess, aim, tolerance=near, pause=pause):
            step = abs(away) * (2.0 if branch.factorisations - before <= 2 else 1.2)
            continue
        step = abs(away) / 2.5
        if step < min(_SMALLEST_STEP, abs(target) / 50):
            return False
    return True


def correct(
    problem: FlowProblem,
    branch: Branch,
    guess: np.ndarray,
    reynolds: float,
    *,
    tolerance: float = _TOLERANCE,
    pause: Callable[[float], None] = lambda reynolds: None,
) -> bool:
    """Correct a guess to a solution, reusing the branch's factor while that pays.

    Parameters
    ----------
    problem : FlowProblem
    branch : Branch
        Takes the solution when the iteration converges; keeps its old one otherwise.
    guess : ndarray
        Start, with the prescribed values in place.
    reynolds : float
        On channel width.
    tolerance : float
        Size of the last correction against the size of the solution.
    pause : callable
        Called with the Reynolds number before each correction; may raise to stop.

    Returns
    -------
    bool
        Whether it converged.
    """
    state, factor, last, fresh = guess.copy(), branch.factor, np.inf, False
    spent, mixer = 0, _Mixer(problem.assembler.layout.all_velocities)
    for _ in range(_MOST_CORRECTIONS):
        pause(reynolds)
        if factor is None:
            if spent == _MOST_FACTORS:
                return False
            branch.factor = None  # two factors at once would double the memory
            factor, fresh, spent = problem.factorised(state, reynolds), True, spent + 1
            branch.factorisations += 1
            last, mixer = np.inf, _Mixer(problem.assembler.layout.all_velocities)
        change = factor.solve(problem.residual(state, reynolds))
        size, scale = problem.norm(change), problem.norm(state)
        if not np.isfinite(size) or size > 1e3 * scale:
            if fresh:
                return False
            factor = None
            continue
        if not fresh and _is_slow(size / last if last < np.inf else size / scale, size / (tolerance * scale)):
            factor = None
            continue
        state = mixer.next(state, change)
        last, fresh = size, False
        if size <= tolerance * scale:
            branch.state, branch.reynolds, branch.factor = state, reynolds, factor
            return True
    return False


def _is_slow(ratio: float, above: float) -> bool:
    """Return whether a new factor takes less time than corrections that shrink by a ratio until they are small."""
    if above <= 1.0:
        return False
    return ratio >= 1.0 or np.log(above) > _CORRECTIONS_PER_FACTOR * -np.log(ratio)


class _Mixer:
    """Next state from the last corrections with one factor (D. G. Anderson, J. ACM 12, 1965, 547)."""

    def __init__(self, velocities: Callable[[np.ndarray], np.ndarray]) -> None:
        self._velocities = velocities  # alone measured: the pressure has another scale
        self._before: tuple[np.ndarray, np.ndarray] | None = None
        self._moves: list[np.ndarray] = []
        self._gains: list[np.ndarray] = []

    def next(self, state: np.ndarray, change: np.ndarray) -> np.ndarray:
        """Return the state after a correction that is to be subtracted from it."""
        out = state - change
        if self._before is not None:
            self._moves = [*self._moves, state - self._before[0]][-_MIXED:]
            self._gains = [*self._gains, change - self._before[1]][-_MIXED:]
            gains = np.array([self._velocities(each).ravel() for each in self._gains])
            shares = np.linalg.lstsq(gains @ gains.T, gains @ self._velocities(change).ravel(), rcond=1e-12)[0]
            for share, move, gain in zip(shares, self._moves, self._gains, strict=True):
                out -= share * (move - gain)
        self._before = (state, change)
        return out


def _predicted(problem: FlowProblem, branch: Branch, aim: float) -> np.ndarray:
    """Return the state moved along the tangent of the branch."""
    guess = branch.state.copy()
    if branch.factor is None:  # lost in a step that failed
        branch.factor = problem.factorised(branch.state, branch.reynolds)
        branch.factorisations += 1
    slope = branch.factor.solve(problem.convection(branch.state))
    guess -= (aim - branch.reynolds) * slope
    return guess
