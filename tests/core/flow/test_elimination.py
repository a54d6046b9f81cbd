"""The factor of the equations, in parts, against the equations themselves."""

from __future__ import annotations

import numpy as np
import pytest

from core.flow.assembly import Assembler
from core.flow.fronts import Fronts
from core.flow.mesh import MeshPlan, channel_mesh
from core.flow.modes import depth_tensors
from core.flow.newton import creeping_branch, follow
from core.flow.problem import both_directions
from tests.core.flow.flow_shapes import chain


@pytest.fixture(scope="module", params=[(1, 1.0), (2, 0.1), (3, 1.0)], ids=lambda p: f"{p[0]} modes, depth {p[1]}")
def problem(request):
    modes, depth = request.param
    domain = chain(depth_um=100.0 * depth, lead_um=150.0)
    return both_directions(Assembler(channel_mesh(domain, MeshPlan(0.6)), depth_tensors(modes, depth)))["reverse"]


def test_a_factor_undoes_the_derivative_of_the_residual(problem):
    """Truth: the residual is a quadratic form, so that a central difference is its derivative exactly.

    To about three digits: single precision, and the small compressibility of what is factorised.
    """
    branch = creeping_branch(problem)
    assert follow(problem, branch, 40.0)
    change = np.random.default_rng(3).normal(size=len(branch.state)) * problem.is_free
    difference = problem.residual(branch.state + change, 40.0) - problem.residual(branch.state - change, 40.0)
    found = problem.factorised(branch.state, 40.0).solve(difference / 2)
    velocities = problem.assembler.layout.all_velocities
    off = np.linalg.norm(velocities(found - change)) / np.linalg.norm(velocities(change))
    assert off < 0.01
    assert not np.any(velocities(found)[:, problem.inlet_nodes])  # what is prescribed stays


def test_corrections_with_one_factor_remove_the_residual(problem):
    """Creeping flow is linear: each correction takes away what the factor leaves, down to rounding."""
    state = problem.start()
    factor = problem.factorised(state, 0.0)
    sizes = []
    for _ in range(6):
        residual = problem.residual(state, 0.0)
        sizes.append(np.abs(residual).max())
        state = state - factor.solve(residual)
    assert sizes[1] < 0.01 * sizes[0]
    assert sizes[2] < 0.05 * sizes[1]
    assert sizes[-1] < 1e-11 * sizes[0]


def test_the_residual_of_creeping_flow_is_symmetric(problem):
    """Truth: Stokes flow is self-adjoint, so that its matrix is symmetric."""
    rng = np.random.default_rng(5)
    a, b = rng.normal(size=(2, len(problem.inflow)))
    creeping = problem.assembler.creeping
    assert b @ creeping(a) == pytest.approx(a @ creeping(b), rel=1e-10)


def test_nothing_comes_of_nothing(problem):
    factor = problem.factorised(problem.start(), 0.0)
    assert not np.any(factor.solve(np.zeros(len(problem.inflow))))


# --- order of elimination -------------------------------------------------------------------


def grid_couplings(n):
    """Return both ways of the couplings of a square grid of n x n nodes."""
    number = np.arange(n * n).reshape(n, n)
    a = np.concatenate([number[:, :-1].ravel(), number[:-1].ravel()])
    b = np.concatenate([number[:, 1:].ravel(), number[1:].ravel()])
    return np.concatenate([a, b]), np.concatenate([b, a])


def test_every_coupling_has_a_place_in_its_front():
    rows, columns = grid_couplings(9)
    widths = np.random.default_rng(2).integers(0, 4, 81)  # some nodes without any unknown
    fronts = Fronts(rows, columns, widths)
    used = (widths[rows] > 0) & (widths[columns] > 0)
    rows, columns = rows[used], columns[used]
    places = [np.arange(fronts.place[node], fronts.place[node] + widths[node]) for node in np.flatnonzero(widths)]
    assert sorted(np.concatenate(places)) == list(range(fronts.size))
    for number, row, column in zip(fronts.front_of(rows, columns), rows, columns, strict=True):
        front = fronts.all[number]
        unknowns = np.concatenate([np.arange(front.begin, front.end), front.border])
        for node in (row, column):
            (place,) = fronts.place_in(np.array([number]), np.array([node]))
            assert unknowns[place] == fronts.place[node]


def test_what_a_front_leaves_goes_on_to_one_later_front():
    fronts = Fronts(*grid_couplings(12), np.full(144, 2))
    later = {}
    for number, front in enumerate(fronts.all):
        unknowns = np.concatenate([np.arange(front.begin, front.end), front.border])
        for child, here in front.children:
            assert child < number
            assert child not in later
            later[child] = number
            np.testing.assert_array_equal(unknowns[here], fronts.all[child].border)
    assert set(later) == {k for k, front in enumerate(fronts.all) if len(front.border)}
