"""Readings from a solved direction: pressure drop, flow shares, drops along the chain, fields."""

from __future__ import annotations

from itertools import pairwise
from typing import TYPE_CHECKING

import numpy as np

from core.flow.result import DirectionResult, FlowField
from core.flow.sampling import Sampler

if TYPE_CHECKING:
    from core.flow.domain import FlowDomain
    from core.flow.newton import Branch
    from core.flow.problem import FlowProblem
    from core.flow.scales import Scales

_POINTS = 24  # on a measuring section


def direction_result(
    domain: FlowDomain, unit: Scales, problem: FlowProblem, branch: Branch, reached: bool
) -> DirectionResult:
    """Return what is read from one direction, in units.

    Parameters
    ----------
    domain : FlowDomain
        Holds the measuring sections.
    unit : Scales
        Of the solve.
    problem, branch : FlowProblem, Branch
        Solved direction.
    reached : bool
        Whether the branch stands at the flow asked for.

    Returns
    -------
    DirectionResult
        Without numbers that belong to another flow where it was not reached.
    """
    top = float(unit.on_hydraulic_diameter(branch.reynolds))
    if not reached:
        return DirectionResult(pressure_pa=None, reached_reynolds=top, factorisations=branch.factorisations)
    sampler = Sampler(problem.assembler.mesh)
    drops = bypass_drops(domain, problem, branch.state, sampler)
    return DirectionResult(
        pressure_pa=problem.pressure_drop(branch.state, branch.reynolds) * unit.pressure_pa,
        reached_reynolds=top,
        loop_shares=loop_shares(domain, problem, branch.state, sampler),
        bypass_drops_pa=tuple(drop * unit.pressure_pa for drop in drops),
        field=field(domain, unit, problem, branch.state),
        factorisations=branch.factorisations,
    )


def loop_shares(domain: FlowDomain, problem: FlowProblem, state: np.ndarray, sampler: Sampler) -> tuple[float, ...]:
    """Return the share of the whole flow that takes each loop.

    Flow against the sense of the other branch counts as negative share; the signs follow from the
    sum, which is the whole flow.
    """
    shares = []
    for bypass, loop in domain.sections:
        flows = [abs(_through(chord / domain.channel_width_um, problem, state, sampler)) for chord in (bypass, loop)]
        signs = min(((1, 1), (1, -1), (-1, 1)), key=lambda s: abs(s[0] * flows[0] + s[1] * flows[1] - 1))
        signed = [s * q for s, q in zip(signs, flows, strict=True)]
        shares.append(float(signed[1] / sum(signed)))
    return tuple(shares)


def bypass_drops(domain: FlowDomain, problem: FlowProblem, state: np.ndarray, sampler: Sampler) -> tuple[float, ...]:
    """Return the pressure drop from bypass to bypass in the order of this flow, in units of the solve."""
    pressure = problem.assembler.layout.pressures(state)[:1]
    means = []
    for bypass, _ in domain.sections:
        points, weights, _ = _gauss_on(bypass / domain.channel_width_um)
        means.append(float(sampler.linear(pressure, points)[0] @ weights / weights.sum()))
    if problem.inlet == "forward_inlet":
        means.reverse()
    return tuple(float(a - b) for a, b in pairwise(means))


def field(domain: FlowDomain, unit: Scales, problem: FlowProblem, state: np.ndarray) -> FlowField:
    """Return the fields in units, on all nodes, each triangle split in four."""
    assembler = problem.assembler
    plane, vertical = assembler.layout.velocity(state)
    pressure = assembler.layout.pressures(state)
    a, b, c, ab, bc, ac = assembler.dofs.T
    quarters = [(a, ab, ac), (ab, b, bc), (ac, bc, c), (ab, bc, ac)]
    ends = assembler.mesh.facets
    middle = (pressure[:, ends[0]] + pressure[:, ends[1]]) / 2
    return FlowField(
        points_um=assembler.positions * domain.channel_width_um,
        triangles=np.concatenate([np.stack(q, axis=1) for q in quarters]),
        in_plane_m_s=plane * unit.speed_m_s,
        vertical_m_s=vertical * unit.speed_m_s,
        pressure_modes_pa=np.concatenate([pressure, middle], axis=1) * unit.pressure_pa,
    )


def _through(chord: np.ndarray, problem: FlowProblem, state: np.ndarray, sampler: Sampler) -> float:
    points, weights, normal = _gauss_on(chord)
    plane, _ = problem.assembler.layout.velocity(state)
    through = np.einsum("c,cmn,m->n", normal, plane, problem.assembler.tensors.mean)
    return float(sampler.quadratic(through[None], points)[0] @ weights)


def _gauss_on(chord: np.ndarray) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    """Return points (n, 2), weights (n,) and unit normal (2,) of a chord."""
    nodes, weights = np.polynomial.legendre.leggauss(_POINTS)
    along = chord[1] - chord[0]
    length = np.hypot(*along)
    points = chord[0] + (nodes[:, None] + 1) / 2 * along
    return points, weights * length / 2, np.array([-along[1], along[0]]) / length
