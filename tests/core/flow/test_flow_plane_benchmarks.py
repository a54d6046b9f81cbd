"""The two-dimensional core against exact solutions and published benchmarks."""

from __future__ import annotations

import numpy as np
import pytest
from skfem import Basis, ElementTriP1, ElementTriP2, MeshTri, MeshTri2

from core.flow.assembly import Assembler
from core.flow.elimination import Elimination
from core.flow.mesh import MeshPlan
from core.flow.modes import plane_tensors
from tests.core.flow.flow_plane import plane_domain, plane_flow, plane_problems


def test_plane_poiseuille_is_exact():
    """Parabola and linear pressure lie in the element spaces: dp = 12 mu U L / H^2 (textbook)."""
    domain = plane_domain([[0, 0], [3, 0], [3, 1], [0, 1]], inlet=[[0, 0], [0, 1]], outlet=[[3, 0], [3, 1]])
    problem = plane_problems(domain, 0.5)["forward"]
    flow = plane_flow(problem, 10.0)
    assert flow.drop == pytest.approx(12 * 3 / 10, rel=1e-9)
    assert flow.velocity_x([[1.7, 0.5], [2.2, 0.25]]) == pytest.approx([1.5, 1.125], abs=1e-8)


def test_kovasznay_slopes():
    """L2 errors fall as h^3 (velocity) and h^2 (pressure): L. I. G. Kovasznay, Proc. Camb. Phil. Soc. 44, 1948, 58."""
    errors = np.array([_kovasznay_errors(n) for n in (6, 12, 24)])
    slopes = np.log2(errors[:-1] / errors[1:])
    assert slopes[-1, 0] > 2.8
    assert slopes[-1, 1] > 1.8
    assert errors[-1, 0] < 1e-3


def _kovasznay_errors(n):
    re = 40.0
    rate = re / 2 - np.sqrt(re**2 / 4 + 4 * np.pi**2)
    assert rate == pytest.approx(-0.9637405441957689, rel=1e-12)

    def u(x, y):
        return 1 - np.exp(rate * x) * np.cos(2 * np.pi * y)

    def v(x, y):
        return rate / (2 * np.pi) * np.exp(rate * x) * np.sin(2 * np.pi * y)

    flat = MeshTri.init_tensor(np.linspace(-0.5, 1.0, n + 1), np.linspace(-0.5, 0.5, n + 1))
    assembler = Assembler(MeshTri2.from_mesh(flat), plane_tensors())
    lay = assembler.layout
    x, y = assembler.positions.T
    exact = np.concatenate([u(x, y), v(x, y), np.zeros(lay.corners)])
    edge = np.isclose(x, -0.5) | np.isclose(x, 1.0) | np.isclose(np.abs(y), 0.5)
    state = np.where(np.concatenate([edge, edge, np.zeros(lay.corners, dtype=bool)]), exact, 0.0)
    elimination = Elimination(assembler, wall=np.zeros(0, dtype=int))
    free = np.concatenate([~edge, ~edge, np.ones(lay.corners, dtype=bool)])
    for _ in range(60):
        factor = elimination.factorised(assembler.momentum_slopes(state, re), np.flatnonzero(edge))
        residual = (assembler.creeping(state) + re * assembler.convection(state)) * free
        balance = lay.pressures(residual)[0]  # as interpolated, not quite as much flows in as out
        balance -= assembler.softening * balance.sum() / assembler.softening.sum()
        change = factor.solve(residual)
        state -= change
        if np.abs(lay.all_velocities(change)).max() < 1e-9:
            break
    quadratic = Basis(flat, ElementTriP2(), intorder=6)
    linear = Basis(flat, ElementTriP1(), intorder=6)
    at = np.array(quadratic.global_coordinates())
    plane, _ = lay.velocity(state)
    off = [np.asarray(quadratic.interpolate(plane[c][0])) - f(*at) for c, f in ((0, u), (1, v))]
    pressure = np.asarray(linear.interpolate(lay.pressures(state)[0] / re)) - (1 - np.exp(2 * rate * at[0])) / 2
    pressure -= np.sum(pressure * linear.dx) / np.sum(linear.dx)
    return np.sqrt(np.sum((off[0] ** 2 + off[1] ** 2) * quadratic.dx)), np.sqrt(np.sum(pressure**2 * linear.dx))


