"""Depth modes, straight channels against the duct series, and the laws of low Reynolds number."""

from __future__ import annotations

import math
from itertools import pairwise

import numpy as np
import pytest
from skfem import MeshTri, MeshTri2

from core.flow.assembly import Assembler
from core.flow.inflow import developed_gradient
from core.flow.ladder import DIRECTIONS
from core.flow.mesh import MeshPlan, channel_mesh
from core.flow.modes import depth_tensors, in_plane_modes, pressure_modes, vertical_modes
from core.flow.newton import creeping_branch, follow
from core.flow.problem import both_directions
from core.flow.solve import solve
from tests.core.flow.flow_shapes import chain, straight

WATER = {"density_kg_m3": 1000.0, "viscosity_pa_s": 1e-3}


def duct_factor(aspect):
    """Return F of dp = 12 mu L Q / (w h^3 F), h <= w, by the series of R. K. Shah and A. L. London, 1978."""
    odd = np.arange(1, 200, 2)
    return 1 - 192 * aspect / math.pi**5 * np.sum(np.tanh(odd * math.pi / (2 * aspect)) / odd**5.0)


def test_the_series_used_here():
    """Values of the table of Shah and London: f Re 14.22708, 15.54806, 18.23278 (Fanning)."""
    for aspect, friction in ((1.0, 14.22708), (0.5, 15.54806), (0.25, 18.23278)):
        assert 24 / (1 + aspect) ** 2 / duct_factor(aspect) == pytest.approx(friction, rel=1e-6)


@pytest.mark.parametrize("family", [in_plane_modes, vertical_modes, pressure_modes])
def test_modes_are_orthonormal_and_keep_to_the_walls(family):
    modes = family(6)
    averages = [[((a * b).integ()(1.0) - (a * b).integ()(-1.0)) / 2 for a in modes] for b in modes]
    assert np.abs(np.array(averages) - np.eye(6)).max() < 1e-7
    if family is not pressure_modes:
        assert max(abs(mode(s)) for mode in modes for s in (-1.0, 1.0)) < 1e-9
    if family is vertical_modes:
        assert max(abs(mode(0.0)) for mode in modes) < 1e-12


def test_one_mode_is_the_parabola():
    """Mean of (1 - s^2) normalised: sqrt(5/6); friction 10 / depth^2; convection (by hand)."""
    tensors = depth_tensors(1, 0.5)
    assert tensors.mean[0] == pytest.approx(math.sqrt(5 / 6), rel=1e-12)
    assert tensors.friction[0, 0] == pytest.approx(10 / 0.5**2, rel=1e-12)
    # mean of (1 - s^2)^3 is 16/35, of its square 8/15
    assert tensors.uuu[0, 0, 0] == pytest.approx(16 / 35 / (8 / 15) ** 1.5, rel=1e-12)
    with pytest.raises(ValueError, match="count"):
        depth_tensors(0, 1.0)


@pytest.mark.parametrize("aspect", [0.1, 0.25, 0.5, 1.0, 2.0])
def test_developed_modes_against_the_series(aspect):
    small = min(aspect, 1.0)
    exact = 12 / (small**2 * duct_factor(min(aspect, 1 / aspect)))
    assert developed_gradient(depth_tensors(3, aspect), 0.5) == pytest.approx(exact, rel=1e-4)


@pytest.mark.parametrize("aspect", [0.1, 0.25, 0.5, 1.0, 2.0])
def test_straight_channel_against_the_series(aspect):
    """The control channel without stages, solved as any other: within 0.2 % at any flow."""
    domain = straight(width_um=100.0, depth_um=100.0 * aspect, length_um=300.0)
    flow = 20 * 1e-6 * domain.depth_um * 1e-6
    result = solve(domain, flow_m3_s=flow, quality="normal", **WATER)
    low, high = sorted((100e-6, domain.depth_um * 1e-6))
    exact = 12 * 1e-3 * 300e-6 * flow / (high * low**3 * duct_factor(low / high))
    assert result.valid
    for drop in (result.forward_pressure_pa, result.reverse_pressure_pa):
        assert drop == pytest.approx(exact, rel=2e-3)
        assert abs(drop - exact) <= result.error_band_percent / 100 * exact
    assert abs(result.diodicity - 1) <= result.diodicity_band < 1e-3
    assert result.reynolds == pytest.approx(20 * 2 * aspect / (1 + aspect), rel=1e-9)  # 0.2 m/s, 100 um, 1 mm2/s


def test_drop_of_a_straight_channel_converges_with_the_fourth_power():
    """The drop comes from a power, so quadratic triangles give h^4."""
    tensors = depth_tensors(2, 0.3)
    exact = 2 * developed_gradient(tensors, 0.5)
    errors = []
    for n in (4, 8, 16):
        flat = MeshTri.init_tensor(np.linspace(0, 2, 2 * n + 1), np.linspace(0, 1, n + 1))
        mesh = MeshTri2.from_mesh(flat).with_boundaries(
            {
                "forward_inlet": lambda x: np.isclose(x[0], 0.0),
                "forward_outlet": lambda x: np.isclose(x[0], 2.0),
            }
        )
        problem = both_directions(Assembler(mesh, tensors))["forward"]
        branch = creeping_branch(problem)
        errors.append(abs(problem.pressure_drop(branch.state, 0.0) / exact - 1))
    assert math.log2(errors[1] / errors[2]) > 3.3
    assert errors[2] < 1e-4


@pytest.fixture(scope="module")
def low_flows():
    """Return drops of one stage from Reynolds number 0 up, in viscosity x speed / width."""
    problems = both_directions(Assembler(channel_mesh(chain(), MeshPlan(0.4)), depth_tensors(2, 1.0)))
    drops = {}
    for direction in DIRECTIONS:
        branch = creeping_branch(problems[direction])
        drops[direction, 0.0] = problems[direction].pressure_drop(branch.state, 0.0)
        for reynolds in (1.0, 2.0, 4.0):
            assert follow(problems[direction], branch, reynolds, tolerance=1e-11)
            drops[direction, reynolds] = problems[direction].pressure_drop(branch.state, reynolds)
            flow = problems[direction].flow_through(branch.state, problems[direction].outlet)
            assert flow == pytest.approx(1.0, abs=1e-8)  # what enters leaves
    return drops


def test_creeping_flow_has_no_easy_direction(low_flows):
    """Reversibility of Stokes flow: the drops are equal."""
    assert low_flows["reverse", 0.0] / low_flows["forward", 0.0] == pytest.approx(1.0, abs=1e-6)


def test_excess_over_creeping_flow_grows_with_the_square(low_flows):
    """C. C. Mei and J.-L. Auriault, J. Fluid Mech. 222, 1991, 647: no linear term in the resistance."""
    for direction in DIRECTIONS:
        excess = [low_flows[direction, re] - low_flows[direction, 0.0] for re in (1.0, 2.0, 4.0)]
        assert min(excess) > 0
        assert math.log2(excess[1] / excess[0]) == pytest.approx(2.0, abs=0.15)
        assert math.log2(excess[2] / excess[1]) == pytest.approx(2.0, abs=0.2)


def test_rectification_starts_with_the_cube(low_flows):
    """The quadratic terms of both directions are equal by reciprocity (Firdaouss, J. Fluid Mech. 343, 1997)."""
    gap = [abs(low_flows["reverse", re] - low_flows["forward", re]) for re in (1.0, 2.0, 4.0)]
    assert gap[2] < 1e-4 * low_flows["forward", 4.0]
    for less, more in pairwise(gap):
        assert math.log2(more / less) == pytest.approx(3.0, abs=0.4)
