"""The depth modes against an independent three-dimensional solve on the same triangles."""

from __future__ import annotations

import pytest

from core.flow.assembly import Assembler
from core.flow.ladder import DIRECTIONS
from core.flow.mesh import MeshPlan, channel_mesh
from core.flow.modes import depth_tensors
from core.flow.newton import creeping_branch, follow
from core.flow.problem import both_directions
from core.flow.quality import suited_modes
from tests.core.flow.flow_shapes import chain
from tests.core.flow.solid_on_mesh import solid_on, started_from

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
    solid = solid_on(domain, mesh, depth, layers)
    flat, full = {}, {}
    for direction in DIRECTIONS:
        problem = problems[direction]
        branch = creeping_branch(problem)
        assert follow(problem, branch, reynolds)
        flat[direction] = problem.pressure_drop(branch.state, reynolds) / reynolds
        full[direction] = solid.drop(
            problem.inlet, problem.outlet, reynolds, started_from(problem, branch.state, depth)
        )
        assert flat[direction] == pytest.approx(full[direction], rel=0.01)
    ours, theirs = (drops["reverse"] / drops["forward"] - 1 for drops in (flat, full))
    assert theirs > 0.01  # else the design says nothing
    assert abs(ours - theirs) < max(0.05 * theirs, 0.003)