def test_cylinder_in_a_channel():
    """Drag 5.57953523, pressure difference 0.11752017 (John and Matthies, Int. J. Numer. Meth. Fluids 37, 2001)."""
    turn = np.linspace(0, 2 * np.pi, 960, endpoint=False)
    circle = np.column_stack([0.2 + 0.05 * np.cos(turn), 0.2 + 0.05 * np.sin(turn)])
    box = [[0, 0], [2.2, 0], [2.2, 0.41], [0, 0.41]]
    domain = plane_domain(box, inlet=[[0, 0], [0, 0.41]], outlet=[[2.2, 0], [2.2, 0.41]], islands=[circle], width=0.41)
    problem = plane_problems(domain, MeshPlan(0.06, nose=0.1, grading=0.2))["forward"]
    reynolds = 0.2 * 0.41 / 1e-3
    flow = plane_flow(problem, reynolds)
    lay, at = problem.assembler.layout, problem.assembler.positions * 0.41
    on_circle = np.flatnonzero(np.hypot(at[:, 0] - 0.2, at[:, 1] - 0.2) < 0.0501)
    reaction, _ = lay.velocity(problem.full_residual(flow.branch.state, reynolds))
    drag, lift = (2 / 20 * -reaction[c][0, on_circle].sum() for c in (0, 1))
    assert abs(drag) == pytest.approx(5.57953523384, rel=1e-3)
    assert abs(lift) == pytest.approx(0.010618948146, rel=0.03)
    front, back = flow.pressure(np.array([[0.15, 0.2], [0.25, 0.2]]) / 0.41)
    assert (front - back) * 0.2**2 == pytest.approx(0.11752016697, rel=1e-3)


@pytest.mark.parametrize(("reynolds", "length"), [(100, 2.913), (200, 4.979), (400, 8.243)])
def test_backward_facing_step(reynolds, length):
    """Reattachment in step heights: independent solve; Erturk, Comput. Fluids 37, 2008, has 2.922, 4.982, 8.237."""
    outer = [[-8, 1], [0, 1], [0, 0], [26, 0], [26, 2], [-8, 2]]
    domain = plane_domain(outer, inlet=[[-8, 1], [-8, 2]], outlet=[[26, 0], [26, 2]])
    flow = plane_flow(plane_problems(domain, MeshPlan(0.3, nose=0.2))["forward"], reynolds / 2)
    x = np.linspace(0.6 * length, 1.4 * length, 400)
    found = []
    for height in (0.02, 0.04):
        speed = flow.velocity_x(np.column_stack([x, np.full_like(x, height)]))
        turn = np.flatnonzero((speed[:-1] < 0) & (speed[1:] >= 0))[-1]
        found.append(np.interp(0.0, speed[turn : turn + 2], x[turn : turn + 2]))
    assert 2 * found[0] - found[1] == pytest.approx(length, rel=0.01)


def test_notch_in_a_plane_channel():
    """Excess over creeping flow of both directions: an independent solve on two meshes, equal to 1e-5 of the drop."""
    outer = [[-24, 0], [0, 0], [0, -1], [2, 0], [24, 0], [24, 1], [-24, 1]]
    domain = plane_domain(outer, inlet=[[-24, 0], [-24, 1]], outlet=[[24, 0], [24, 1]])
    problems = plane_problems(domain, MeshPlan(0.2, nose=0.03))
    creeping = {}
    for direction, at_10, at_100 in (("forward", 0.4648, 4.131), ("reverse", 0.4093, 3.562)):
        creeping[direction] = plane_flow(problems[direction], 1e-6).drop * 1e-6
        assert creeping[direction] == pytest.approx(566.518, rel=5e-5)
        for reynolds, excess in ((10.0, at_10), (100.0, at_100)):
            drop = plane_flow(problems[direction], reynolds).drop
            assert drop * reynolds - creeping[direction] == pytest.approx(excess, rel=0.01)
    assert creeping["forward"] == pytest.approx(creeping["reverse"], rel=1e-9)
