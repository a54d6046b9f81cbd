"""Plain two-dimensional flow with the parts of the solver, for the published benchmarks."""

from __future__ import annotations

from dataclasses import dataclass

import numpy as np

from core.flow.assembly import Assembler
from core.flow.domain import FlowDomain
from core.flow.mesh import MeshPlan, channel_mesh
from core.flow.modes import plane_tensors
from core.flow.newton import creeping_branch, follow
from core.flow.problem import both_directions
from core.flow.sampling import Sampler


@dataclass
class PlaneFlow:
    """A solved plane flow; lengths in channel widths, pressure in density x speed^2."""

    problem: object
    branch: object

    @property
    def drop(self):
        return self.problem.pressure_drop(self.branch.state, self.branch.reynolds) / self.branch.reynolds

    def velocity_x(self, points):
        plane, _ = self.problem.assembler.layout.velocity(self.branch.state)
        return Sampler(self.problem.assembler.mesh).quadratic(plane[0], np.asarray(points, dtype=float))[0]

    def pressure(self, points):
        pressure = self.problem.assembler.layout.pressures(self.branch.state)
        return (
            Sampler(self.problem.assembler.mesh).linear(pressure, np.asarray(points, dtype=float))[0]
            / self.branch.reynolds
        )


def plane_domain(outer, *, inlet, outlet, islands=(), width=1.0):
    """Return a domain for plane flow; the depth plays no part."""
    return FlowDomain(
        outer_um=np.asarray(outer, dtype=float),
        islands_um=tuple(islands),
        depth_um=width,
        channel_width_um=width,
        forward_inlet_um=np.asarray(inlet, dtype=float),
        forward_outlet_um=np.asarray(outlet, dtype=float),
    )


def plane_problems(domain, plan):
    """Return forward and reverse problem."""
    if not isinstance(plan, MeshPlan):
        plan = MeshPlan(plan)
    return both_directions(Assembler(channel_mesh(domain, plan), plane_tensors()))


def plane_flow(problem, reynolds):
    """Return the flow at a Reynolds number on channel width and mean inlet speed."""
    branch = creeping_branch(problem)
    assert follow(problem, branch, reynolds)
    return PlaneFlow(problem, branch)
