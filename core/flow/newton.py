"""Newton iteration with reuse of the factor, and continuation in the Reynolds number."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

import numpy as np

from core.errors import SolveError

if TYPE_CHECKING:
    from collections.abc import Callable

    from core.flow.problem import FlowProblem

_TOLERANCE = 1e-9  # size of the last correction against the size of the state
_KEEP_FACTOR = 0.3  # corrections must shrink at least this much for a factor to be used again
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
    creeping : ndarray
        State at Reynolds number 0.
    factorisations : int
        Counted for the record.
    """

    state: np.ndarray
    reynolds: float = 0.0
    factor: Any = None
    creeping: np.ndarray | None = None
    factorisations: int = 0
    history: list[float] = field(default_factory=list)


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
    state[problem.free] -= factor.solve(problem.residual(state, 0.0))
    state[problem.free] -= factor.solve(problem.residual(state, 0.0))
    return Branch(state, 0.0, factor, state.copy(), 1)


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
        if correct(problem, branch, guess, aim, tolerance=tolerance, pause=pause):
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
    spent, scale = 0, 1.0
    for _ in range(60):
        pause(reynolds)
        if factor is None:
            if spent == _MOST_FACTORS:
                return False
            branch.factor = None  # two factors at once would double the memory
            factor, fresh, spent = problem.factorised(state, reynolds), True, spent + 1
            branch.factorisations += 1
        change = factor.solve(problem.residual(state, reynolds))
        size = problem.norm(change)
        scale = problem.norm(state[problem.free])
        if not np.isfinite(size) or size > 1e3 * scale:
            if fresh:
                return False
            factor = None
            continue
        if not fresh and size > _KEEP_FACTOR * last and not (last == np.inf and size < 0.05 * scale):
            factor, last = None, np.inf
            continue
        if fresh and size > 1.5 * last and size > 1e-3 * scale and spent > 3:
            return False
        state[problem.free] -= change
        last, fresh = size, False
        if size <= tolerance * scale:
            branch.state, branch.reynolds, branch.factor = state, reynolds, factor
            branch.history.append(reynolds)
            return True
    return False


def _predicted(problem: FlowProblem, branch: Branch, aim: float) -> np.ndarray:
    """Return the state moved along the tangent of the branch."""
    guess = branch.state.copy()
    if branch.factor is None:  # lost in a step that failed
        branch.factor = problem.factorised(branch.state, branch.reynolds)
        branch.factorisations += 1
    slope = branch.factor.solve(problem.convection(branch.state)[problem.free])
    guess[problem.free] -= (aim - branch.reynolds) * slope
    return guess
