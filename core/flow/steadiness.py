"""Whether a steady flow would be seen: growth of small disturbances of the solved flow.

A disturbance ``exp(g t)`` of the linearised equations obeys ``-R g M d = J d`` with the mass matrix M
of the velocities and the Jacobian J. The eigenvalues nearest to zero are found by Arnoldi's method with
the inverse of J (shift-invert; V. Theofilis, Annu. Rev. Fluid Mech. 43, 2011, 319). A positive g means
that the steady flow would not be seen on the bench; a negative one does not exclude that a large
disturbance, or one that breaks the symmetry about mid-depth, upsets it.
"""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np

if TYPE_CHECKING:
    from core.flow.newton import Branch
    from core.flow.problem import FlowProblem

_WANTED = 4
_STEPS = 30


def growth_rate(problem: FlowProblem, branch: Branch) -> float:
    """Return the largest growth rate among the eigenvalues nearest to zero.

    Parameters
    ----------
    problem : FlowProblem
        One direction.
    branch : Branch
        Converged solution at a Reynolds number above 0.

    Returns
    -------
    float
        In units of mean speed over channel width; positive means that the flow is not stable.
        Fast oscillations far from zero are not looked at.
    """
    from scipy.sparse.linalg import LinearOperator, eigs

    factor = problem.factorised(branch.state, branch.reynolds)
    mass = problem.mass()
    size = problem.assembler.layout.size

    def apply(vector: np.ndarray) -> np.ndarray:
        return -branch.reynolds * factor.solve(mass @ vector)

    start = np.random.default_rng(1).normal(size=size) * problem.is_free
    found = eigs(
        LinearOperator((size, size), matvec=apply, dtype=float),
        k=_WANTED,
        ncv=_STEPS,
        which="LM",
        v0=start,
        tol=1e-3,  # the sign is wanted, and the factor itself is no better
        return_eigenvectors=False,
    )
    return float(np.max((1 / found).real))
