"""The depth modes against an independent three-dimensional solve on the same triangles."""

from __future__ import annotations

import numpy as np
import pytest

from core.flow.assembly import Assembler
from core.flow.inflow import developed_profile
from core.flow.ladder import DIRECTIONS
from core.flow.mesh import MeshPlan, channel_mesh
from core.flow.modes import depth_tensors, in_plane_modes, vertical_modes
from core.flow.newton import creeping_branch, follow
from core.flow.problem import both_directions
from core.flow.quality import suited_modes
from core.flow.sampling import Sampler
from tests.core.flow.flow_shapes import chain
from tests.core.flow.solid_flow import SolidFlow

DESIGNS = {
    "square section": ({"depth_um": 100.0, "radius_um": 130.0, "lead_um": 150.0}, 60.0, MeshPlan(0.4, nose=0.3), 4),
    "shallow, steeper loop": (
        {"depth_um": 50.0, "angle_deg": 60.0, "run_bend_deg": 30.0, "radius_um": 130.0, "lead_um": 150.0},
        120.0,
        MeshPlan(0.4, nose=0.3),
        3,
    ),
    "two stages": (
        {"depth_um": 80.0, "stages": 2, "radius_um": 110.0, "lead_um": 120.0},
        60.0,
        MeshPlan(0.45, nose=0.35),
        3,
    ),
}


@pytest.mark.slow
@pytest.mark.parametrize("name", DESIGNS)
def test_modes_against_three_dimensions(name):
    """Drops within 1 %, Di - 1 within 5 % of itself or 0.003."""
    shape, reynolds, plan, layers = DESIGNS[name]
    domain = chain(**shape)
    mesh, depth = channel_mesh(domain, plan), domain.depth_to_width
    modes = suited_modes(depth)
    problems = both_directions(Assembler(mesh, depth_tensors(modes, depth)))
    solid = _solid(domain, mesh, depth, layers)
    flat, full = {}, {}
    for direction in DIRECTIONS:
        problem = problems[direction]
        branch = creeping_branch(problem)
        assert follow(problem, branch, reynolds)
        flat[direction] = problem.pressure_drop(branch.state, reynolds) / reynolds
        full[direction] = solid.drop(problem.inlet, problem.outlet, reynolds, _start(problem, branch.state, depth))
        assert flat[direction] == pytest.approx(full[direction], rel=0.01)
    ours, theirs = (drops["reverse"] / drops["forward"] - 1 for drops in (flat, full))
    assert theirs > 0.01  # else the design says nothing
    assert abs(ours - theirs) < max(0.05 * theirs, 0.003)


def _solid(domain, mesh, depth, layers):
    tensors, shapes = depth_tensors(5, depth), in_plane_modes(5)

    def profile(offset, s):
        amplitude = developed_profile(tensors, offset, 0.5)
        return np.sum(amplitude * np.array([mode(s) for mode in shapes]), axis=0)

    inside = mesh.p[:, : mesh.nvertices].mean(axis=1)
    ends = {}
    for end in ("forward_inlet", "forward_outlet"):
        start, stop = getattr(domain, f"{end}_um") / domain.channel_width_um
        along = (stop - start) / np.hypot(*(stop - start))
        normal = np.array([-along[1], along[0]])
        middle = (start + stop) / 2
        ends[end] = (middle, normal if normal @ (inside - middle) > 0 else -normal)
    points = mesh.p[:, : mesh.nvertices].T
    return SolidFlow(points, mesh.t.T, depth=depth, layers=layers, ends=ends, profile=profile)


def _start(problem, state, depth):
    """Return the mode solution as a function of points, only to begin the iteration with."""
    sampler, lay = Sampler(problem.assembler.mesh), problem.assembler.layout
    plane, vertical = lay.velocity(state)

    def velocity(points, component):
        s = 2 * points[2] / depth - 1
        out = np.zeros(points.shape[1])
        for c in (0, 1):
            mine = component == c
            values = sampler.quadratic(plane[c], points[:2, mine].T)
            out[mine] = np.sum(values * np.array([mode(s[mine]) for mode in in_plane_modes(lay.in_plane)]), axis=0)
        mine = component == 2
        values = sampler.quadratic(vertical, points[:2, mine].T)
        out[mine] = np.sum(values * np.array([mode(s[mine]) for mode in vertical_modes(lay.vertical)]), axis=0)
        return out

    return velocity
